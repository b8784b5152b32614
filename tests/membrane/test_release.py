"""Binomial release with a fractional site, its dynamics, and the tail over a threshold."""

from __future__ import annotations

import itertools

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy.stats import binom, norm

from plastic.membrane.release import (
    count_probabilities,
    failure_rate,
    inverse_cv2,
    mean_conductance,
    paired_pulse_ratio,
    recursion,
    tail,
    variance,
)

number_of_sites = st.one_of(st.floats(0, 30), st.integers(0, 30).map(float))
probability = st.floats(0, 1)


@given(number_of_sites, probability)
@settings(max_examples=100, deadline=None)
def test_the_counts_have_the_stated_mean_variance_and_failures(sites: float, p: float) -> None:
    chance = count_probabilities(sites, p)
    k = np.arange(len(chance))
    assert len(chance) == int(np.ceil(sites)) + 1
    assert chance.sum() == pytest.approx(1, abs=1e-12)
    mean = chance @ k
    assert mean_conductance(sites, p, 1) == pytest.approx(mean, abs=1e-11)
    assert variance(sites, p, 1, 0) == pytest.approx(chance @ (k - mean) ** 2, abs=1e-10)
    assert failure_rate(sites, p) == pytest.approx(chance[0], abs=1e-12)


@pytest.mark.parametrize("sites", [1, 5, 60, 400])
@pytest.mark.parametrize("p", [0.0, 0.03, 0.5, 0.9, 1.0])
def test_whole_sites_are_the_binomial_distribution(sites: int, p: float) -> None:
    """Against the binomial distribution of scipy."""
    expected = binom.pmf(np.arange(sites + 1), sites, p)
    assert count_probabilities(sites, p) == pytest.approx(expected, rel=1e-9, abs=1e-280)


def test_a_fractional_site_releases_with_fractional_probability() -> None:
    """Two sites of 0.5 and one of 0.4 * 0.5, by enumeration of all eight outcomes."""
    expected = np.zeros(4)
    chances = (0.5, 0.5, 0.2)
    for outcome in itertools.product((0, 1), repeat=3):
        single = [c if hit else 1 - c for c, hit in zip(chances, outcome, strict=True)]
        expected[sum(outcome)] += np.prod(single)
    assert count_probabilities(2.4, 0.5) == pytest.approx(expected, rel=1e-12)


def test_counts_broadcast_and_pad_with_zeros() -> None:
    chance = count_probabilities(np.array([1.0, 2.5]), 0.5)
    assert chance.shape == (2, 4)
    assert chance[0].tolist() == [0.5, 0.5, 0, 0]


def test_noise_and_quantal_variance_add_to_the_variance() -> None:
    """N p q^2 (1 - p + cv^2) + noise^2."""
    expected = 5 * 0.5 * 0.09 * (0.5 + 0.09) + 0.04
    assert variance(5, 0.5, 0.3, 0.3, noise=0.2) == pytest.approx(expected, rel=1e-12)
    assert inverse_cv2(5, 0.5, 0.3, noise_over_q=0.2 / 0.3) == pytest.approx(
        0.75**2 / expected, rel=1e-12
    )


def test_certain_release_has_infinite_inverse_cv2_and_none_has_zero() -> None:
    assert inverse_cv2([5, 5, 0], [1.0, 0.0, 0.5], 0).tolist() == [np.inf, 0, 0]


# --- the tail ---------------------------------------------------------------------------------


@given(st.floats(0.01, 10), number_of_sites, probability, st.floats(0.01, 1))
@settings(max_examples=100, deadline=None)
def test_without_quantal_variance_the_tail_is_the_closed_binomial_tail(
    g_star: float, sites: float, p: float, q: float
) -> None:
    """By the survival function of scipy, mixed over the fractional site."""
    needed = next(k for k in range(1_001) if k * q >= g_star * (1 - 1e-12))
    whole, extra = np.floor(sites), (sites % 1) * p
    expected = (1 - extra) * binom.sf(needed - 1, whole, p) + extra * binom.sf(needed - 2, whole, p)
    assert tail(g_star, sites, p, q, 0) == pytest.approx(expected, rel=1e-9, abs=1e-13)


