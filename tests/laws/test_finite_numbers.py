"""The law of finite numbers."""

from __future__ import annotations

import math

import pytest

from plastic import rules
from plastic.checking.search import judged
from plastic.laws import Case, Law
from plastic.laws.finite_numbers import FiniteNumbers
from plastic.rules._interface import weight
from tests.laws.faulty import FAULTS, Sound, variant
from tests.laws.trying import assert_caught, assert_kept


def said(law: Law, case: Case) -> str:
    broken = judged(law, case)
    assert broken is not None
    return broken.says


@pytest.mark.parametrize("rule", [Sound, rules.find("synaptic_scaling")])
def test_rules_that_survive_any_gap_keep_it(rule: type) -> None:
    assert_kept(rule, "finite_numbers")


@pytest.mark.parametrize("fault", ["LongGap", "Division", "UnknownChange"])
def test_overflow_division_and_an_unknown_variable_are_caught(fault: str) -> None:
    assert assert_caught(FAULTS[fault][0], "finite_numbers").spikes <= 2


def test_what_a_hook_raised_and_on_what_is_told() -> None:
    case = Case(FAULTS["Division"][0](), ((),), (5.0,), 5.0)
    told = said(FiniteNumbers(), case)
    assert told.startswith("Division.at_post: float division by zero at 5 ms with {")
    assert "'r': 0.0" in told


def test_an_error_that_is_not_of_arithmetic_is_told_by_its_name() -> None:
    case = Case(FAULTS["UnknownChange"][0](), ((),), (5.0,), 5.0)
    assert said(FiniteNumbers(), case) == "it raises KeyError: 'v'"


def test_a_number_that_is_none_is_caught_where_nobody_raises() -> None:
    """Two finite changes add up to more than the largest number."""
    growing = variant(
        "Growing",
        at_post=lambda self, r, o: {"w": 1.7e308},
        w=weight(1.0, low=-math.inf, high=math.inf),
    )
    case = Case(growing(), ((),), (1.0, 2.0, 3.0), 3.0)
    assert said(FiniteNumbers(), case) == "a variable is no number"
