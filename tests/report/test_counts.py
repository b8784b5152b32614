import math

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from plastic.report.counts import Counts, counts_of, quantile, simulated

COUNTS = st.lists(st.integers(0, 60).map(float), min_size=1, max_size=30)


@given(COUNTS, st.sampled_from([0.25, 0.5, 0.75]))
def test_with_every_cell_there_the_quantile_is_the_usual_one(counts, share):
    assert quantile(counts, share) == pytest.approx(float(np.quantile(counts, share)))


@given(COUNTS, st.integers(0, 30), st.sampled_from([0.25, 0.5, 0.75]))
def test_a_quartile_is_finite_only_below_the_cells_that_never_got_there(counts, missing, share):
    found = quantile([*counts, *[math.inf] * missing], share)
    # order statistics needed by the linear rule, counted without the code
    last_needed = math.ceil(share * (len(counts) + missing - 1))
    assert math.isfinite(found) == (last_needed < len(counts))


def test_a_cell_more_that_does_not_get_there_never_makes_a_count_smaller():
    counts = [10.0, 20.0, 30.0, 40.0]
    found = [quantile([*counts, *[math.inf] * k], 0.5) for k in range(6)]
    assert found == sorted(found)
    assert found[-1] == math.inf


def test_counts_are_shown_as_people_write_them():
    half = counts_of([40, 50, 55, np.nan, np.nan, 45], 60)
    assert str(half) == "52 (46 to > 60)"
    assert str(counts_of([np.nan] * 5 + [40], 60)) == "> 60"
    assert str(counts_of([40.0, 50.0, 60.0], 60)) == "50 (45 to 55)"


def test_no_cell_at_all_is_no_count():
    none = counts_of([], 60)
    assert math.isnan(none.median)
    assert none.shown(none.median) == "-"
    assert isinstance(none, Counts)


@pytest.mark.parametrize(("cells", "told"), [(1, "1 simulated cell"), (12, "12 simulated cells")])
def test_one_simulated_cell_is_not_several(cells, told):
    assert simulated(cells) == told
