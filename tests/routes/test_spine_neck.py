"""Wider necks: less resistance in series with each site, and so little gain."""

from __future__ import annotations

import math

import pytest

from plastic.routes.spine_neck import SpineNeck
from tests.routes.responses import responses


def cylinder(diameter: float, length: float = 1.0) -> float:
    """Return the resistance (Mohm) of a neck in um at 150 ohm cm: 4 Ri l / (pi d^2)."""
    return 4 * 1.5 * length / (math.pi * diameter**2)


def test_the_resistance_is_divided_by_the_factor_down_to_its_limit() -> None:
    assert SpineNeck().multiple([0.5, 1.0, 2.0, 4.0]).tolist() == [2.0, 1.0, 0.5, 0.25]
    assert SpineNeck().multiple([10.0, 1e9]).tolist() == [0.1, 0.1]
    assert SpineNeck().multiple(0.0) == SpineNeck().highest


def test_a_neck_is_in_series_with_its_site() -> None:
    """q / (1 + q R): 0.5 nS behind 191 Mohm (1 um by 0.1 um) and behind a quarter of it."""
    thin, wide = cylinder(0.1), cylinder(0.2)
    assert (thin, wide) == (pytest.approx(191.0, abs=0.05), pytest.approx(47.7, abs=0.05))
    mean = responses(SpineNeck(), [1.0, thin / wide], neck=thin)["mean"]
    each = [0.5 / (1 + 0.5e-3 * r) for r in (thin, wide)]
    assert mean == pytest.approx([20 * 0.4 * q for q in each])
    assert mean[1] / mean[0] == pytest.approx(1.07, abs=0.001)  # computed before this package


@pytest.mark.parametrize(("resistance", "most"), [(23.0, 1.0103), (179.0, 1.0798), (420.0, 1.1851)])
def test_its_whole_gain_is_some_per_cent_for_measured_necks(resistance: float, most: float) -> None:
    """The range and mean of Acker, Hoyos & Loew 2016, at 0.5 nS, however large the factor.

    The gain is (1 + q R) / (1 + q R / 10), computed by hand.
    """
    mean = responses(SpineNeck(), [1.0, 1e9], neck=resistance)["mean"]
    assert mean[1] / mean[0] == pytest.approx(most, abs=1e-4)


def test_it_is_postsynaptic_by_every_sign() -> None:
    seen = responses(SpineNeck(), [1.0, 5.0], neck=180.0)
    assert seen.pop("mean")[1] > 8 * 0.4
    for values in seen.values():
        assert values == pytest.approx([values[0]] * 2, rel=1e-12)


def test_a_neck_as_much_wider_as_was_seen_needs_a_factor_well_within_the_limit() -> None:
    """30 % wider and 20 % shorter after LTP (Tonnesen et al. 2014, from memory): R by 0.473."""
    seen = cylinder(1.3, 0.8) / cylinder(1.0, 1.0)
    assert seen == pytest.approx(0.473, abs=0.001)
    assert SpineNeck().lowest < SpineNeck().multiple(1 / seen) == pytest.approx(seen)


def test_without_a_neck_it_does_nothing() -> None:
    mean = responses(SpineNeck(), [1.0, 100.0], neck=0.0)["mean"]
    assert mean[0] == mean[1]
