"""The law of the same bits."""

from __future__ import annotations

import pytest

from plastic import rules
from plastic.laws import Case
from tests.laws.faulty import FAULTS, SLATE, Sound
from tests.laws.trying import assert_caught, assert_kept, told


@pytest.mark.parametrize("rule", [Sound, rules.find("covariance")])
def test_rules_that_only_compute_keep_it(rule: type) -> None:
    assert_kept(rule, "same_bits")


@pytest.mark.parametrize("fault", ["GlobalState", "Dice", "ChangedInPlace"])
def test_memory_chance_and_a_change_in_place_are_caught(fault: str) -> None:
    assert assert_caught(FAULTS[fault][0], "same_bits").spikes <= 2


def test_a_parameter_that_a_run_changed_is_told() -> None:
    case = Case(FAULTS["ChangedInPlace"][0](), ((),), (5.0,), 6.0)
    broken = told("same_bits", case)
    assert [(r.what, r.one) for r in broken.rows] == [("parameter up", 0.02)]
    assert broken.rows[0].other > 0.02


def test_both_runs_are_told() -> None:
    """By hand: one pair, then the pair turned round, which teaches nothing, and the pair again."""
    SLATE.clear()
    case = Case(FAULTS["GlobalState"][0](), ((0.0,),), (20.0,), 20.0)
    (row,) = told("same_bits", case).rows
    gain = 0.02 * 2.718281828459045**-1
    assert row.one == pytest.approx(1 + gain, rel=1e-14)
    assert row.other == pytest.approx(1 + 3 * gain, rel=1e-14)
