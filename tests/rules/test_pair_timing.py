"""The pair rule: one pair, coincidence, bounds, several inputs, weight dependence."""

from __future__ import annotations

import math

import numpy as np
import pytest

from plastic import Rule, impose
from plastic.rules.nearest_pair_timing import NearestPairTiming
from plastic.rules.pair_timing import PairTiming
from plastic.rules.pre_centred_pair_timing import PreCentredPairTiming
from plastic.rules.reduced_pair_timing import ReducedPairTiming

RULE = PairTiming(a_plus=0.1, a_minus=0.05, tau_plus=20, tau_minus=40)
PAIR_RULES = [PairTiming, NearestPairTiming, PreCentredPairTiming, ReducedPairTiming]
every_pairing = pytest.mark.parametrize("family", PAIR_RULES, ids=lambda rule: rule.__name__)


def change(pre: list[float], post: list[float], rule: PairTiming = RULE) -> float:
    return float(impose(rule, pre, post, compiled=False).w[0, -1]) - 1.0


def test_a_presynaptic_spike_depresses_by_what_is_left_of_postsynaptic_ones() -> None:
    assert RULE.at_pre(o1=0.5, w=1.0) == {"w": -0.025}


def test_a_postsynaptic_spike_potentiates_by_what_is_left_of_presynaptic_ones() -> None:
    assert RULE.at_post(r1=0.5, w=1.0) == {"w": 0.05}


def test_pre_before_post_potentiates_and_post_before_pre_depresses() -> None:
    assert change([10.0], [20.0]) == pytest.approx(0.1 * math.exp(-10 / 20), rel=1e-12)
    assert change([20.0], [10.0]) == pytest.approx(-0.05 * math.exp(-10 / 40), rel=1e-12)


def test_two_spikes_of_one_instant_do_not_see_each_other() -> None:
    assert change([10.0], [10.0]) == 0.0
    assert change([10.0], [math.nextafter(10.0, 11.0)]) == pytest.approx(0.1, rel=1e-12)
    assert change([math.nextafter(10.0, 11.0)], [10.0]) == pytest.approx(-0.05, rel=1e-12)


def test_all_pairs_add() -> None:
    pre, post = [0.0, 7.0, 31.0], [4.0, 11.0, 29.0]
    lags = [b - a for a in pre for b in post]
    window = [0.1 * math.exp(-d / 20) if d > 0 else -0.05 * math.exp(d / 40) for d in lags]
    assert change(pre, post) == pytest.approx(sum(window), rel=1e-12)


def test_each_input_learns_from_its_own_spikes() -> None:
    found = impose(RULE, {"early": [5.0], "late": [15.0], "silent": []}, [10.0], compiled=False)
    last = found.w.isel(reading=-1)
    assert float(last.sel(input="early")) == pytest.approx(1 + 0.1 * math.exp(-5 / 20), rel=1e-12)
    assert float(last.sel(input="late")) == pytest.approx(1 - 0.05 * math.exp(-5 / 40), rel=1e-12)
    assert float(last.sel(input="silent")) == 1.0


def test_a_weight_stops_at_its_bounds_and_comes_back() -> None:
    strong = PairTiming(a_plus=1, a_minus=1, w_max=1.5)
    pairs = impose(
        strong,
        [0.0, 1000.0, 2012.0],
        [1.0, 1001.0, 2011.0],
        readings=[500, 1500, 2500],
        compiled=False,
    )
    assert pairs.w[0, :2].values.tolist() == [1.5, 1.5]
    assert float(pairs.w[0, 2]) == pytest.approx(1.5 - math.exp(-1 / 33.7), rel=1e-12)


def test_the_defaults_are_the_published_fit_over_sixty_pairs() -> None:
    """Bi & Poo 2001: 0.777, 0.273 per 60 pairs (from memory); 16.8, 33.7 ms (second hand)."""
    rule = PairTiming()
    assert (60 * rule.a_plus, 60 * rule.a_minus) == pytest.approx((0.777, 0.273), rel=1e-12)
    assert (rule.tau_plus, rule.tau_minus, rule.dose) == (16.8, 33.7, 60)


def test_the_cortical_set_is_that_of_froemke_and_dan() -> None:
    """Froemke & Dan 2002, from memory (mid): 1.03, 13.3 ms; 0.51, 34.5 ms per protocol."""
    rule = PairTiming.from_set("visual_cortex")
    assert (60 * rule.a_plus, 60 * rule.a_minus) == pytest.approx((1.03, 0.51), rel=1e-12)
    assert (rule.tau_plus, rule.tau_minus) == (13.3, 34.5)


def test_the_near_balanced_set_depresses_five_per_cent_more() -> None:
    """Song, Miller & Abbott 2000, from memory: A- / A+ = 1.05, both 20 ms."""
    rule = PairTiming.from_set("near_balanced")
    assert rule.a_minus / rule.a_plus == pytest.approx(1.05, rel=1e-12)
    assert (rule.a_plus, rule.tau_plus, rule.tau_minus) == (0.005, 20, 20)


def test_the_multiplicative_set_starts_in_the_middle_of_its_range() -> None:
    """Gutig et al. 2003, from memory: alpha = 1.05, 20 ms (high), lambda = 0.005 (mid)."""
    rule = PairTiming.from_set("multiplicative")
    assert (rule.w_max, rule.mu, rule.tau_plus, rule.tau_minus) == (2, 1, 20, 20)
    assert rule.a_plus / rule.w_max == pytest.approx(0.005, rel=1e-12)
    assert rule.a_minus / rule.a_plus == pytest.approx(1.05, rel=1e-12)


def test_without_an_exponent_a_change_does_not_know_its_weight() -> None:
    ends = [(RULE.at_pre(o1=0.5, w=w), RULE.at_post(r1=0.5, w=w)) for w in (0.0, 1.0, 10.0)]
    assert ends == [({"w": -0.025}, {"w": 0.05})] * 3


@every_pairing
@pytest.mark.parametrize("mu", [0.0, 0.02, 0.5, 1.0])
def test_a_pair_moves_the_weight_by_a_power_of_its_distance_from_the_bound(
    family: type[Rule], mu: float
) -> None:
    """Gutig et al. 2003 (from memory, high), in units of w_max: up (1 - w)^mu, down w^mu.

    Pairs 1 s apart, up, up, down: the recursion by hand; every pairing sees the same pairs.
    """
    rule = family(a_plus=0.3, a_minus=0.2, tau_plus=20, tau_minus=40, w_max=1.6, mu=mu)
    w = 1.0
    for _ in range(2):
        w += 0.3 * (1 - w / 1.6) ** mu * math.exp(-5 / 20)
    w -= 0.2 * (w / 1.6) ** mu * math.exp(-8 / 40)
    found = impose(rule, [0.0, 1000.0, 2008.0], [5.0, 1005.0, 2000.0], compiled=False)
    assert float(found.w[0, -1]) == pytest.approx(w, rel=1e-9)


@every_pairing
def test_a_multiplicative_weight_approaches_its_bounds_without_reaching_them(
    family: type[Rule],
) -> None:
    """The control, additive, is at the bound after the same pairs."""
    at = 1000.0 * np.arange(200)
    soft, hard = (
        float(impose(family(a_plus=0.1, w_max=2, mu=mu), at, at + 5, compiled=False).w[0, -1])
        for mu in (1.0, 0.0)
    )
    assert 1.99 < soft < 2.0
    assert hard == 2.0
