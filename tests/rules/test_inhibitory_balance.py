"""Inhibitory balance: single spikes, one pair, coincidence, bounds."""

from __future__ import annotations

import math

import pytest

from plastic import impose
from plastic.rules.inhibitory_balance import InhibitoryBalance

RULE = InhibitoryBalance(eta=0.1, rho_0=10, tau=25)  # alpha = 2 * 10 Hz * 25 ms = 0.5


def change(pre: list[float], post: list[float], rule: InhibitoryBalance = RULE) -> float:
    return float(impose(rule, pre, post, compiled=False).w[0, -1]) - 1.0


def test_a_lone_presynaptic_spike_costs_what_the_target_rate_would_leave() -> None:
    assert change([10.0], []) == pytest.approx(-0.1 * 0.5, rel=1e-12)


def test_a_lone_postsynaptic_spike_changes_nothing() -> None:
    assert change([], [10.0]) == 0.0


def test_each_side_reads_what_is_left_of_the_other() -> None:
    assert RULE.at_pre(o=0.75) == {"w": pytest.approx(0.1 * (0.75 - 0.5))}
    assert RULE.at_post(r=0.75) == {"w": pytest.approx(0.1 * 0.75)}


@pytest.mark.parametrize("lag", [0.5, 10.0, 60.0])
def test_one_pair_does_the_same_in_either_order(lag: float) -> None:
    """Closed form: eta (exp(-|D|/tau) - alpha)."""
    expected = 0.1 * (math.exp(-lag / 25) - 0.5)
    assert change([100.0], [100.0 + lag]) == pytest.approx(expected, rel=1e-12)
    assert change([100.0 + lag], [100.0]) == pytest.approx(expected, rel=1e-12)


def test_two_spikes_of_one_instant_do_not_see_each_other() -> None:
    assert change([10.0], [10.0]) == pytest.approx(-0.05, rel=1e-12)
    assert change([10.0], [math.nextafter(10.0, 11.0)]) == pytest.approx(0.05, rel=1e-12)


def test_all_pairs_add() -> None:
    pre, post = [0.0, 7.0, 31.0], [4.0, 11.0, 29.0]
    pairs = sum(math.exp(-abs(b - a) / 25) for a in pre for b in post)
    assert change(pre, post) == pytest.approx(0.1 * (pairs - 3 * 0.5), rel=1e-12)


def test_a_weight_stops_at_zero_and_at_its_highest_and_comes_back() -> None:
    rule = InhibitoryBalance(eta=1, rho_0=20, tau=25, w_max=2)
    alone = [0.0, 1000.0, 2000.0]
    down = impose(rule, alone, [2001.0], readings=[1500, 2500], compiled=False).w[0]
    assert down.values.tolist() == [0.0, pytest.approx(math.exp(-1 / 25))]
    up = impose(rule, [0.0], [1.0, 2.0, 3.0], readings=[500], compiled=False).w[0, 0]
    assert float(up) == 2.0


def test_each_input_learns_from_its_own_spikes() -> None:
    found = impose(RULE, {"near": [9.0], "far": [80.0], "silent": []}, [10.0], compiled=False)
    near, far, silent = found.w[:, -1].values
    assert near > 1.0 > far
    assert silent == 1.0


@pytest.mark.parametrize(("chosen", "alpha"), [("five_hertz", 0.2), ("three_hertz", 0.12)])
def test_the_published_targets_give_the_published_alpha(chosen: str, alpha: float) -> None:
    """Vogels et al. 2011, from memory (mid which is used where): alpha = 2 rho_0 tau."""
    rule = InhibitoryBalance.from_set(chosen)
    assert rule.at_pre(o=0.0)["w"] == pytest.approx(-rule.eta * alpha, rel=1e-12)
