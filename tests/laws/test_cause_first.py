"""The law of cause and effect."""

from __future__ import annotations

import math

import pytest

from plastic import rules
from plastic.laws import Case
from tests.laws.faulty import FAULTS, SLATE, Sound
from tests.laws.trying import assert_caught, assert_kept, holds, told

PEEKING = FAULTS["FuturePeeking"][0]


@pytest.mark.parametrize("rule", [Sound, rules.find("sliding_threshold")])
def test_rules_without_memory_keep_it(rule: type) -> None:
    assert_kept(rule, "cause_first")


def test_a_rule_that_knows_later_spikes_is_caught() -> None:
    assert_caught(PEEKING, "cause_first")


def test_what_is_there_before_is_told_with_and_without_what_comes() -> None:
    """By hand: the cell, the input 10 ms later, and the input again; it halves what it foresees."""
    SLATE["times"] = set()
    case = Case(PEEKING(), ((10.0, 15.0),), (0.0,), 20.0, {"from_the_end": 1})
    (row,) = told("cause_first", case).rows
    left = 0.01 * math.exp(-0.5)
    assert row.other == pytest.approx(1 - left, rel=1e-14)
    assert row.one == pytest.approx(1 - left / 2, rel=1e-14)


def test_a_case_without_spikes_says_nothing() -> None:
    assert holds("cause_first", Case(Sound(), ((),), (), 5.0, {"from_the_end": 1}))
