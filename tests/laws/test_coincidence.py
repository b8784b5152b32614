"""The law of coincident spikes."""

from __future__ import annotations

import pytest

from plastic import rules
from plastic.checking.check import check_law
from plastic.laws import Case
from tests.laws.faulty import FAULTS, SLATE, Sound
from tests.laws.trying import assert_caught, assert_kept, told

ORDER = FAULTS["OrderOfHooks"][0]


@pytest.mark.parametrize("rule", [Sound, *map(rules.find, ("suppression_timing", "pair_timing"))])
def test_rules_that_read_what_was_before_keep_it(rule: type) -> None:
    assert_kept(rule, "coincidence")


def test_a_hook_that_knows_of_the_other_is_caught() -> None:
    assert_caught(ORDER, "coincidence")


def test_one_by_one_and_together_are_told() -> None:
    """By hand: without a history neither changes anything; seeing the other costs 0.01."""
    SLATE.clear()
    (row,) = told("coincidence", Case(ORDER(), ((),), (), 10.0)).rows
    assert (row.one, row.other) == (1.0, 0.99)


def test_rates_have_no_instants() -> None:
    assert "order within a window" in check_law(rules.find("covariance"), "coincidence").reason
