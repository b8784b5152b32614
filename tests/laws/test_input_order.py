"""The law of renumbered inputs."""

from __future__ import annotations

import math

import pytest

from plastic.laws import Case
from tests.laws.faulty import FAULTS, SLATE, Sound
from tests.laws.trying import assert_caught, assert_kept, told

TURNS = FAULTS["IndexDependence"][0]


def test_a_rule_that_knows_no_numbers_keeps_it() -> None:
    assert_kept(Sound, "input_order")


def test_a_rule_that_treats_inputs_by_turns_is_caught() -> None:
    assert_caught(TURNS, "input_order")


def test_both_orders_are_told() -> None:
    """By hand: the first input asked is depressed fully, the second by nine tenths."""
    SLATE.clear()
    full, less = (1 - part * 0.01 * math.exp(-0.5) for part in (1.0, 0.9))
    found = told("input_order", Case(TURNS(), ((10.0,), (10.0,)), (0.0,), 10.0)).rows
    wanted = [("w of input 0", full, less), ("w of input 1", less, full)]
    assert [(r.what, r.one, r.other) for r in found] == [
        (what, pytest.approx(a, rel=1e-14), pytest.approx(b, rel=1e-14)) for what, a, b in wanted
    ]
