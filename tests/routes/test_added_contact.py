"""A second road: sites at a nearer place, never fewer than none, and late."""

from __future__ import annotations

import numpy as np
import pytest

from plastic.routes.added_contact import AddedContact
from tests.routes.responses import responses


def test_the_excess_over_one_is_added_and_never_less_than_nothing() -> None:
    found = AddedContact().multiple([0.0, 0.5, 1.0, 1.5, 2.0, 99.0])
    assert found.tolist() == [0.0, 0.0, 0.0, 0.5, 1.0, 10.0]


def test_a_share_acts_on_the_factor_before_one_is_taken_off() -> None:
    """4^0.5 - 1, not (4 - 1)^0.5: two shares give what the whole gives."""
    assert AddedContact().multiple([4.0, 0.25], share=0.5).tolist() == [1.0, 0.0]


def test_the_sites_of_both_places_together_follow_the_factor() -> None:
    factors = np.array([0.5, 1.0, 2.0, 4.0])
    seen = responses(AddedContact(), list(factors))
    assert seen["mean"] == pytest.approx(4.0 * np.maximum(factors, 1.0))


def test_depression_is_not_expressed() -> None:
    """The one route on which a factor below 1 has nowhere to go."""
    seen = responses(AddedContact(), [0.0, 0.3, 1.0])
    for values in seen.values():
        assert values.tolist() == [values[2]] * 3


def test_release_at_the_new_place_is_like_that_at_the_old() -> None:
    """By the same contacts' properties, paired pulses as before and CV^-2 with the sites."""
    seen = responses(AddedContact(), [1.0, 2.0])
    assert seen["paired_pulse_ratio"][1] == pytest.approx(seen["paired_pulse_ratio"][0])
    assert seen["inverse_cv2"][1] == pytest.approx(2 * seen["inverse_cv2"][0])


def test_it_cannot_explain_what_is_seen_at_ten_minutes() -> None:
    """Lasting new spines appear about 30 min after induction (Engert & Bonhoeffer 1999)."""
    assert AddedContact().delay == pytest.approx(1_800_000, rel=0.1)
    assert AddedContact().tau >= 3_600_000  # mature synapses take hours
