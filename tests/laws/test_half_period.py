"""The law of half a period."""

from __future__ import annotations

import math

import pytest

from plastic import rules
from plastic.checking.check import check_law
from plastic.laws import Case
from plastic.laws.half_period import HalfPeriod
from tests.laws.faulty import FAULTS, Sound, variant
from tests.laws.trying import assert_caught, assert_kept, told

RESET = FAULTS["NeverReset"][0]


@pytest.mark.parametrize(
    "rule", [Sound, *map(rules.find, ("triplet_timing", "suppression_timing"))]
)
def test_rules_that_forget_how_a_train_began_keep_it(rule: type) -> None:
    assert_kept(rule, "half_period", examples=20)


def test_a_memory_of_the_first_spike_is_caught() -> None:
    assert_caught(RESET, "half_period")


def test_both_lags_are_told() -> None:
    """By hand, in a steady train of period P: each side sees exp(-P/2 tau) / (1 - exp(-P/tau)).

    Of two trains, one begins with the input and is potentiated 3/2 as much, the other half as much.
    """
    (row,) = told("half_period", Case(RESET(), ((),), (), 1.0, {"sixteenths": 16})).rows
    period = 20.0
    seen = math.exp(-period / 40) / (1 - math.exp(-period / 20))
    assert row.one == pytest.approx(seen * (0.5 * 0.02 - 0.01), rel=1e-6, abs=1e-9)
    assert row.other == pytest.approx(seen * (1.5 * 0.02 - 0.01), rel=1e-6)


@pytest.mark.parametrize(
    ("rule", "why"),
    [
        (rules.find("covariance"), "reads rates"),
        (rules.find("synaptic_scaling"), "moves in silence"),
        (variant("Nameless", amplitudes=()), "no amplitudes"),
    ],
)
def test_where_lags_do_not_count_it_is_silent(rule: type, why: str) -> None:
    assert why in HalfPeriod().idle(rule)
    assert check_law(rule, "half_period").status == "idle"
