"""Synaptic scaling: silence, a spike, ratios, bounds, places."""

from __future__ import annotations

import math

import numpy as np
import pytest

from plastic import impose
from plastic.engine.learning import Learner
from plastic.rules.synaptic_scaling import SynapticScaling

HOUR = 3_600_000.0  # ms
FAST = SynapticScaling(beta=0.02, gamma=0.001, tau=2000, a_goal=8)


def weight_after(rule: SynapticScaling, silence: float) -> float:
    return float(impose(rule, [], [], end=silence, compiled=False).w[0, -1])


def test_two_days_of_silence_double_every_input() -> None:
    """Turrigiano et al. 1998: about twofold after 48 h (from memory, mid); our default rate."""
    assert weight_after(SynapticScaling(), 48 * HOUR) == pytest.approx(2.0, rel=0.01)
    assert weight_after(SynapticScaling.from_set("two_days"), HOUR / 6) - 1 < 0.003


def test_silence_sums_what_is_missing_when_told_to() -> None:
    """Closed form: ln w = beta goal t + gamma goal t^2 / 2."""
    rule = SynapticScaling.from_set("van_rossum")
    t = 600.0
    expected = math.exp(4e-5 * 10 * t + 1e-7 * 10 * t**2 / 2)
    assert weight_after(rule, 1000 * t) == pytest.approx(expected, rel=1e-12)
    assert weight_after(SynapticScaling(beta=4e-5), 1000 * t) == pytest.approx(
        math.exp(4e-5 * 10 * t), rel=1e-12
    )


def test_a_spike_adds_one_over_tau_to_the_activity_and_nothing_else() -> None:
    assert SynapticScaling(tau=50_000).at_post() == {"a": pytest.approx(1 / 50)}


def test_steady_firing_is_measured_in_hertz() -> None:
    """Spikes every 50 ms for 20 tau: a averages 20 Hz, half a spike of ripple either side."""
    found = impose(FAST, [], np.arange(50.0, 40_001.0, 50), readings=[40_025.0], compiled=False)
    assert float(found.a[0, 0]) == pytest.approx(20.0, abs=0.5 / 2)


def test_any_quiet_gap_may_be_cut_anywhere() -> None:
    """The flow is exact: state after 7 s in one piece, in two, and in seven hundred."""
    ends = []
    for pieces in (1, 2, 700):
        state = {"w": 1.3, "a": 11.0, "missed": -4.0}
        for _ in range(pieces):
            for name, change in FAST.flow(7000.0 / pieces, **state).items():
                state[name] += change
        ends.append(list(state.values()))
    np.testing.assert_allclose(ends[1:], [ends[0]] * 2, rtol=1e-12)


def test_ratios_are_kept_up_and_down() -> None:
    """Four inputs of different strength, a burst, then silence: every one by the same factor."""
    learner, start = Learner(FAST, 4), np.array([0.2, 1.0, 1.7, 3.0])
    learner.per_input["w"][:] = start
    multiples = []
    for t in (*np.arange(10.0, 3000.0, 20.0), 25_000.0):
        learner.instant(float(t), pre=[1], post={0: 1.0})
        multiples.append(learner.per_input["w"] / start)
    np.testing.assert_allclose(multiples, np.array(multiples)[:, :1] * np.ones(4), rtol=1e-12)
    assert min(m[0] for m in multiples) < 0.9 < 1.1 < max(m[0] for m in multiples)


def test_presynaptic_spikes_do_not_matter() -> None:
    post = np.arange(0.0, 500.0, 10.0)
    alone, driven = (
        impose(FAST, {"input": pre}, post, readings=[600.0], compiled=False)
        for pre in ([], np.arange(0.0, 500.0, 7.0))
    )
    assert float(alone.w[0, 0]) == pytest.approx(float(driven.w[0, 0]), rel=1e-12)
    assert float(alone.w[0, 0]) != 1.0


def test_a_weight_stops_at_its_highest_and_comes_back() -> None:
    rule = SynapticScaling(beta=1, tau=100, w_max=1.5)
    post = np.arange(5000.0, 7000.0, 2.0)
    found = impose(rule, [], post, readings=[4999.0, 7000.0], compiled=False).w[0]
    assert float(found[0]) == 1.5
    assert float(found[1]) < 0.1


def test_an_endless_silence_at_the_strongest_is_no_overflow() -> None:
    strongest = SynapticScaling(beta=1, gamma=1)
    assert weight_after(strongest, 100 * HOUR) == strongest.w_max


def test_an_input_scales_by_the_spikes_that_arrive_where_it_lands() -> None:
    """Two inputs, at the soma and far out; every spike reaches the soma, none gets far."""
    learner = Learner(FAST, 2, site_of=[0, 1])
    for t in np.arange(0.0, 1000.0, 5.0):
        learner.instant(float(t), post={0: 1.0})
    near, far = learner.per_input["w"]
    assert near < 1.0 < far


def test_a_silent_baseline_moves_it_and_it_says_so() -> None:
    assert SynapticScaling.in_silence
    assert weight_after(SynapticScaling(), 1000.0) > 1.0
