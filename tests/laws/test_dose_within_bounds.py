"""The law of the dose."""

from __future__ import annotations

import pytest

from plastic import rules
from plastic.laws import Case
from plastic.laws.dose_within_bounds import DoseWithinBounds
from tests.laws.faulty import FAULTS, Sound
from tests.laws.trying import assert_caught, assert_kept, told


@pytest.mark.parametrize("name", ["pair_timing", "power_law_timing"])
def test_measured_rules_keep_it(name: str) -> None:
    assert_kept(rules.find(name), "dose_within_bounds")


def test_a_rule_whose_dose_ends_at_its_bound_is_caught() -> None:
    assert_caught(FAULTS["TooStrong"][0], "dose_within_bounds")


def test_the_bound_and_the_pairings_are_told() -> None:
    """By hand: 60 times 0.9 exp(-1/2) is far above the bound of 4."""
    case = Case(FAULTS["TooStrong"][0](), ((),), (), 1.0, {"lag": 10, "seconds": 1})
    broken = told("dose_within_bounds", case)
    assert (broken.rows[0].what, broken.rows[0].other) == ("w", 4.0)
    assert broken.case is not None
    assert broken.case.spikes == 120
    assert broken.case.post[0] - broken.case.pre[0][0] == 10


def test_a_rule_without_a_dose_is_left_alone() -> None:
    assert DoseWithinBounds().idle(Sound) == "declares no dose"
