"""The law of the clock."""

from __future__ import annotations

import math

import pytest

from plastic import rules
from plastic.laws import Case
from tests.laws.faulty import FAULTS, Sound
from tests.laws.trying import assert_caught, assert_kept, told

CLOCKED = FAULTS["TimeOfDay"][0]


@pytest.mark.parametrize("rule", [Sound, *map(rules.find, ("synaptic_scaling", "covariance"))])
def test_rules_that_know_only_intervals_keep_it(rule: type) -> None:
    assert_kept(rule, "time_origin")


def test_a_rule_that_reads_the_clock_is_caught() -> None:
    assert assert_caught(CLOCKED, "time_origin").spikes == 2


def test_both_hours_are_told() -> None:
    """By hand: one pair 10 ms apart, times 1 + sin(t)/1000."""
    (row,) = told("time_origin", Case(CLOCKED(), ((0.0,),), (10.0,), 10.0, {"shift": 7})).rows
    one, other = (1 + 0.02 * math.exp(-0.5) * (1 + 1e-3 * math.sin(t)) for t in (10.0, 17.0))
    assert (row.one, row.other) == (pytest.approx(one, rel=1e-14), pytest.approx(other, rel=1e-14))
