"""The law of the sign."""

from __future__ import annotations

import pytest

from plastic import rules
from plastic.laws import Case
from tests.laws.faulty import FAULTS, Sound
from tests.laws.trying import assert_caught, assert_kept, told

THROUGH = FAULTS["ClippedSign"][0]


@pytest.mark.parametrize("rule", [Sound, rules.find("principal_component")])
def test_weights_with_a_bound_at_zero_keep_it(rule: type) -> None:
    """Also where a published set is signed: whoever sets such a bound wants it."""
    assert_kept(rule, "sign")


def test_a_weight_that_goes_through_zero_is_caught() -> None:
    assert assert_caught(THROUGH, "sign").spikes == 2


def test_start_and_end_are_told() -> None:
    """By hand: 1 less 10 exp(-1/10) is far below the bound of -1."""
    (row,) = told("sign", Case(THROUGH(), ((2.0,),), (0.0,), 2.0, {"decades": 1})).rows
    assert (row.one, row.other) == (1.0, -1.0)
