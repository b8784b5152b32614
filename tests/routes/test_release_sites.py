"""More sites: the mean and CV^-2 move together."""

from __future__ import annotations

import numpy as np
import pytest

from plastic.routes.release_sites import ReleaseSites
from tests.routes.responses import responses


def test_the_number_of_sites_is_multiplied_by_the_factor() -> None:
    assert ReleaseSites().multiple([0.0, 0.5, 1.0, 2.0]).tolist() == [0.0, 0.5, 1.0, 2.0]
    assert ReleaseSites().multiple([0.25, 4.0], share=0.5).tolist() == [0.5, 2.0]


def test_it_covers_tenfold_changes_either_way_and_no_more() -> None:
    """Efficacy changed up to tenfold in 12 h, by the number of sites (Loebel et al. 2013)."""
    assert ReleaseSites().multiple([0.1, 10.0, 1000.0]).tolist() == [0.1, 10.0, 10.0]


def test_matched_sites_lie_on_the_diagonal_of_a_locus_plot() -> None:
    """Mean and CV^-2 by the same ratio, paired pulses as before, failures to its power."""
    factors = np.array([1.0, 0.1, 0.5, 2.0, 10.0])  # whole numbers of 20 sites
    seen = responses(ReleaseSites(), list(factors))
    for name in ("mean", "inverse_cv2"):
        assert seen[name] / seen[name][0] == pytest.approx(factors)
    assert seen["paired_pulse_ratio"] == pytest.approx([seen["paired_pulse_ratio"][0]] * 5)
    assert seen["failure_rate"] == pytest.approx(0.6 ** (20 * factors))


def test_a_fractional_site_releases_by_a_fractional_chance() -> None:
    """20 sites by 1.025 are 20.5: one more that is there half the time."""
    failures = responses(ReleaseSites(), [1.025])["failure_rate"]
    assert failures == pytest.approx([0.6**20 * 0.8])


def test_it_is_slower_than_what_happens_at_sites_that_exist_and_contested() -> None:
    assert ReleaseSites.evidence == "contested"
    assert ReleaseSites().tau >= 600_000  # tens of minutes, common practice
