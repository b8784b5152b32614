"""The law of claims."""

from __future__ import annotations

import math

import pytest

from plastic import rules
from plastic.laws import Case
from plastic.laws.claims import Claims, pairings
from plastic.rules._interface import Claim
from tests.laws.faulty import Sound, variant
from tests.laws.trying import assert_kept, told

#: by hand: 60 pairs 10 ms apart, far from each other, each 0.02 exp(-1/2)
CHANGE = 60 * 0.02 * math.exp(-0.5)


def claiming(low: float, high: float) -> type:
    return variant("Claiming", claims=(Claim("ten milliseconds potentiate", low, high),))


@pytest.mark.parametrize("name", [n for n in rules.names() if rules.find(n).claims])
def test_the_claims_of_the_catalogue_hold(name: str) -> None:
    assert_kept(rules.find(name), "claims")


def test_a_claim_that_is_true_holds() -> None:
    assert_kept(claiming(CHANGE - 1e-6, CHANGE + 1e-6), "claims")


@pytest.mark.parametrize(
    ("low", "high", "bound", "side"),
    [
        (CHANGE + 0.01, 9.0, CHANGE + 0.01, "at least"),
        (0.0, CHANGE - 0.01, CHANGE - 0.01, "at most"),
    ],
)
def test_a_claim_that_is_wrong_is_told(low: float, high: float, bound: float, side: str) -> None:
    broken = told("claims", Case(claiming(low, high)()))
    assert (broken.says, broken.one) == ("claim: ten milliseconds potentiate", side)
    assert (broken.rows[0].one, broken.rows[0].other) == (bound, pytest.approx(CHANGE, rel=1e-6))
    assert broken.case is not None
    assert broken.case.spikes == 120


def test_pairings_are_laid_out_as_the_claim_says() -> None:
    pre, post = pairings(Claim("", 0, 0, lag=-5, rate=4, times=2, pre=1, post=2, apart=3))
    assert pre == (5.0, 255.0)
    assert post == (0.0, 3.0, 250.0, 253.0)


def test_who_claims_nothing_is_left_alone() -> None:
    assert Claims().idle(Sound) == "claims nothing"
