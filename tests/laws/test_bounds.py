"""The law of bounds."""

from __future__ import annotations

import math

import pytest

from plastic import rules
from plastic.engine.learning import Learner
from plastic.laws import Case
from tests.laws.faulty import FAULTS, Sound
from tests.laws.trying import assert_caught, assert_kept, told

START = {"sixteenths": 16}


@pytest.mark.parametrize("rule", [Sound, *map(rules.find, ("pair_timing", "power_law_timing"))])
def test_bounded_rules_keep_it_from_any_start(rule: type) -> None:
    assert_kept(rule, "bounds")


@pytest.mark.parametrize("fault", ["MissingBound", "StartBeyondBound"])
def test_a_bound_that_is_missing_or_passed_is_caught(fault: str) -> None:
    assert_caught(FAULTS[fault][0], "bounds")


@pytest.mark.parametrize(
    ("fault", "one", "other"), [("MissingBound", 0.0, math.inf), ("StartBeyondBound", 4.0, 5.0)]
)
def test_the_bound_is_told(fault: str, one: float, other: float) -> None:
    (row,) = told("bounds", Case(FAULTS[fault][0](), ((),), (), 1.0, START)).rows
    assert (row.one, row.other) == (one, other)


def test_a_weight_that_leaves_its_bounds_between_spikes_is_caught() -> None:
    """The engine keeps bounds after every change; here it is made to forget them."""
    with pytest.MonkeyPatch.context() as patched:
        patched.setattr(Learner, "_bound", lambda self: None)
        case = Case(Sound(), ((0.0,),), (20.0,), 20.0, START)
        (row,) = told("bounds", case).rows
    assert row.one == 4.0
    assert row.other == pytest.approx(4.0 + 0.02 * math.exp(-1), rel=1e-14)
