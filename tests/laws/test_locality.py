"""The law of locality."""

from __future__ import annotations

import math

import pytest

from plastic import rules
from plastic.laws import Case
from tests.laws.faulty import FAULTS, SLATE, Sound
from tests.laws.trying import assert_caught, assert_kept, told

TALKING = FAULTS["CrossTalk"][0]


@pytest.mark.parametrize("rule", [Sound, *map(rules.find, ("covariance", "sliding_threshold"))])
def test_an_input_that_hears_itself_and_the_cell_keeps_it(rule: type) -> None:
    """Rates too: windows are shared, which a third input makes the same in both runs."""
    assert_kept(rule, "locality")


def test_inputs_that_talk_to_each_other_are_caught() -> None:
    assert_caught(TALKING, "locality")


def test_the_input_is_told_beside_a_silent_and_beside_an_active_one() -> None:
    """By hand: within 5 ms of another input's spike half the depression is left."""
    SLATE.clear()
    case = Case(TALKING(), ((12.0,), (10.0,)), (0.0,), 20.0)
    (row,) = told("locality", case).rows
    left = 0.01 * math.exp(-0.6)
    assert row.one == pytest.approx(1 - left, rel=1e-14)
    assert row.other == pytest.approx(1 - left / 2, rel=1e-14)
