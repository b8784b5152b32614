"""Binding of pulses of transmitter, and the cascade behind GABA-B, against ordinary integration."""

from __future__ import annotations

from dataclasses import replace
from itertools import pairwise

import numpy as np
import pytest
from numpy.typing import NDArray
from scipy.integrate import solve_ivp

from plastic.membrane.binding import (
    BINDING,
    GABA_B_KD,
    Binding,
    Cascade,
    Pulses,
    gaba_b_course,
)

Floats = NDArray[np.float64]
TRAIN = Pulses([2.0, 7.0, 8.5, 40.0], duration=1.5, transmitter=0.8)
every_receptor = pytest.mark.parametrize("name", BINDING)


def integrated(cascade: Cascade, pulses: Pulses, at: Floats) -> Floats:
    """r and s at some times, shape (2, time), by scipy from edge to edge of the pulses."""
    onsets = np.asarray(pulses.onsets, float)
    edges = np.unique([0.0, *onsets, *(onsets + pulses.duration), at.max()])
    y, found = np.zeros(2), np.zeros((2, len(at)))
    for a, b in pairwise(edges):
        middle = (a + b) / 2
        on = np.any((onsets < middle) & (middle < onsets + pulses.duration))
        T = pulses.transmitter if on else 0.0

        def slope(_: float, y: Floats, T: float = T) -> list[float]:
            r, s = y
            made = cascade.binding.alpha * T * (1 - r) - cascade.binding.beta * r
            return [made, cascade.k3 * r - cascade.k4 * s]

        inside = (at >= a) & (at <= b)
        made = solve_ivp(slope, (a, b), y, "DOP853", dense_output=True, rtol=1e-12, atol=1e-14)
        found[:, inside], y = made.sol(at[inside]), made.y[:, -1]
    return found


AT = np.sort(np.concatenate([np.linspace(0, 200, 81), [2.0, 3.5, 7.0, 8.5, 10.0, 41.5]]))


@every_receptor
def test_the_bound_share_is_the_integral_of_its_equation(name: str) -> None:
    expected = integrated(Cascade(BINDING[name]), TRAIN, AT)[0]
    assert BINDING[name].bound(AT, TRAIN) == pytest.approx(expected, abs=1e-10)


@every_receptor
def test_the_protein_is_the_integral_of_its_equation(name: str) -> None:
    """Whatever receptor is in front of it: some bind faster than it decays, some more slowly."""
    cascade = Cascade(BINDING[name])
    expected = integrated(cascade, TRAIN, AT)[1]
    assert cascade.protein(AT, TRAIN) == pytest.approx(expected, abs=1e-10)


def test_equal_rates_of_receptor_and_protein_are_the_limit_of_unequal_ones() -> None:
    def at(k4: float) -> Floats:
        return Cascade(Binding(1.0, 0.2, ""), k4=k4).protein(AT, TRAIN)

    assert np.all(np.isfinite(at(0.2)))
    assert at(0.2) == pytest.approx((at(0.2 + 1e-5) + at(0.2 - 1e-5)) / 2, rel=1e-7)


def test_nothing_is_bound_before_the_first_pulse() -> None:
    before = np.array([-5.0, 0.0, 1.999])
    assert BINDING["ampa"].bound(before, TRAIN).tolist() == [0, 0, 0]
    assert Cascade().open(before, TRAIN).tolist() == [0, 0, 0]
    assert gaba_b_course(before - 2).tolist() == [0, 0, 0]


def test_a_pulse_may_be_cut_anywhere() -> None:
    whole, cut = Pulses([3.0], 2.0), Pulses([3.0, 4.0], 1.0)
    assert Cascade().protein(AT, cut) == pytest.approx(Cascade().protein(AT, whole), rel=1e-12)


def test_a_very_long_pulse_settles_without_overflow() -> None:
    forever = Pulses([0.0], 1e7)
    receptor = BINDING["gaba_b"]
    settled = 0.18 / 0.034 * 0.09 / (0.09 + 0.0012)
    assert receptor.bound(9e6, forever) == pytest.approx(0.09 / 0.0912, rel=1e-12)
    assert Cascade().protein(9e6, forever) == pytest.approx(settled, rel=1e-12)


def test_the_channel_opens_half_where_the_protein_reaches_its_constant() -> None:
    """s = kd^(1/n) during a very long pulse."""
    s = 0.18 / 0.034 * 0.09 / (0.09 + 0.0012)
    half = replace(Cascade(), kd=s**4)
    assert half.open(1e5, Pulses([0.0], 1e6)) == pytest.approx(0.5, rel=1e-12)


def test_weak_opening_grows_with_the_fourth_power_of_the_transmitter() -> None:
    def peak(mm: float) -> float:
        return float(Cascade().open(AT, Pulses([0.0], 0.1, mm)).max())

    assert peak(2e-3) / peak(1e-3) == pytest.approx(16, rel=1e-3)


def test_both_constants_that_were_published_are_kept_with_their_source() -> None:
    """We cannot settle which is right: the default is the chapter's, and says so."""
    assert Cascade().kd == GABA_B_KD["chapter"][0]
    assert {value for value, _ in GABA_B_KD.values()} == {100.0, 5.0}
    assert all("looked up" in why or "from memory" in why for _, why in GABA_B_KD.values())


@pytest.mark.parametrize(
    ("pulses", "message"),
    [
        (Pulses([1.0, 1.5]), "not overlap"),
        (Pulses([2.0, 1.0]), "must increase"),
        (Pulses([], 1.0), "a list of onsets"),
        (Pulses([0.0], 0.0), "duration above 0 ms"),
        (Pulses([0.0], 1.0, -1.0), "transmitter = .* must be 0 or more"),
    ],
)
def test_pulses_that_cannot_be_are_refused(pulses: Pulses, message: str) -> None:
    with pytest.raises(ValueError, match=message):
        BINDING["ampa"].bound(AT, pulses)
