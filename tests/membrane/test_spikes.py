"""Rates of the leaky neuron; back-propagated spikes: delay and decrement."""

from __future__ import annotations

import math
from dataclasses import replace
from typing import Any

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy.integrate import quad, solve_ivp
from scipy.special import erfc

from plastic.membrane.spikes import (
    GRID_SHIFT,
    BackPropagation,
    leaky_interval,
    leaky_rate,
    siegert_rate,
)

BAP = BackPropagation(length_constant=500, train_loss=0.2, recovery=100, floor=0.3)
trains = st.lists(st.floats(0.5, 300), min_size=1, max_size=10).map(np.cumsum)


def test_a_spike_needs_one_millisecond_for_half_a_millimetre() -> None:
    """0.5 m/s in the apical trunk of layer 5: Stuart, Schiller & Sakmann 1997 (looked up)."""
    assert BackPropagation().delay([0.0, 250.0, 500.0]).tolist() == [0, 0.5, 1]


def test_about_half_the_amplitude_is_left_at_half_a_millimetre() -> None:
    """Layer 5, from memory (unsure): a check of the default, not of the tissue."""
    assert BackPropagation().amplitudes(500.0, [0.0])[0] == pytest.approx(0.5, abs=0.001)


def test_the_first_spike_falls_exponentially_with_distance() -> None:
    x = np.array([0.0, 100, 500, 1000])
    assert BAP.amplitudes(x, [3.0])[:, 0] == pytest.approx(np.exp(-x / 500), rel=1e-14)


def test_each_spike_shortens_the_reach_which_recovers_exponentially() -> None:
    """r: 1, then 0.8 recovering for 50 ms, then 0.8 of that recovering for 100 ms."""
    second = 1 - 0.2 * np.exp(-0.5)
    third = 1 - (1 - 0.8 * second) * np.exp(-1.0)
    assert BAP.reach([10.0, 60.0, 160.0]) == pytest.approx([1, second, third], rel=1e-14)
    assert BAP.amplitudes(200.0, [10.0, 60.0, 160.0]) == pytest.approx(
        np.exp(-200 / (500 * np.array([1, second, third]))), rel=1e-14
    )


def test_a_long_train_settles_where_loss_and_recovery_balance() -> None:
    """r = (1 - e)/(1 - (1 - loss) e), e = exp(-interval/recovery)."""
    e = np.exp(-20 / 100)
    settled = BAP.reach(20.0 * np.arange(200))[-1]
    assert settled == pytest.approx((1 - e) / (1 - 0.8 * e), rel=1e-12)


@given(trains, st.floats(0, 0.9), st.floats(0, 1000))
@settings(max_examples=80, deadline=None)
def test_the_reach_stays_above_zero_and_never_exceeds_the_rested_one(
    times: Any, loss: float, recovery: float
) -> None:
    reach = replace(BAP, train_loss=loss, recovery=recovery).reach(times)
    assert np.all((reach > 0) & (reach <= 1))
    assert reach[0] == 1


@given(trains, st.floats(0, 800), st.floats(0, 400))
@settings(max_examples=80, deadline=None)
def test_the_amplitude_falls_with_distance(times: Any, near: float, further: float) -> None:
    amplitudes = BAP.amplitudes([near, near + further], times)
    assert np.all(amplitudes[1] <= amplitudes[0])
    assert np.all(amplitudes <= 1)


def test_a_faster_train_reaches_less_far() -> None:
    """The decrement depends on frequency: Stuart et al. 1997 (looked up, sign only)."""
    slow, fast = (BAP.amplitudes(300.0, interval * np.arange(5.0)) for interval in (100, 10))
    assert np.all(fast[1:] < slow[1:])


def test_without_loss_or_with_recovery_at_once_every_spike_is_like_the_first() -> None:
    times = [0.0, 5.0, 10.0]
    for bap in (replace(BAP, train_loss=0.0), replace(BAP, recovery=0.0)):
        assert bap.reach(times).tolist() == [1, 1, 1]


def test_a_spike_below_the_floor_is_no_postsynaptic_event() -> None:
    """At 500 um: first spike e^-1 = 0.37, second e^-1.25 = 0.29 without recovery; floor 0.3."""
    counted = replace(BAP, recovery=1e12).counts([0.0, 500.0], [0.0, 10.0])
    assert counted.tolist() == [[True, True], [True, False]]
    exact = BackPropagation(length_constant=100, floor=1.0)
    assert exact.counts(0.0, [0.0]).tolist() == [True]


@pytest.mark.parametrize(
    ("field", "value"),
    [
        ("velocity", 0),
        ("length_constant", -1),
        ("train_loss", 1),
        ("train_loss", float("nan")),
        ("recovery", -1),
        ("recovery", float("inf")),
        ("floor", 1.5),
    ],
)
def test_a_value_outside_its_range_is_refused_with_its_name(field: str, value: float) -> None:
    with pytest.raises(ValueError, match=rf"^{field} = {value}: must be"):
        replace(BAP, **{field: value})


def test_spike_times_that_do_not_increase_are_refused() -> None:
    with pytest.raises(ValueError, match="increasing"):
        BAP.reach([5.0, 5.0])


# ---- a leaky neuron under a constant input


