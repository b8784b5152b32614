import numpy as np
import pytest

from plastic.report.figures.curves import learning_curve, quartiles


def threshold(picture):
    lines = picture.figure(85).axes[0].get_lines()
    found = next(li for li in lines if li.get_label().startswith(("half", "spike")))
    return list(found.get_ydata())


def shares(dataset):
    """Return the drawn line of one arm."""
    rows = learning_curve(dataset, "bursts", "fires_alone").rows
    mine = [r for r in rows if (r["rule"], r["route"]) == ("pair_timing", "quantal_size")]
    return [row["share_at_criterion"] for row in mine]


@pytest.mark.parametrize("criterion", [0.5, 0.9])
def test_the_line_is_the_share_of_cells_at_the_criterion(bursts, criterion):
    strict = bursts.assign_attrs(alone_fires=criterion)
    one = bursts["fires_alone"].sel(
        rule="pair_timing", route="quantal_size", protocol="bursts", input="far"
    )
    during = one.isel(reading=slice(5, 66))  # six readings of baseline, sixty repeats
    counted = [sum(p >= criterion for p in cells) / 12 for cells in during.values.T]
    assert shares(strict) == counted
    assert 0.2 < counted[-1] < 1.0 or len(set(counted)) > 5
    said = learning_curve(strict, "bursts", "fires_alone").figure(85).texts[0].get_text()
    assert f"far alone fires the cell with probability ≥ {criterion:g}" in said.replace("\n", " ")


def test_with_cells_all_or_none_the_line_is_not_glued_to_the_criterion(bursts):
    """The median of six silent and six firing cells is 0.5, whatever the criterion."""
    split = bursts.copy(deep=True)
    split["fires_alone"][:] = 0.0
    split["fires_alone"][{"cell": slice(0, 5)}] = 1.0
    assert shares(split) == [5 / 12] * 61


def test_a_share_is_compared_with_half_of_the_cells(bursts):
    assert threshold(learning_curve(bursts, "bursts", "fires_alone")) == [0.5, 0.5]


def test_the_threshold_of_an_epsp_is_that_of_the_median_cell(bursts):
    above = float(np.median(bursts["threshold"].values)) + 68.0
    found = threshold(learning_curve(bursts, "bursts", "epsp_peak"))
    assert found == pytest.approx([above, above])


def test_a_curve_runs_from_the_end_of_baseline_to_the_last_repeat(bursts):
    rows = learning_curve(bursts, "bursts", "fires_alone").rows
    mine = [r for r in rows if (r["rule"], r["route"]) == ("pair_timing", "quantal_size")]
    assert [row["repeats"] for row in mine] == list(range(61))


def test_induced_comes_before_expressed(bursts):
    def middle(variable):
        rows = learning_curve(bursts, "bursts", variable).rows
        return next(
            row["median"] for row in rows
            if (row["rule"], row["route"], row["repeats"]) == ("pair_timing", "quantal_size", 40.0)
        )  # fmt: skip

    assert middle("fires_alone_induced") > middle("fires_alone")


def test_quartiles_leave_out_what_is_not_known():
    values = np.array([[1.0, np.nan], [2.0, np.nan], [3.0, np.nan], [np.nan, np.nan]])
    found = quartiles(values)
    assert found[:, 0].tolist() == [1.5, 2.0, 2.5]
    assert np.isnan(found[:, 1]).all()
