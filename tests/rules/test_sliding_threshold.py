"""The sliding-threshold rule: its two regimes, its window, its threshold in silence."""

from __future__ import annotations

import math

import numpy as np
import pytest

from plastic import impose
from plastic.rules.sliding_threshold import SlidingThreshold

BASELINE = 600_000.0  # ms, ten silent minutes
BURST = [10.0, 20.0, 30.0]


def on_spikes(
    rule: SlidingThreshold, pre: list[float], post: list[float], **options: object
) -> tuple[np.ndarray, np.ndarray]:
    found = impose(rule, pre, post, compiled=False, **options)  # type: ignore[arg-type]
    return found.w.values[0], found.theta.values


def test_the_sign_of_a_change_is_that_of_rate_minus_threshold() -> None:
    rule = SlidingThreshold(eta=1e-3)
    changes = [rule.at_presentation(10.0, y, theta=20.0)["w"] for y in (0.0, 10.0, 20.0, 30.0)]
    assert changes == pytest.approx([0.0, -1.0, 0.0, 3.0])


def test_a_silent_input_does_not_change() -> None:
    assert SlidingThreshold().at_presentation(0.0, 50.0, theta=10.0) == {"w": 0.0}


def test_the_threshold_goes_to_rest_plus_the_square_of_the_rate() -> None:
    rule = SlidingThreshold(window=10, tau_theta=1, theta_rest=3, y_0=5)
    moved = rule.cell_at_presentation(10.0, theta=7.0)["theta"]
    assert 7.0 + moved == pytest.approx(3 + 100 / 5, abs=20 * math.exp(-10))


def test_the_threshold_relaxes_the_same_in_one_piece_or_in_two() -> None:
    rule, theta = SlidingThreshold(), 50.0
    whole = theta + rule.cell_flow(9000.0, theta)["theta"]
    half = theta + rule.cell_flow(4000.0, theta)["theta"]
    assert half + rule.cell_flow(5000.0, half)["theta"] == pytest.approx(whole, rel=1e-12)
    assert whole == pytest.approx(10 + 40 * math.exp(-9000 / 60_000), rel=1e-12)


def test_one_window_counts_spikes_into_rates() -> None:
    """One pre and three post spikes in 100 ms are 10 and 30 Hz, against a threshold of 10 Hz."""
    rule = SlidingThreshold()
    w, theta = on_spikes(rule, [0.0], BURST, end=100.0)
    assert w[-1] - 1 == pytest.approx(rule.eta * 10 * 30 * (30 - 10), rel=1e-9)
    goal = 10 + 30**2 / 10
    assert theta[-1] == pytest.approx(goal - (goal - 10) * math.exp(-100 / 60_000), rel=1e-12)


def test_sixty_bursts_about_double_the_weight_as_the_docstring_says() -> None:
    starts = 10_000.0 * np.arange(60)
    post = (starts[:, None] + np.array(BURST)).ravel()
    w, _ = on_spikes(SlidingThreshold(), list(starts), list(post))
    assert 1.7 < w[-1] < 2.3


def test_the_threshold_survives_a_silent_baseline() -> None:
    late = [BASELINE + t for t in BURST]
    w, theta = on_spikes(
        SlidingThreshold(), [BASELINE], late, readings=[0, BASELINE, BASELINE + 200]
    )
    assert theta[1] == 10.0
    early, _ = on_spikes(SlidingThreshold(), [0.0], BURST)
    assert w[-1] == pytest.approx(early[-1], rel=1e-9)


def test_without_a_rest_the_threshold_would_fall_to_nothing() -> None:
    """The control of the test above: the plain average forgets, and one pair then potentiates."""
    plain = SlidingThreshold(theta_rest=0.0)
    pre, post = [0.0, BASELINE], [*BURST, BASELINE + 10]
    w, theta = on_spikes(plain, pre, post, readings=[200, BASELINE, BASELINE + 200])
    assert theta[0] > 0.1
    assert theta[1] < 1e-4 * theta[0]
    assert w[2] > w[1]
    kept, _ = on_spikes(SlidingThreshold(), pre, post, readings=[200, BASELINE, BASELINE + 200])
    assert kept[2] == pytest.approx(kept[1], abs=1e-6)


def test_it_is_blind_to_the_order_of_spikes_in_a_window() -> None:
    forward, _ = on_spikes(SlidingThreshold(), [0.0], BURST)
    backward, _ = on_spikes(SlidingThreshold(), [30.0], [0.0, 10.0, 20.0])
    assert forward[-1] == backward[-1] != 1.0


def test_the_pattern_set_is_the_published_rule() -> None:
    """Intrator & Cooper 1992 (from memory): theta follows the mean of y squared, unscaled."""
    rule = SlidingThreshold.from_set("patterns")
    assert (rule.theta_rest, rule.y_0) == (0.0, 1.0)
    assert rule.eta * rule.tau_theta / rule.window < 1  # below the Hopf point of unit patterns
