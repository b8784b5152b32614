"""The law that it takes two."""

from __future__ import annotations

import pytest

from plastic import rules
from plastic.checking.check import check_law
from plastic.laws import Case
from tests.laws.faulty import FAULTS, Sound
from tests.laws.trying import assert_caught, assert_kept, told


@pytest.mark.parametrize("rule", [Sound, *map(rules.find, ("pair_timing", "triplet_timing"))])
def test_rules_of_pairs_keep_it(rule: type) -> None:
    assert_kept(rule, "both_sides")


def test_a_rule_that_reads_its_own_jump_is_caught_by_one_spike() -> None:
    assert assert_caught(FAULTS["OwnJump"][0], "both_sides").spikes == 1


def test_what_one_spike_alone_did_is_told() -> None:
    """By hand: its own jump of 1, times 0.02."""
    broken = told("both_sides", Case(FAULTS["OwnJump"][0](), ((3.0,),), (), 5.0))
    assert broken.says == "spikes of the input alone change a weight"
    assert (broken.rows[0].one, broken.rows[0].other) == (1.0, pytest.approx(1.02))


def test_a_rule_that_learns_from_one_side_need_not_promise_it() -> None:
    assert check_law(rules.find("inhibitory_balance"), "both_sides").reason == "not promised"
