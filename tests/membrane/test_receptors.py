"""The time course of a conductance, its block by magnesium, and named receptors: laws."""

from __future__ import annotations

from itertools import pairwise

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy.integrate import quad

from plastic.membrane.receptors import (
    KINETICS,
    MAGNESIUM,
    area,
    at_temperature,
    conductance,
    norm,
    peak_time,
    phi,
)

constants = st.tuples(st.floats(0.05, 20), st.floats(0.05, 200))


@given(constants)
@settings(max_examples=100, deadline=None)
def test_the_peak_is_one_and_at_the_peak_time(pair: tuple[float, float]) -> None:
    top = float(peak_time(*pair))
    assert conductance(top, *pair) == pytest.approx(1, abs=1e-12)
    beside = conductance(top * np.array([0.5, 0.9, 0.99, 1.01, 1.1, 2]), *pair)
    assert np.all(beside < 1)


@given(constants)
@settings(max_examples=40, deadline=None)
def test_the_area_is_the_integral(pair: tuple[float, float]) -> None:
    top, fast, slow = float(peak_time(*pair)), min(pair), max(pair)
    # the edges keep the quadrature from stepping over what is left of the fast exponential
    edges = [0, top, top + 3 * fast, top + 30 * fast, top + 30 * fast + 8 * slow, top + 70 * slow]
    found = sum(
        quad(lambda t: float(conductance(t, *pair)), a, b, epsabs=0, epsrel=1e-10, limit=200)[0]
        for a, b in pairwise(edges)
    )
    assert area(*pair) == pytest.approx(found, rel=1e-8)


@given(constants, st.floats(0, 100))
@settings(max_examples=60, deadline=None)
def test_the_two_time_constants_may_be_exchanged(pair: tuple[float, float], t: float) -> None:
    back = pair[::-1]
    assert conductance(t, *pair) == pytest.approx(conductance(t, *back), rel=1e-12, abs=1e-300)
    assert peak_time(*pair) == pytest.approx(peak_time(*back), rel=1e-12)
    assert area(*pair) == pytest.approx(area(*back), rel=1e-12)


@pytest.mark.parametrize("apart", [0.0, 1e-15, 1e-12, 1e-9, 1e-7, 1e-5])
def test_equal_constants_are_the_alpha_function_without_loss_of_digits(apart: float) -> None:
    """Error of the limit itself is of order (apart)^2 when tau is the geometric mean."""
    rise, decay = 3.0, 3.0 * (1 + apart)
    tau = np.sqrt(rise * decay)
    t = np.linspace(0, 40, 401)
    alpha = t / tau * np.exp(1 - t / tau)
    assert conductance(t, rise, decay) == pytest.approx(alpha, rel=1e-10 + 20 * apart**2, abs=1e-15)
    assert peak_time(rise, decay) == pytest.approx(tau, rel=1e-12 + apart**2)
    assert area(rise, decay) == pytest.approx(np.e * tau, rel=1e-12 + apart**2)


def test_the_plain_difference_of_exponentials_fails_near_equal_constants() -> None:
    """Control: one part in 1e12 apart, the plain form has lost most of its digits."""
    rise, decay = 3.0, 3.0 * (1 + 1e-12)
    t = np.linspace(1, 20, 20)
    top = rise * decay / (decay - rise) * np.log(decay / rise)
    plain = (np.exp(-t / decay) - np.exp(-t / rise)) / (np.exp(-top / decay) - np.exp(-top / rise))
    assert np.max(np.abs(plain - t / 3 * np.exp(1 - t / 3))) > 1e-6


def test_no_rise_is_a_single_exponential_from_one() -> None:
    t = np.array([-1.0, 0.0, 2.0, 50.0])
    assert conductance(t, 0, 4) == pytest.approx([0, 1, np.exp(-0.5), np.exp(-12.5)], rel=1e-14)
    assert (peak_time(0, 4), norm(0, 4), area(0, 4)) == (0, 1, 4)


def test_a_very_short_rise_tends_to_no_rise() -> None:
    t = np.linspace(0.1, 20, 50)
    assert conductance(t, 1e-9, 4) == pytest.approx(conductance(t, 0, 4), rel=1e-7)


def test_nothing_flows_before_onset_and_late_values_do_not_overflow() -> None:
    assert conductance([-5.0, -1e-9], 0.5, 3).tolist() == [0, 0]
    late = conductance([1e3, 1e5], 0.5, 3)
    assert np.all(np.isfinite(late))
    assert np.all(late >= 0)


