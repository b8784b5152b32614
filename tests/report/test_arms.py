import math

import numpy as np
import pytest

from plastic.report.arms import arm_of
from tests.report.conftest import CELLS, ROUTES, RULES, changed


def arm(dataset):
    return arm_of(dataset, RULES[0], ROUTES[1], "bursts")


def test_medians_and_shares_are_those_of_the_cells(fake_results):
    counts = np.array([10, 20, 30, 40, 50, 60, 5, 15, 25, 35, 45, 55.0])
    found = arm(changed(fake_results, "repeats_to_criterion", counts)).expressed
    assert (found.repeats.median, found.repeats.low, found.repeats.high) == (32.5, 18.75, 46.25)
    assert found.reached == 1.0


def test_cells_that_never_get_there_push_the_quartile_beyond_the_protocol(fake_results):
    counts = np.array([10, 20, 30, 40, 50, 60, 12] + [np.nan] * 5)
    found = arm(changed(fake_results, "repeats_to_criterion", counts)).expressed
    assert str(found.repeats) == "55 (28 to > 60)"
    assert found.reached == pytest.approx(7 / 12)


def test_cells_already_there_at_baseline_are_told_apart(fake_results):
    there = np.array([3] * 4 + [0] * 8, dtype=np.int8)
    counts = np.array([0.0] * 4 + [20.0] * 8)
    data = changed(changed(fake_results, "verdict", there), "repeats_to_criterion", counts)
    found = arm(data).expressed
    assert found.repeats.median == 20  # and not drawn down by the four zeros
    assert found.reached == pytest.approx(8 / 12)
    assert found.verdicts == {"reached": pytest.approx(8 / 12), "already at baseline": 1 / 3}


def test_when_every_cell_was_there_already_there_is_no_count(fake_results):
    data = changed(fake_results, "verdict", np.full(CELLS, 3, dtype=np.int8))
    found = arm(data)
    assert math.isnan(found.expressed.repeats.median)
    assert found.headline() == "already at baseline"


def test_expressed_and_induced_are_read_from_their_own_variables(fake_results):
    data = changed(fake_results, "repeats_to_criterion_induced", np.full(CELLS, 7.0))
    found = arm(data)
    assert found.induced.repeats.median == 7
    assert found.expressed.repeats.median != 7


def test_never_is_told_per_cell_with_its_cause(fake_results):
    verdict = np.array([6] * 7 + [0] * 5, dtype=np.int8)
    cause = np.array([1] * 4 + [0] * 3 + [-1] * 5, dtype=np.int8)
    data = changed(changed(fake_results, "verdict", verdict), "never_cause", cause)
    data = changed(data, "repeats_to_criterion", np.array([np.nan] * 7 + [30.0] * 5))
    found = arm(data)
    assert found.headline() == "never"
    assert found.cause == "dendrite diameter at its limit"
    assert found.never_causes == {
        "dendrite diameter at its limit": pytest.approx(4 / 12),
        "release probability at its limit": pytest.approx(3 / 12),
    }


def test_an_arm_that_does_not_apply_has_no_counts(fake_results):
    found = arm_of(fake_results, "sliding_threshold", "spine_neck", "bursts")
    assert (found.status, found.expressed, found.headline()) == (
        "not applicable",
        None,
        "not applicable",
    )


def test_what_is_not_finite_is_no_lag(fake_results):
    lags = np.array([10.0, 12.0, 14.0] + [np.nan] * (CELLS - 3))
    assert arm(changed(fake_results, "realised_lag", lags)).lag == 12.0
    none = arm(changed(fake_results, "realised_lag", np.full(CELLS, np.nan)))
    assert math.isnan(none.lag)


@pytest.mark.parametrize(
    ("verdicts", "word"),
    [([2] * 12, "> 60"), ([4] * 8 + [2] * 4, "depressed"), ([5] * 12, "partner failed"),
     ([0] * 4 + [6] * 5 + [2] * 3, "> 60"), ([0] * 2 + [6] * 7 + [2] * 3, "never")],
)  # fmt: skip
def test_the_headline_is_what_the_middle_cell_did(verdicts, word, fake_results):
    flags = np.array(verdicts, dtype=np.int8)
    data = changed(fake_results, "verdict", flags)
    data = changed(data, "repeats_to_criterion", np.where(flags == 0, 20.0, np.nan))
    assert arm(data).headline() == word
