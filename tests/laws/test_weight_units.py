"""The law of the unit of a weight."""

from __future__ import annotations

import pytest

from plastic import rules
from plastic.laws import Case
from plastic.laws.weight_units import WeightUnits
from plastic.parameters import parameter
from plastic.rules._interface import weight
from tests.laws.faulty import Sound, variant
from tests.laws.trying import assert_caught, assert_kept, told

#: a weight in pA whose change forgets the unit
UNITLESS = variant(
    "Unitless",
    start=parameter(2.0, "pA", low=0.1, high=10, source="invented"),
    w=weight("start", low=0.0, high=100.0),
)


def test_a_rule_in_picoampere_keeps_it() -> None:
    assert_kept(rules.find("power_law_timing"), "weight_units")


def test_a_change_that_forgets_the_unit_is_caught() -> None:
    assert assert_caught(UNITLESS, "weight_units").spikes == 2


def test_both_units_are_told() -> None:
    """By hand: 5 times 2 pA is 10 pA, but the gain stays 0.02 / e."""
    case = Case(UNITLESS(), ((0.0,),), (20.0,), 20.0, {"times": 5})
    (row,) = told("weight_units", case).rows
    gain = 0.02 * 2.718281828459045**-1
    assert row.one == pytest.approx(5 * (2 + gain), rel=1e-14)
    assert row.other == pytest.approx(10 + gain, rel=1e-14)


def test_a_weight_without_a_unit_is_left_alone() -> None:
    assert WeightUnits().idle(Sound) == "no weight has a unit"
