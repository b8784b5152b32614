import numpy as np
import pytest

from plastic.report.figures.rig import MEASURES, before_after
from plastic.report.figures.style import WIDTHS
from tests.report.figures import looking


def test_before_is_the_end_of_baseline_and_after_the_last_reading(bursts):
    rows = before_after(bursts, "bursts").rows
    arm = bursts["epsp_peak"].sel(
        rule="pair_timing", route="quantal_size", protocol="bursts", input="far"
    )
    row = next(
        r for r in rows
        if (r["rule"], r["route"], r["measure"])
        == ("pair_timing", "quantal_size", "mean EPSP (mV)")
    )  # fmt: skip
    time = bursts["time"].sel(protocol="bursts").values
    last = int(np.flatnonzero(time <= 0)[-1])
    assert row["before_median"] == pytest.approx(float(arm.isel(reading=last).median()))
    assert row["after_median"] == pytest.approx(float(arm.isel(reading=-1).median()))
    assert row["after_median"] > row["before_median"]


def test_every_measure_has_a_panel_with_its_unit(bursts):
    titles = [axes.get_title() for axes in before_after(bursts, "bursts").figure(180).axes]
    assert titles == list(MEASURES.values())
    assert [title for title in titles if "ms" in title or "mV" in title] == [
        "mean EPSP (mV)", "rise time, 20-80 % (ms)", "half-width (ms)",
    ]  # fmt: skip


@pytest.mark.parametrize("width", WIDTHS)
def test_what_does_not_differ_is_not_blown_up(bursts, width):
    flat = bursts.copy(deep=True)
    flat["failure_rate"][:] = 0.0
    flat["failure_rate"][..., -1] = 3e-9
    flat["paired_pulse_ratio"][:] = 1.0
    picture = before_after(flat, "bursts")
    figure = picture.figure(width)
    assert looking.outside(figure) == []
    assert looking.overlapping(figure) == []
    for axes in figure.axes:
        if axes.get_title() in ("failure rate", "paired-pulse ratio"):
            assert np.diff(axes.get_xlim())[0] >= 0.0199


def test_a_failure_rate_of_0_everywhere_has_an_axis_of_percents(bursts):
    flat = bursts.copy(deep=True)
    flat["failure_rate"][:] = 0.0
    axes = next(
        axes for axes in before_after(flat, "bursts").figure(85).axes
        if axes.get_title() == "failure rate"
    )  # fmt: skip
    low, high = axes.get_xlim()
    assert -0.01 < low < 0 < 0.09 < high < 0.11
