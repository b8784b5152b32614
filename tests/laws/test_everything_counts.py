"""The law that everything counts."""

from __future__ import annotations

import pytest

from plastic import rules
from plastic.laws import Case
from tests.laws.faulty import FAULTS, Sound
from tests.laws.trying import assert_caught, assert_kept, told

NAMES = ("suppression_timing", "covariance", "power_law_timing")


@pytest.mark.parametrize("rule", [Sound, *map(rules.find, NAMES)])
def test_rules_that_use_what_they_declare_keep_it(rule: type) -> None:
    assert_kept(rule, "everything_counts")


@pytest.mark.parametrize(
    ("fault", "what"), [("ParameterIgnored", "parameter tau"), ("TraceIgnored", "variable x")]
)
def test_what_changes_nothing_is_caught_and_named(fault: str, what: str) -> None:
    rule = FAULTS[fault][0]
    assert_caught(rule, "everything_counts")
    assert [row.what for row in told("everything_counts", Case(rule())).rows] == [what]
