"""The law of amplitudes."""

from __future__ import annotations

import math

import pytest

from plastic import rules
from plastic.laws import Case
from plastic.laws.amplitudes import Amplitudes
from tests.laws.faulty import FAULTS, Sound, variant
from tests.laws.trying import assert_caught, assert_kept, told

NAMES = ("pair_timing", "principal_component", "synaptic_scaling")


@pytest.mark.parametrize("rule", [Sound, *map(rules.find, NAMES)])
def test_rules_whose_amplitudes_set_the_size_keep_it(rule: type) -> None:
    assert_kept(rule, "amplitudes")


@pytest.mark.parametrize("fault", ["RoundedChange", "SinglePrecision", "NoAmplitude"])
def test_lost_digits_and_squares_are_caught(fault: str) -> None:
    assert assert_caught(FAULTS[fault][0], "amplitudes").spikes == 2


def test_the_square_is_told() -> None:
    """By hand: three times the amplitude, nine times the change, and a third of that."""
    case = Case(FAULTS["NoAmplitude"][0](), ((0.0,),), (20.0,), 20.0)
    (row,) = told("amplitudes", case).rows
    assert row.other / row.one == pytest.approx(3, rel=1e-12)
    assert row.one == pytest.approx(0.02**2 * math.exp(-1) * 1e-30, rel=1e-12)


def test_who_declares_none_is_left_alone() -> None:
    assert Amplitudes().idle(variant("Nameless", amplitudes=())) == "declares no amplitudes"