@given(st.floats(1.02, 8), st.floats(2, 60), st.floats(-10, 14), st.floats(0, 10))
@settings(max_examples=40, deadline=None)
def test_the_interval_is_refractory_time_and_climb(
    share: float, tau: float, reset: float, refractory: float
) -> None:
    """The climb from reset to threshold by scipy."""

    def top(_: float, v: Any) -> float:
        return float(v[0] - 15)

    top.terminal = True  # type: ignore[attr-defined]

    def climb(_: float, v: Any) -> Any:
        return (15 * share - v) / tau

    made = solve_ivp(climb, (0, 1e4), [reset], "DOP853", events=top, rtol=1e-11, atol=1e-12)
    found = leaky_interval(15 * share, tau, 15.0, reset, refractory)
    assert found == pytest.approx(refractory + made.t[-1], rel=1e-8)
    assert leaky_rate(15 * share, tau, 15.0, reset, refractory) == pytest.approx(1e3 / found)


@pytest.mark.parametrize("v_inf", [-20.0, 0.0, 14.999, 15.0])
def test_at_or_below_the_threshold_a_leaky_neuron_is_silent(v_inf: float) -> None:
    assert leaky_rate(v_inf, 20.0, 15.0, 0.0, 2.0) == 0
    assert leaky_interval(v_inf, 20.0, 15.0, 0.0, 2.0) == np.inf


def test_a_strong_input_fires_as_fast_as_the_refractory_time_lets_it() -> None:
    assert leaky_rate(1e9, 20.0, 15.0, 0.0, 2.0) == pytest.approx(500, rel=1e-6)
    # without a refractory time: as an integrator, v_inf / (tau (threshold - reset))
    assert leaky_rate(1e9, 20.0, 15.0, 0.0, 0.0) == pytest.approx(1e12 / 300, rel=1e-7)


def test_rates_broadcast() -> None:
    assert leaky_rate([[10.0], [20.0], [30.0]], [10.0, 20.0], 15.0, 0.0, 2.0).shape == (3, 2)


# ---- under white noise


@pytest.mark.parametrize(("mean", "sigma"), [(15, 5), (25, 5), (10, 4), (30, 1), (5, 12)])
def test_the_rate_under_noise_is_siegerts_integral(mean: float, sigma: float) -> None:
    """e^(x^2) (1 + erf x), 1 + erf x written as erfc(-x), which loses no digits (scipy)."""
    ends = (10 - mean) / sigma, (20 - mean) / sigma
    plain = quad(lambda x: math.exp(x * x) * erfc(-x), *ends, epsabs=0, epsrel=1e-12)[0]
    expected = 1000 / (2 + 20 * math.sqrt(math.pi) * plain)
    assert siegert_rate(mean, sigma, 20, 20, 10, 2) == pytest.approx(expected, rel=1e-6)


@pytest.mark.parametrize("mean", [21.0, 25.0, 60.0, 1e4])
def test_without_noise_the_rate_is_that_of_a_constant_input(mean: float) -> None:
    """The error is of the order of (sigma / (mean - threshold))^2."""
    found = siegert_rate(mean, 1e-4, 20, 20, 10, 2)
    assert found == pytest.approx(float(leaky_rate(mean, 20.0, 20.0, 10.0, 2.0)), rel=1e-7)


def test_below_threshold_the_rate_falls_as_the_distance_over_the_noise_squared() -> None:
    """ln rate ~ -(distance/sigma)^2 + ln(distance/sigma): Kramers' limit; never an overflow."""
    far = [siegert_rate(20 - 2 * x, 2.0, 20, 20, 10, 0.0) for x in (5, 6, 20, 30, 1e4)]
    shrunk = math.log(far[1] / far[0]) - (25 - 36) - math.log(6 / 5)
    assert shrunk == pytest.approx(0, abs=0.02)
    assert 0 < far[2] < 1e-150
    assert far[3:] == [0, 0]


def test_noise_makes_a_silent_neuron_fire_and_a_coarse_grid_misses_spikes() -> None:
    rates = [siegert_rate(15, sigma, 20, 20, 10, 2) for sigma in (1, 2, 5, 10)]
    assert np.all(np.diff(rates) > 0)
    gridded = [siegert_rate(15, 5, 20, 20, 10, 2, dt=dt) for dt in (0, 0.01, 0.1, 1)]
    assert np.all(np.diff(gridded) < 0)
    assert gridded[0] == siegert_rate(15, 5, 20, 20, 10, 2)


def test_the_shift_of_the_grid_is_that_of_the_zeta_function() -> None:
    """-zeta(1/2)/sqrt(2 pi), by the alternating series with its mean of partial sums."""
    terms = (-1.0) ** np.arange(200_000) / np.sqrt(np.arange(1, 200_001))
    partial = np.cumsum(terms)[-4:]
    eta = (partial[:-2] + 2 * partial[1:-1] + partial[2:])[-1] / 4
    zeta = eta / (1 - math.sqrt(2))
    assert -zeta / math.sqrt(2 * math.pi) == pytest.approx(GRID_SHIFT, rel=1e-9)


@pytest.mark.parametrize(
    ("given_", "message"),
    [
        ((15, 5, 20, 20, 20, 2), "reset = 20 mV must be below threshold = 20 mV"),
        ((15, 0, 20, 20, 10, 2), "sigma = 0 mV"),
        ((15, 5, -1, 20, 10, 2), "tau = -1 ms"),
    ],
)
def test_impossible_noise_is_refused(given_: tuple[float, ...], message: str) -> None:
    with pytest.raises(ValueError, match=message):
        siegert_rate(*given_)
