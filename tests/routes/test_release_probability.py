"""More transmitter: bounded by the highest probability, and seen in every measure of release."""

from __future__ import annotations

import pytest

from plastic.routes.release_probability import ReleaseProbability
from tests.routes.responses import responses


def test_the_probability_is_multiplied_by_the_factor() -> None:
    assert ReleaseProbability().multiple([0.0, 0.5, 1.0, 2.0]).tolist() == [0.0, 0.5, 1.0, 2.0]
    assert ReleaseProbability().multiple([0.25, 4.0], share=0.5).tolist() == [0.5, 2.0]


def test_strength_rises_at_most_by_the_highest_over_the_present_probability() -> None:
    """p = 0.4 of at most 0.9: the response can be multiplied by 2.25 and by no more."""
    mean = responses(ReleaseProbability(), [1.0, 2.0, 2.25, 5.0, 1e6])["mean"]
    assert mean / mean[0] == pytest.approx([1.0, 2.0, 2.25, 2.25, 2.25])


def test_it_is_presynaptic_by_every_sign() -> None:
    """Fewer failures, a lower paired-pulse ratio, and CV^-2 that moves by more than the mean."""
    seen = responses(ReleaseProbability(), [1.0, 1.5])
    ratio = {name: values[1] / values[0] for name, values in seen.items()}
    assert ratio["mean"] == pytest.approx(1.5)
    assert ratio["inverse_cv2"] > 1.5
    assert ratio["paired_pulse_ratio"] < 0.95
    assert ratio["failure_rate"] == pytest.approx((0.4 / 0.6) ** 20)


def test_it_is_expressed_within_minutes_and_established() -> None:
    assert (ReleaseProbability().delay, ReleaseProbability.evidence) == (0.0, "established")
    assert 60_000 <= ReleaseProbability().tau <= 600_000