def test_shapes_broadcast() -> None:
    rise, decay = np.array([[0.0], [0.5], [3.0]]), np.array([3.0, 8.0])
    assert conductance(1.0, rise, decay).shape == (3, 2)
    assert peak_time(rise, decay)[2, 0] == 3
    assert np.isinf(norm(rise, decay)).tolist() == [[False] * 2, [False] * 2, [True, False]]


@pytest.mark.parametrize(("rise", "decay"), [(-1, 3), (1, 0), (float("nan"), 3), (1, -2)])
def test_impossible_time_constants_are_refused(rise: float, decay: float) -> None:
    with pytest.raises(ValueError, match="rise >= 0 and decay > 0 expected"):
        conductance(1.0, rise, decay)


@given(st.floats(-50, 50))
@settings(max_examples=60, deadline=None)
def test_phi_is_the_mean_of_a_decaying_exponential(z: float) -> None:
    """The integral of e^(-z x) over x from 0 to 1 (scipy)."""
    mean = quad(lambda x: np.exp(-z * x), 0, 1, epsabs=0, epsrel=1e-12)[0]
    assert phi(np.float64(z)) == pytest.approx(mean, rel=1e-10)


# ---- magnesium

every_block = pytest.mark.parametrize("name", MAGNESIUM)


@every_block
def test_without_magnesium_nothing_is_blocked(name: str) -> None:
    block = MAGNESIUM[name]
    assert block.unblocked([-300.0, -70, 40], 0.0).tolist() == [1, 1, 1]
    assert block.unblocked([-70.0], 1e-9) == pytest.approx([1], abs=1e-6)
    assert block.half(0.0) == -np.inf


@every_block
def test_half_is_blocked_at_the_half_voltage_and_the_two_sides_mirror(name: str) -> None:
    """B(V_half + x) + B(V_half - x) = 1: the curve is a logistic one."""
    block, mg = MAGNESIUM[name], np.array([0.1, 1.0, 2.0])
    assert block.unblocked(block.half(mg), mg) == pytest.approx(0.5, rel=1e-12)
    sides = block.unblocked(block.half(mg) + 30, mg) + block.unblocked(block.half(mg) - 30, mg)
    assert sides == pytest.approx(1, rel=1e-12)


@every_block
def test_the_block_is_lifted_by_voltage_and_deepened_by_magnesium(name: str) -> None:
    v, mg = np.linspace(-120, 60, 50), np.array([0.1, 0.5, 1, 2, 10])
    share = MAGNESIUM[name].unblocked(v[:, None], mg)
    assert share.shape == (50, 5)
    assert np.all(np.diff(share, axis=0) > 0)
    assert np.all(np.diff(share, axis=1) < 0)


@every_block
def test_a_change_of_magnesium_only_shifts_the_curve(name: str) -> None:
    """Tenfold magnesium: by ln(10)/slope."""
    block, v = MAGNESIUM[name], np.linspace(-100, 40, 15)
    shifted = block.unblocked(v - np.log(10) / block.slope, 0.2)
    assert block.unblocked(v, 2.0) == pytest.approx(shifted, rel=1e-12)


def test_the_block_does_not_overflow() -> None:
    block = MAGNESIUM["jahr_stevens"]
    assert block.unblocked([-1e5, 1e5], 1.0).tolist() == [0, 1]


@pytest.mark.parametrize("magnesium", [-0.1, float("nan")])
def test_impossible_magnesium_is_refused(magnesium: float) -> None:
    with pytest.raises(ValueError, match=r"magnesium = .* mM: must be 0 or more"):
        MAGNESIUM["jahr_stevens"].unblocked(-70.0, magnesium)


# ---- named receptors


@pytest.mark.parametrize("name", KINETICS)
def test_a_named_receptor_has_a_time_course_and_a_source(name: str) -> None:
    kinetics = KINETICS[name]
    assert 0 < peak_time(kinetics.rise, kinetics.decay) < kinetics.decay
    assert any(word in kinetics.source for word in ("looked up", "from memory", "common practice"))


def test_warmth_shortens_a_time_constant_by_its_factor_per_ten_degrees() -> None:
    assert at_temperature([6.0, 30.0], 2.1, 25, 35) == pytest.approx([6 / 2.1, 30 / 2.1], rel=1e-14)
    there = at_temperature(6.0, 3.0, 22, 37)
    assert at_temperature(there, 3.0, 37, 22) == pytest.approx(6, rel=1e-14)
    with pytest.raises(ValueError, match="q10 = 0"):
        at_temperature(6.0, 0.0, 22, 37)
