"""The suppression model: efficacies of spikes, all pairs, coincidence, bounds."""

from __future__ import annotations

import math

import numpy as np
import pytest

from plastic import Rule, impose
from plastic.rules.pair_timing import PairTiming
from plastic.rules.suppression_timing import SuppressionTiming

WINDOW = {"a_plus": 0.1, "a_minus": 0.05, "tau_plus": 20, "tau_minus": 40}
RULE = SuppressionTiming(**WINDOW, tau_s_pre=30, tau_s_post=80)


def change(pre: list[float], post: list[float], rule: Rule = RULE) -> float:
    return float(impose(rule, pre, post, compiled=False).w[0, -1]) - 1.0


def efficacies(train: list[float], tau: float) -> list[float]:
    """1 for the first spike, 1 - exp(-interval / tau) for every other."""
    return [1 - math.exp(-gap / tau) for gap in np.diff(train, prepend=-math.inf)]


def slow_road(pre: list[float], post: list[float]) -> float:
    """The sum over all pairs, weighted by both efficacies."""
    total = 0.0
    for a, e_pre in zip(pre, efficacies(pre, 30), strict=True):
        for b, e_post in zip(post, efficacies(post, 80), strict=True):
            window = 0.1 * math.exp(-(b - a) / 20) if b > a else -0.05 * math.exp(-(a - b) / 40)
            total += e_pre * e_post * window * (a != b)
    return total


@pytest.mark.parametrize("seed", range(6))
def test_all_pairs_add_weighted_by_both_efficacies(seed: int) -> None:
    """The control: the pair rule, in which every spike counts fully, is elsewhere."""
    draw = np.random.default_rng(seed)
    pre, post = (np.sort(draw.uniform(0, 300, 10)).tolist() for _ in range(2))
    post = sorted([*post, pre[2], pre[7]])  # two coincidences
    assert change(pre, post) == pytest.approx(slow_road(pre, post), rel=1e-11, abs=1e-14)
    assert abs(change(pre, post) - change(pre, post, PairTiming(**WINDOW))) > 1e-3


def test_a_lone_pair_is_that_of_the_pair_rule() -> None:
    for pre, post in (([0.0], [10.0]), ([10.0], [0.0])):
        assert change(pre, post) == change(pre, post, PairTiming(**WINDOW)) != 0.0


def test_a_second_spike_of_one_side_counts_by_its_interval() -> None:
    alone = change([0.0], [10.0])
    late = 1 - math.exp(-15 / 80)
    assert change([0.0], [10.0, 25.0]) == pytest.approx(
        alone + 0.1 * late * math.exp(-25 / 20), rel=1e-11
    )


def test_a_spike_long_after_another_counts_fully() -> None:
    assert change([0.0, 5000.0], [10.0, 5010.0]) == pytest.approx(2 * change([0.0], [10.0]))


def test_spikes_of_one_instant_do_not_see_each_other_but_their_successors_see_both() -> None:
    assert change([10.0], [10.0]) == 0.0
    found = change([10.0, 22.0], [10.0])
    assert found == pytest.approx(-0.05 * (1 - math.exp(-12 / 30)) * math.exp(-12 / 40), rel=1e-11)


def test_each_input_remembers_its_own_spikes() -> None:
    """A burst on one input suppresses nothing on another."""
    both = impose(RULE, {"a": [0.0, 4.0, 8.0], "b": [8.0]}, [12.0], compiled=False)
    alone = [change(pre, [12.0]) for pre in ([0.0, 4.0, 8.0], [8.0])]
    assert (both.w[:, -1].values - 1).tolist() == alone


def test_a_weight_stops_at_its_bounds() -> None:
    strong = SuppressionTiming(a_plus=1, a_minus=1, w_max=1.5)
    at = [1000.0 * k for k in range(5)]
    assert change(at, [t + 1 for t in at], strong) == 0.5
    assert change([t + 1 for t in at], at, strong) == -1.0


def test_the_defaults_are_those_of_the_paper() -> None:
    """Froemke & Dan 2002, from memory: suppression times high, window mid; over 60 pairs."""
    rule = SuppressionTiming()
    assert (60 * rule.a_plus, 60 * rule.a_minus) == pytest.approx((1.03, 0.51), rel=1e-12)
    assert (rule.tau_plus, rule.tau_minus) == (13.3, 34.5)
    assert (rule.tau_s_pre, rule.tau_s_post, rule.dose) == (28, 88, 60)
