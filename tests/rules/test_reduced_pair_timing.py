"""The reduced symmetric pair rule: who is paired with whom."""

from __future__ import annotations

import pytest

from plastic.rules.reduced_pair_timing import ReducedPairTiming
from tests.rules.partners import assert_only_scheme, change, down, up


@pytest.mark.parametrize("seed", range(8))
def test_only_neighbours_of_the_merged_train_are_paired(seed: int) -> None:
    """Morrison, Diesmann & Gerstner 2008 (from memory, high), reduced symmetric; sum over listed
    pairs."""
    assert_only_scheme(ReducedPairTiming, "reduced", seed)


def test_a_second_postsynaptic_spike_finds_its_partner_taken() -> None:
    assert change(ReducedPairTiming, [0.0], [5.0, 9.0]) == pytest.approx(up(5), rel=1e-11)


def test_a_second_presynaptic_spike_finds_its_partner_taken() -> None:
    assert change(ReducedPairTiming, [5.0, 9.0], [0.0]) == pytest.approx(-down(5), rel=1e-11)


@pytest.mark.parametrize(
    ("pre", "post", "lag"), [([0.0], [0.0, 6.0], 6.0), ([0.0, 6.0], [0.0], -6.0)]
)
def test_of_two_coincident_spikes_neither_hides_the_other(
    pre: list[float], post: list[float], lag: float
) -> None:
    wanted = up(lag) if lag > 0 else -down(-lag)
    assert change(ReducedPairTiming, pre, post) == pytest.approx(wanted, rel=1e-11)


def test_after_a_gap_in_which_everything_is_forgotten_pairing_goes_on() -> None:
    """After 1e6 ms every trace is exactly zero, and equal traces must not confuse the order."""
    late = 1e6
    found = change(ReducedPairTiming, [0.0, late + 5], [3.0, late])
    assert found == pytest.approx(up(3) - down(5), rel=1e-11)


def test_the_published_windows_are_those_of_the_pair_rule() -> None:
    """Bi & Poo 2001 and Froemke & Dan 2002, from memory (mid): per protocol of 60 pairs."""
    rule, cortex = ReducedPairTiming(), ReducedPairTiming.from_set("visual_cortex")
    assert (60 * rule.a_plus, 60 * rule.a_minus) == pytest.approx((0.777, 0.273), rel=1e-12)
    assert (60 * cortex.a_plus, 60 * cortex.a_minus) == pytest.approx((1.03, 0.51), rel=1e-12)
    assert (rule.tau_plus, rule.tau_minus, rule.dose) == (16.8, 33.7, 60)
    assert (cortex.tau_plus, cortex.tau_minus) == (13.3, 34.5)
