"""The law of half weights."""

from __future__ import annotations

import math

import pytest

from plastic import rules
from plastic.checking.check import check_law
from plastic.laws import Case
from tests.laws.faulty import Sound, variant
from tests.laws.trying import assert_caught, assert_kept, told


def test_a_rule_in_proportion_to_the_weight_keeps_it() -> None:
    assert_kept(rules.find("synaptic_scaling"), "half_weights")


def test_a_rule_that_promises_it_and_adds_is_caught() -> None:
    assert assert_caught(variant("Adding", promises=("half_weights",)), "half_weights").spikes == 2


def test_whole_and_halves_are_told() -> None:
    """By hand: the potentiation of a pair 20 ms apart, once on 1 and twice on 1/2."""
    (row,) = told("half_weights", Case(Sound(), ((0.0,),), (20.0,), 20.0)).rows
    gain = 0.02 * math.exp(-1)
    assert row.one == pytest.approx(1.0 + gain, rel=1e-14)
    assert row.other == pytest.approx(1.0 + 2 * gain, rel=1e-14)


def test_who_does_not_promise_it_is_left_alone() -> None:
    verdict = check_law(Sound, "half_weights")
    assert (verdict.status, verdict.reason) == ("idle", "not promised")
