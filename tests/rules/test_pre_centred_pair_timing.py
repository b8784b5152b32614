"""The presynaptic-centred pair rule: who is paired with whom."""

from __future__ import annotations

import pytest

from plastic.rules.pre_centred_pair_timing import PreCentredPairTiming
from tests.rules.partners import assert_only_scheme, change, down, up


@pytest.mark.parametrize("seed", range(8))
def test_a_presynaptic_spike_is_paired_with_the_postsynaptic_ones_around_it(seed: int) -> None:
    """Izhikevich & Desai 2003 (from memory, high): the preceding and the following postsynaptic
    spike of every presynaptic one; sum over listed pairs."""
    assert_only_scheme(PreCentredPairTiming, "pre_centred", seed)


def test_a_presynaptic_spike_potentiates_only_once() -> None:
    found = change(PreCentredPairTiming, [0.0], [5.0, 9.0, 200.0])
    assert found == pytest.approx(up(5), rel=1e-11)


def test_all_presynaptic_spikes_of_a_gap_potentiate_with_its_end() -> None:
    found = change(PreCentredPairTiming, [0.0, 2.0, 6.0], [10.0])
    assert found == pytest.approx(up(10) + up(8) + up(4), rel=1e-11)


def test_a_presynaptic_spike_waits_for_the_postsynaptic_one_after_a_coincident_one() -> None:
    """At 10 ms neither sees the other: the pre pairs with 3 ms before and 14 ms after."""
    found = change(PreCentredPairTiming, [10.0], [3.0, 10.0, 14.0])
    assert found == pytest.approx(up(4) - down(7), rel=1e-11)


def test_what_was_paired_long_ago_stays_paired() -> None:
    """The remainder is a difference of two numbers: it must be nothing, not nearly something."""
    post = [5.0, *(100.0 * k for k in range(1, 40))]
    assert change(PreCentredPairTiming, [0.0], post) == pytest.approx(up(5), rel=1e-11)


def test_the_published_windows_are_per_protocol_of_sixty_pairs() -> None:
    """Bi & Poo 2001; Izhikevich & Desai 2003 (1.03, 0.51, 14, 34 ms); both from memory (mid)."""
    rule, cortex = PreCentredPairTiming(), PreCentredPairTiming.from_set("visual_cortex")
    assert (60 * rule.a_plus, 60 * rule.a_minus) == pytest.approx((0.777, 0.273), rel=1e-12)
    assert (60 * cortex.a_plus, 60 * cortex.a_minus) == pytest.approx((1.03, 0.51), rel=1e-12)
    assert (rule.tau_plus, rule.tau_minus, rule.dose) == (16.8, 33.7, 60)
    assert (cortex.tau_plus, cortex.tau_minus) == (14, 34)
