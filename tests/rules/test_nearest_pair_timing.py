"""The nearest-spike pair rule: who is paired with whom."""

from __future__ import annotations

import pytest

from plastic.rules.nearest_pair_timing import NearestPairTiming
from tests.rules.partners import assert_only_scheme, change, down, up


@pytest.mark.parametrize("seed", range(8))
def test_a_spike_is_paired_with_the_last_one_of_the_other_side(seed: int) -> None:
    """Morrison, Diesmann & Gerstner 2008 (from memory, high), symmetric; sum over listed pairs."""
    assert_only_scheme(NearestPairTiming, "nearest", seed)


def test_the_last_presynaptic_spike_replaces_the_one_before() -> None:
    assert change(NearestPairTiming, [0.0, 6.0], [10.0]) == pytest.approx(up(4), rel=1e-11)


def test_one_postsynaptic_spike_depresses_every_presynaptic_one_until_the_next() -> None:
    found = change(NearestPairTiming, [4.0, 9.0], [0.0])
    assert found == pytest.approx(-down(4) - down(9), rel=1e-11)


def test_a_coincident_spike_is_no_partner_and_the_one_before_it_still_is() -> None:
    found = change(NearestPairTiming, [0.0, 10.0], [3.0, 10.0])
    assert found == pytest.approx(up(3) + up(10) - down(7), rel=1e-11)


def test_the_published_windows_are_those_of_the_pair_rule() -> None:
    """Bi & Poo 2001 and Froemke & Dan 2002, from memory (mid): per protocol of 60 pairs."""
    rule, cortex = NearestPairTiming(), NearestPairTiming.from_set("visual_cortex")
    assert (60 * rule.a_plus, 60 * rule.a_minus) == pytest.approx((0.777, 0.273), rel=1e-12)
    assert (60 * cortex.a_plus, 60 * cortex.a_minus) == pytest.approx((1.03, 0.51), rel=1e-12)
    assert (rule.tau_plus, rule.tau_minus, rule.dose) == (16.8, 33.7, 60)
    assert (cortex.tau_plus, cortex.tau_minus) == (13.3, 34.5)
