"""The reduced symmetric pair rule: its drift under Poisson trains."""

from __future__ import annotations

import pytest

from plastic.rules.reduced_pair_timing import ReducedPairTiming
from tests.published.schemes import assert_drifts_as, reduced


def test_the_drift_is_that_of_neighbours_in_the_merged_train_and_of_no_other() -> None:
    """Morrison, Diesmann & Gerstner 2008 name the schemes (from memory, high); with R = r_pre +
    r_post the drift r_pre r_post (A+/(R + 1/tau+) - A-/(R + 1/tau-)) is derived and checked.
    Control: the drifts of the other schemes are more than four standard errors away."""
    assert reduced(12, 20) == pytest.approx(0.3970, abs=5e-5)  # as printed in the derivation
    assert_drifts_as(ReducedPairTiming, "reduced", seed=23)
