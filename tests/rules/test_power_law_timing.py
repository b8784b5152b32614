"""The power-law pair rule: one pair at any weight, coincidence, bounds, its fixed point."""

from __future__ import annotations

import math

import pytest

from plastic import impose
from plastic.rules.pair_timing import PairTiming
from plastic.rules.power_law_timing import PowerLawTiming


def last(rule: PowerLawTiming, pre: list[float], post: list[float]) -> float:
    return float(impose(rule, pre, post, compiled=False).w[0, -1])


@pytest.mark.parametrize("start", [0.5, 10.0, 39.6, 200.0])
@pytest.mark.parametrize("mu", [0.0, 0.4, 1.0])
def test_one_pair_at_any_weight(start: float, mu: float) -> None:
    """Morrison et al. 2007 (form from memory, mid), in logarithms:
    up exp(ln lambda + (1 - mu) ln w_0 + mu ln w - D/tau), down lambda alpha w exp(-|D|/tau)."""
    rule = PowerLawTiming(w_start=start, mu=mu, w_0=2.0, lambda_=0.05, tau_plus=15, tau_minus=30)
    up = math.exp(math.log(0.05) + (1 - mu) * math.log(2) + mu * math.log(start) - 8 / 15)
    down = 0.05 * 0.11 * start * math.exp(-8 / 30)
    assert last(rule, [0.0], [8.0]) == pytest.approx(start + up, rel=1e-12)
    assert last(rule, [8.0], [0.0]) == pytest.approx(start - down, rel=1e-12)


def test_the_factor_is_the_weight_over_its_start() -> None:
    found = impose(PowerLawTiming(w_start=20.0), [0.0], [5.0], compiled=False)
    assert float(found.factor[0, 0]) == 1.0
    assert float(found.factor[0, -1]) == pytest.approx(float(found.w[0, -1]) / 20, rel=1e-12)


def test_spikes_of_one_instant_do_not_see_each_other() -> None:
    assert last(PowerLawTiming(), [10.0], [10.0]) == 39.6


def test_a_weight_at_zero_stays_there() -> None:
    """lambda alpha = 2: the first depression is larger than the weight; 0^mu potentiates by 0."""
    rule = PowerLawTiming(lambda_=2.0, alpha=1.0)
    found = impose(
        rule, [1.0, 1000.0], [0.0, 1005.0], readings=[500, 1500], compiled=False
    ).w.values[0]
    assert found.tolist() == [0.0, 0.0]


def test_a_runaway_stops_at_the_upper_bound() -> None:
    rule = PowerLawTiming(mu=1.0, alpha=0.01, lambda_=1.0)
    at = [1000.0 * k for k in range(20)]
    assert last(rule, at, [t + 1 for t in at]) == rule.w_max


def test_at_one_weight_it_is_the_pair_rule() -> None:
    """Infinitesimal steps at w = w_0: a_plus = lambda, a_minus = lambda alpha."""
    pre, post = [0.0, 7.0, 31.0, 60.0], [4.0, 11.0, 29.0, 55.0]
    rule = PowerLawTiming(w_start=1.0, lambda_=1e-6, alpha=0.9)
    other = PairTiming(a_plus=1e-6, a_minus=0.9e-6, tau_plus=20, tau_minus=20)
    pairs = float(impose(other, pre, post, compiled=False).w[0, -1]) - 1
    assert last(rule, pre, post) - 1 == pytest.approx(pairs, abs=2e-11)  # steps squared: 1e-12
    assert abs(pairs) > 1e-8


def test_the_defaults_are_the_published_values() -> None:
    """Morrison, Aertsen & Diesmann 2007, from memory (mid)."""
    rule = PowerLawTiming()
    assert (rule.lambda_, rule.alpha, rule.mu, rule.w_0) == (0.1, 0.11, 0.4, 1.0)
    assert (rule.tau_plus, rule.tau_minus) == (20, 20)


def test_the_start_is_the_fixed_point_rounded() -> None:
    """At the start one pair of either sign at the same distance does nothing, to 1e-5."""
    up, down = last(PowerLawTiming(), [0.0], [5.0]), last(PowerLawTiming(), [5.0], [0.0])
    assert (up - 39.6) / (39.6 - down) == pytest.approx(1, abs=1e-4)
