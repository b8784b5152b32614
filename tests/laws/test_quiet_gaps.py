"""The law of quiet gaps."""

from __future__ import annotations

import pytest

from plastic import rules
from plastic.laws import Case
from tests.laws.faulty import FAULTS, Sound
from tests.laws.trying import assert_caught, assert_kept, told

EULER = FAULTS["EulerDecay"][0]


@pytest.mark.parametrize("rule", [Sound, rules.find("sliding_threshold")])
def test_exact_decay_keeps_it(rule: type) -> None:
    assert_kept(rule, "quiet_gaps")


def test_a_decay_in_steps_is_caught() -> None:
    assert assert_caught(EULER, "quiet_gaps").spikes <= 2


def test_the_two_roads_are_told() -> None:
    """By hand: 10 ms of 20 at once leave 1/2, twice 5 ms leave (3/4)^2."""
    case = Case(EULER(), ((0.0,),), (), 10.0, {"permille": 500, "cuts": 1})
    (row,) = told("quiet_gaps", case).rows
    assert (row.what, row.one, row.other) == ("m", 0.5, 0.5625)
