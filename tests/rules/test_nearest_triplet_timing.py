"""The nearest-spike triplet rule: what is remembered, and when it is a pair rule."""

from __future__ import annotations

import math

import numpy as np
import pytest

from plastic import Rule, impose
from plastic.rules.nearest_pair_timing import NearestPairTiming
from plastic.rules.nearest_triplet_timing import NearestTripletTiming
from plastic.rules.triplet_timing import TripletTiming

GIVEN = {
    "a2_plus": 0.01,
    "a3_plus": 0.02,
    "a2_minus": 0.03,
    "a3_minus": 0.04,
    "tau_plus": 15,
    "tau_minus": 30,
    "tau_x": 90,
    "tau_y": 120,
}
RULE = NearestTripletTiming(**GIVEN)


def change(pre: list[float], post: list[float], rule: Rule = RULE) -> float:
    return float(impose(rule, pre, post, compiled=False).w[0, -1]) - 1.0


def left(t: float, train: list[float], tau: float) -> float:
    """What is left at t of the last earlier spike of a train."""
    earlier = [s for s in train if s < t]
    return math.exp(-(t - earlier[-1]) / tau) if earlier else 0.0


def slow_road(pre: list[float], post: list[float]) -> float:
    """The sum over all spikes, each looking back for the last one of either side."""
    up = sum(left(t, pre, 15) * (0.01 + 0.02 * left(t, post, 120)) for t in post)
    down = sum(left(t, post, 30) * (0.03 + 0.04 * left(t, pre, 90)) for t in pre)
    return up - down


@pytest.mark.parametrize("seed", range(6))
def test_every_spike_sees_the_last_one_of_either_side(seed: int) -> None:
    """The control: the rule in which all spikes interact is elsewhere."""
    draw = np.random.default_rng(seed)
    pre, post = (np.sort(draw.uniform(0, 400, 14)).tolist() for _ in range(2))
    post = sorted([*post, pre[3], pre[8]])  # two coincidences
    assert change(pre, post) == pytest.approx(slow_road(pre, post), rel=1e-11)
    assert abs(change(pre, post, TripletTiming(**GIVEN)) - change(pre, post)) > 1e-3


def test_a_lone_pair_does_not_see_the_slow_trace_of_its_own_spike() -> None:
    """The paper reads the slow trace of the side that fires before its own jump."""
    assert change([0.0], [10.0]) == pytest.approx(0.01 * math.exp(-10 / 15), rel=1e-11)
    assert change([10.0], [0.0]) == pytest.approx(-0.03 * math.exp(-10 / 30), rel=1e-11)


def test_a_third_spike_back_is_forgotten() -> None:
    """Three postsynaptic spikes before a pair: the last of them alone counts."""
    post = [0.0, 20.0, 40.0]
    alone, crowded = (change([60.0], [*some, 70.0]) for some in ([40.0], post))
    assert crowded == pytest.approx(alone, rel=1e-11)
    everything = TripletTiming(**GIVEN)
    assert change([60.0], [*post, 70.0], everything) != pytest.approx(alone, rel=0.05)


def test_spikes_of_one_instant_do_not_see_each_other() -> None:
    assert change([10.0], [10.0]) == 0.0


def test_without_the_triplet_terms_it_is_the_nearest_spike_pair_rule() -> None:
    pre, post = [0.0, 7.0, 31.0, 60.0], [4.0, 11.0, 29.0, 55.0]
    pairs = NearestTripletTiming(**{**GIVEN, "a3_plus": 0, "a3_minus": 0})
    other = NearestPairTiming(a_plus=0.01, a_minus=0.03, tau_plus=15, tau_minus=30)
    assert change(pre, post, pairs) == pytest.approx(change(pre, post, other), rel=1e-12)
    assert abs(change(pre, post, pairs) - change(pre, post)) > 1e-3  # the terms matter


#: Pfister & Gerstner 2006, from memory (high), corroborated by the error they reproduce;
#: hippocampal_full looked up second hand
PUBLISHED = {
    "visual_minimal": (0.0, 5.0e-2, 8.0e-3, 0.0, None, 40.0),
    "visual_full": (8.8e-11, 5.3e-2, 6.6e-3, 3.1e-3, 714.0, 40.0),
    "hippocampal_minimal": (4.6e-3, 9.1e-3, 3.0e-3, 0.0, None, 48.0),
    "hippocampal_full": (4.6e-3, 9.1e-3, 3.0e-3, 7.5e-9, 575.0, 47.0),
}


@pytest.mark.parametrize("name", NearestTripletTiming.sets)
def test_every_set_is_that_of_the_paper(name: str) -> None:
    a2_plus, a3_plus, a2_minus, a3_minus, tau_x, tau_y = PUBLISHED[name]
    rule = NearestTripletTiming.from_set(name)
    assert (rule.a2_plus, rule.a3_plus) == (a2_plus, a3_plus)
    assert (rule.a2_minus, rule.a3_minus) == (a2_minus, a3_minus)
    assert (rule.tau_plus, rule.tau_minus, rule.tau_y) == (16.8, 33.7, tau_y)
    assert rule.tau_x == (tau_x or rule.tau_x)


@pytest.mark.parametrize("name", ["visual_minimal", "hippocampal_minimal"])
def test_the_slow_presynaptic_trace_is_idle_in_a_minimal_model(name: str) -> None:
    pre, post = [0.0, 7.0, 31.0, 60.0], [4.0, 11.0, 29.0, 55.0]
    slow, fast = (NearestTripletTiming.from_set(name, tau_x=tau) for tau in (900, 10))
    assert change(pre, post, slow) == change(pre, post, fast)