CASES = [
    (1.0, 5, 0.5, 0.3, 0.3),
    (0.31, 5, 0.2, 0.3, 0.3),
    (9.0, 60, 0.6, 0.275, 0.3),
    (0.9, 3.4, 0.8, 0.3, 0.5),
    (0.05, 2, 0.3, 0.3, 0.8),
]


def drawn_share(
    g_star: float, sites: float, p: float, q: float, cv: float, draws: int = 200_000
) -> float:
    """Monte Carlo: single sites, then the sum of normal quanta, negative sums counted as 0."""
    rng = np.random.default_rng(20_240_601)
    whole = int(sites)
    count = (rng.random((draws, whole)) < p).sum(axis=1)
    count = count + (rng.random(draws) < (sites - whole) * p)
    total = count * q + np.sqrt(count) * cv * q * rng.standard_normal(draws)
    return float(np.mean(np.maximum(total, 0) >= g_star))


def standard_error(share: float, draws: int = 200_000) -> float:
    return float(np.sqrt(share * (1 - share) / draws))


@pytest.mark.parametrize("case", CASES, ids=str)
def test_the_tail_is_that_of_simulated_release(case: tuple[float, ...]) -> None:
    """Within 4 standard errors, sqrt(P (1 - P)/200 000): at most 0.0011."""
    expected = float(tail(*case))
    assert 0.01 < expected < 0.99
    assert abs(drawn_share(*case) - expected) < 4 * standard_error(expected)


@pytest.mark.parametrize("case", [CASES[1], CASES[3], CASES[4]], ids=str)
def test_one_normal_distribution_of_the_same_moments_misses_simulated_release(
    case: tuple[float, ...],
) -> None:
    """Control: the normal approximation of the total is off by more than 4 standard errors.

    Few sites only: with 5 or 60 sites at a high p it is close enough to pass.
    """
    g_star, sites, p, q, cv = case
    mean, spread = mean_conductance(sites, p, q), np.sqrt(variance(sites, p, q, cv))
    rough = float(norm.sf(g_star, mean, spread))
    assert abs(drawn_share(*case) - rough) > 4 * standard_error(rough)


@given(
    g_star=st.floats(0.01, 8),
    sites=number_of_sites,
    p=probability,
    q=st.floats(0.01, 1),
    cv=st.floats(0, 1),
    more=st.floats(1, 2),
)
@settings(max_examples=100, deadline=None)
def test_the_tail_falls_with_the_threshold_and_rises_with_n_p_and_q(
    g_star: float, sites: float, p: float, q: float, cv: float, more: float
) -> None:
    base, slack = float(tail(g_star, sites, p, q, cv)), 1e-12
    assert 0 <= base <= 1
    assert tail(g_star * more, sites, p, q, cv) <= base + slack
    assert tail(g_star, sites * more, p, q, cv) >= base - slack
    assert tail(g_star, sites, min(1.0, p * more), q, cv) >= base - slack
    assert tail(g_star, sites, p, q * more, cv) >= base - slack


def test_the_tail_at_its_edges() -> None:
    """Any threshold up to 0 is reached, an infinite one never, an unknown one stays unknown."""
    found = tail([-1.0, 0.0, np.inf, np.nan], 5, 0.5, 0.3, 0.3)
    assert found[:3].tolist() == [1, 1, 0]
    assert np.isnan(found[3])
    assert tail(1.0, [0, 5, 5], [0.5, 0, 0.5], [0.3, 0.3, 0], 0.3).tolist() == [0, 0, 0]


