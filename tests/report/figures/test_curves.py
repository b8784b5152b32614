import numpy as np
import pytest

from plastic.report.figures.curves import learning_curve, quartiles


def threshold(picture):
    lines = picture.figure(85).axes[0].get_lines()
    found = next(li for li in lines if li.get_label().startswith(("crit", "spike")))
    return list(found.get_ydata())


def test_the_threshold_line_stands_at_the_criterion(bursts):
    stricter = bursts.assign_attrs(alone_fires=0.9)
    assert threshold(learning_curve(bursts, "bursts", "fires_alone")) == [0.5, 0.5]
    assert threshold(learning_curve(stricter, "bursts", "fires_alone")) == [0.9, 0.9]


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