def test_three_quanta_of_seven_tenths_reach_two_point_one() -> None:
    """In binary 3 * 0.7 is just below 2.1, and 3 * 0.1 just above 0.3."""
    assert 3 * 0.7 < 2.1
    assert tail(2.1, 3, 1.0, 0.7, 0) == 1
    assert tail(0.3, 3, 1.0, 0.1, 0) == 1
    assert tail(0.3 + 1e-9, 3, 1.0, 0.1, 0) == 0


def test_the_tail_broadcasts_to_one_value_per_cell() -> None:
    g_star = np.array([[0.5], [1.0], [2.0]])
    sites = np.array([3.0, 5.5])
    found = tail(g_star, sites, 0.5, 0.3, 0.3)
    assert found.shape == (3, 2)
    assert found[1, 1] == pytest.approx(float(tail(1.0, 5.5, 0.5, 0.3, 0.3)), rel=1e-12)


# --- short-term dynamics ----------------------------------------------------------------------

spikes = st.lists(st.floats(0.1, 500), min_size=1, max_size=12)


@given(probability, st.floats(0, 900), st.floats(0, 900), spikes)
@settings(max_examples=100, deadline=None)
def test_utilisation_and_resources_stay_between_their_bounds(
    p: float, tau_rec: float, tau_fac: float, gaps: list[float]
) -> None:
    u, R = recursion(p, tau_rec, tau_fac, np.cumsum(gaps))
    assert (u[0], R[0]) == (p, 1)
    assert np.all((u >= p - 1e-15) & (u <= 1 + 1e-15))
    assert np.all((R >= 0) & (R <= 1))


@given(st.floats(0.01, 1), st.floats(0, 900), st.floats(0, 900), st.floats(0.1, 500))
@settings(max_examples=100, deadline=None)
def test_the_paired_pulse_ratio_is_that_of_the_recursion(
    p: float, tau_rec: float, tau_fac: float, interval: float
) -> None:
    u, R = recursion(p, tau_rec, tau_fac, [0, interval])
    expected = u[1] * R[1] / p
    assert paired_pulse_ratio(p, tau_rec, tau_fac, interval) == pytest.approx(expected, rel=1e-12)


@given(st.floats(0.01, 0.95), st.floats(1, 900), st.floats(0, 900), st.floats(0.1, 300))
@settings(max_examples=100, deadline=None)
def test_more_release_always_lowers_the_paired_pulse_ratio(
    p: float, tau_rec: float, tau_fac: float, interval: float
) -> None:
    more = paired_pulse_ratio(p + 0.05, tau_rec, tau_fac, interval)
    assert more <= paired_pulse_ratio(p, tau_rec, tau_fac, interval)


def test_a_synapse_without_dynamics_stays_as_it_is() -> None:
    u, R = recursion(0.4, 0, 0, [0, 1, 2, 50])
    assert u.tolist() == [0.4] * 4
    assert R.tolist() == [1.0] * 4
    assert paired_pulse_ratio(0.4, 0, 0, 20) == 1


def test_no_spike_and_one_spike_have_a_recursion_too() -> None:
    assert [part.size for part in recursion(0.4, 800, 0, [])] == [0, 0]
    assert [part.tolist() for part in recursion(0.4, 800, 0, [7.0])] == [[0.4], [1.0]]


@pytest.mark.parametrize("times", [[0, 0], [5, 3], [0, float("nan")], [[0, 1]]])
def test_spike_times_that_do_not_increase_are_refused(times: list[float]) -> None:
    with pytest.raises(ValueError, match="increasing"):
        recursion(0.5, 800, 0, times)


def test_values_outside_their_range_are_refused() -> None:
    with pytest.raises(ValueError, match=r"release probability = 1\.2"):
        mean_conductance(5, 1.2, 0.3)
    with pytest.raises(ValueError, match=r"sites = -1"):
        failure_rate(-1, 0.5)
    with pytest.raises(ValueError, match="neither may be negative"):
        paired_pulse_ratio(0.5, -1, 0, 50)
    with pytest.raises(ValueError, match="neither may be negative"):
        tail(1, 5, 0.5, -0.3, 0.3)
