"""Quantal release and short-term dynamics: published data and closed forms, with provenance.

Parameter sets and end-plate data are from memory (with the confidence said beside them); digits
computed from the published closed form are said to be computed.
"""

from __future__ import annotations

import numpy as np
import pytest
from scipy.stats import chisquare, poisson

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

#: U, tau_rec, tau_fac, ms -> paired-pulse ratio at 50 ms, first five and steady u R at 20 Hz
SETS = {
    # Tsodyks & Markram 1997, depressing, layer 5 pyramid to pyramid (memory, mid)
    "depressing": ((0.5, 800, 0), 0.5303, (0.5, 0.2651, 0.1548, 0.1030, 0.0787), 0.05713),
    # Markram, Wang & Tsodyks 1998, facilitating, pyramid to interneuron (memory, mid to high)
    "facilitating": ((0.03, 130, 530), 1.8442, (0.03, 0.0553, 0.0757, 0.0918, 0.1043), 0.16549),
    # Gupta, Wang & Markram 2000, classes F1 to F3 (memory, high for the means)
    "F1": ((0.16, 45, 376), 1.6440, (0.16, 0.2630, 0.3263, 0.3672, 0.3951), 0.46632),
    "F2": ((0.25, 706, 21), 0.8203, (0.25, 0.2051, 0.1590, 0.1267, 0.1047), 0.05764),
    "F3": ((0.32, 144, 62), 1.0088, (0.32, 0.3228, 0.2734, 0.2427, 0.2284), 0.21809),
}


@pytest.mark.parametrize("name", SETS)
def test_published_synapses_at_twenty_hertz(name: str) -> None:
    """Digits computed from the published recursion and its closed forms."""
    (U, tau_rec, tau_fac), ratio, first, steady = SETS[name]
    u, R = recursion(U, tau_rec, tau_fac, 50.0 * np.arange(400))
    assert paired_pulse_ratio(U, tau_rec, tau_fac, 50) == pytest.approx(ratio, abs=5.1e-5)
    assert (u * R)[:5] == pytest.approx(first, abs=5.1e-5)
    assert (u * R)[-1] == pytest.approx(steady, abs=5.1e-6)


@pytest.mark.parametrize("name", SETS)
@pytest.mark.parametrize("hertz", [5.0, 20.0, 80.0])
def test_the_steady_state_is_the_closed_form(name: str, hertz: float) -> None:
    """u = U/(1 - (1-U) e_f), R = (1 - e_r)/(1 - (1-u) e_r), after many time constants."""
    U, tau_rec, tau_fac = SETS[name][0]
    gap = 1000 / hertz
    u, R = recursion(U, tau_rec, tau_fac, gap * np.arange(2000))
    e_f = np.exp(-gap / tau_fac) if tau_fac else 0.0
    e_r = np.exp(-gap / tau_rec)
    steady_u = U / (1 - (1 - U) * e_f)
    assert u[-1] == pytest.approx(steady_u, rel=1e-9)
    assert R[-1] == pytest.approx((1 - e_r) / (1 - (1 - steady_u) * e_r), rel=1e-9)


def test_depression_obeys_the_one_over_f_law() -> None:
    """f u R -> 1/tau_rec = 1.25 Hz for .5/800 ms: 1.1425, 1.2048, 1.2270, 1.2477 (computed)."""
    found = []
    for hertz in (20, 50, 100, 1000):
        u, R = recursion(0.5, 800, 0, 1000 / hertz * np.arange(20_000))
        found.append(hertz * u[-1] * R[-1])
    assert found == pytest.approx([1.1425, 1.2048, 1.2270, 1.2477], abs=5.1e-5)


def steady_response(U: float, tau_rec: float, tau_fac: float, hertz: float) -> float:
    u, R = recursion(U, tau_rec, tau_fac, 1000 / hertz * np.arange(400))
    return float(u[-1] * R[-1])


@pytest.mark.parametrize(
    ("name", "theta", "exact"), [("facilitating", 22.0, 20.8), ("F1", 19.2, 17.5)]
)
def test_the_peak_frequency_of_a_facilitating_synapse(
    name: str, theta: float, exact: float
) -> None:
    """theta = 1/sqrt(U tau_fac tau_rec), an approximation (Markram et al. 1998): within 12 %."""
    U, tau_rec, tau_fac = SETS[name][0]
    rates = np.arange(5, 40, 0.1)
    best = rates[np.argmax([steady_response(U, tau_rec, tau_fac, f) for f in rates])]
    formula = 1000 / np.sqrt(U * tau_fac * tau_rec)
    assert best == pytest.approx(exact, abs=0.11)
    assert formula == pytest.approx(theta, abs=0.051)
    assert formula == pytest.approx(best, rel=0.12)


def poisson_resources(U: float, tau_rec: float, hertz: float) -> tuple[float, float]:
    """Mean R before a spike of a Poisson train, and its standard error from 100 batch means."""
    rng = np.random.default_rng(7)
    times = np.cumsum(rng.exponential(1000 / hertz, 100_500))
    R = recursion(U, tau_rec, 0, times)[1][500:]
    batches = R.reshape(100, -1).mean(axis=1)
    return float(R.mean()), float(batches.std(ddof=1) / 10)


@pytest.mark.parametrize(("U", "hertz"), [(0.5, 2.0), (0.5, 20.0), (0.2, 10.0)])
def test_mean_resources_under_a_poisson_train(U: float, hertz: float) -> None:
    """<R> = 1/(1 + U r tau_rec) exactly just before a spike (own check of the closed form).

    Within 4 standard errors. Control: the resources of a regular train of that rate are farther.
    """
    mean, error = poisson_resources(U, 800, hertz)
    assert error < 0.003
    assert abs(mean - 1 / (1 + U * hertz * 0.8)) < 4 * error
    regular = recursion(U, 800, 0, 1000 / hertz * np.arange(500))[1][-1]
    assert abs(mean - regular) > 4 * error


@pytest.mark.parametrize(
    ("tau_rec", "tau_fac", "ratios"),
    [
        (800, 0, (0.8121, 0.7182, 0.6242, 0.5303, 0.4364, 0.2485)),
        (200, 50, (1.0927, 0.9637, 0.8404, 0.7229, 0.6111, 0.4047)),
    ],
)
def test_paired_pulse_ratio_against_release_probability(
    tau_rec: float, tau_fac: float, ratios: tuple[float, ...]
) -> None:
    """50 ms, U = .2 .3 .4 .5 .6 .8 (closed form, computed)."""
    U = np.array([0.2, 0.3, 0.4, 0.5, 0.6, 0.8])
    assert paired_pulse_ratio(U, tau_rec, tau_fac, 50) == pytest.approx(ratios, abs=5.1e-5)


def test_means_and_variances_along_a_depressing_train() -> None:
    """N 5, .5/800/0, 20 Hz; counts are binomial with u R (Fuhrmann et al. 2002; computed)."""
    u, R = recursion(0.5, 800, 0, 50.0 * np.arange(5))
    assert mean_conductance(5, u * R, 1) == pytest.approx(
        [2.5, 1.3257, 0.7742, 0.5151, 0.3934], abs=5.1e-5
    )
    assert variance(5, u * R, 1, 0) == pytest.approx(
        [1.25, 0.9742, 0.6543, 0.4620, 0.3625], abs=5.1e-5
    )


def simulated_train(trials: int) -> np.ndarray:
    """Counts of single sites that are occupied or not, shape (trial, spike)."""
    rng = np.random.default_rng(11)
    occupied = np.ones((trials, 5), dtype=bool)
    counts = np.zeros((trials, 5))
    for spike in range(5):
        released = occupied & (rng.random(occupied.shape) < 0.5)
        counts[:, spike] = released.sum(axis=1)
        refilled = rng.random(occupied.shape) < 1 - np.exp(-50 / 800)
        occupied = (occupied & ~released) | refilled
    return counts


def test_the_recursion_is_the_mean_of_stochastic_vesicles() -> None:
    """40 000 trials of single sites: mean within 4 sd/sqrt(n), variance within 4 sqrt(2/n).

    Control: a site that is always occupied (u alone) misses the second spike by far.
    """
    counts = simulated_train(40_000)
    u, R = recursion(0.5, 800, 0, 50.0 * np.arange(5))
    expected = variance(5, u * R, 1, 0)
    error = np.sqrt(expected / 40_000)
    assert np.all(np.abs(counts.mean(axis=0) - mean_conductance(5, u * R, 1)) < 4 * error)
    assert np.all(np.abs(counts.var(axis=0) / expected - 1) < 4 * np.sqrt(2 / 40_000) * 1.3)
    assert abs(counts[:, 1].mean() - 5 * u[1]) > 100 * error[1]


# --- quantal analysis -------------------------------------------------------------------------


def test_moments_of_binomial_release() -> None:
    """Textbook formulas: N 5, p .5, q .3, cv .3, and the parabola of N 10, q .1."""
    assert mean_conductance(5, 0.5, 0.3) == pytest.approx(0.75, rel=1e-12)
    assert variance(5, 0.5, 0.3, 0.3) == pytest.approx(0.13275, rel=1e-12)
    assert inverse_cv2(5, 0.5, 0.3) == pytest.approx(4.2373, abs=5e-5)
    p = np.array([0.1, 0.3, 0.5, 0.7, 0.9])
    assert variance(10, p, 0.1, 0) == pytest.approx([0.009, 0.021, 0.025, 0.021, 0.009], rel=1e-9)
    mean = mean_conductance(10, p, 0.1)
    assert variance(10, p, 0.1, 0) == pytest.approx(0.1 * mean - mean**2 / 10, rel=1e-9)


def test_five_sites_at_one_half_look_like_a_layer_5_pair() -> None:
    """CV mean .52 (.13-2.8), failures mean 14 % (0-73): Markram et al. 1997 (looked up).

    Plausibility only. Both fall as the mean grows, as the paper states.
    """
    p = np.array([0.3, 0.41, 0.5, 0.7])
    cv, failures = inverse_cv2(5, p, 0) ** -0.5, failure_rate(5, p)
    assert (cv[2], failures[2]) == pytest.approx((0.447, 0.031), abs=5e-4)
    assert np.all((cv > 0.13) & (cv < 2.8))
    assert np.all(failures < 0.73)
    assert np.all(np.diff(cv) < 0)
    assert np.all(np.diff(failures) < 0)


@pytest.mark.parametrize("p0", [0.1, 0.2, 0.5])
@pytest.mark.parametrize("change", [0.5, 1.5, 1.8])
def test_locus_lines(p0: float, change: float) -> None:
    """CV^-2 after/before r against mean after/before: r = 1 (q), r = change (N), p curve.

    Bekkers & Stevens 1990; Malinow & Tsien 1990; Faber & Korn 1991 (textbook, from memory).
    """
    before = inverse_cv2(10, p0, 0)
    more_p = inverse_cv2(10, p0 * change, 0) / before
    assert more_p == pytest.approx(change * (1 - p0) / (1 - change * p0), rel=1e-12)
    assert inverse_cv2(10 * change, p0, 0) / before == pytest.approx(change, rel=1e-12)
    assert bool(more_p > change) is (change > 1)
    old_mean, old_variance = mean_conductance(10, p0, 0.3), variance(10, p0, 0.3, 0.3)
    new_mean = mean_conductance(10, p0, 0.3 * change)
    new_variance = variance(10, p0, 0.3 * change, 0.3)
    assert new_mean / old_mean == pytest.approx(change, rel=1e-12)
    assert new_mean**2 / new_variance == pytest.approx(old_mean**2 / old_variance, rel=1e-12)


@pytest.mark.parametrize(("p0", "ratios"), [(0.2, (0.444, 1.714, 2.25)), (0.5, (0.333, 3.0, 9.0))])
def test_the_p_curve_in_figures(p0: float, ratios: tuple[float, ...]) -> None:
    """Mean times .5, 1.5, 1.8 (computed)."""
    found = inverse_cv2(5, p0 * np.array([0.5, 1.5, 1.8]), 0) / inverse_cv2(5, p0, 0)
    assert found == pytest.approx(ratios, abs=5e-4)


# --- end plate: Boyd & Martin 1956 (all data from memory, high) --------------------------------

OBSERVED = np.array([18, 44, 55, 36, 25, 12, 5, 2, 1, 0])
TRIALS = 198
M = 0.933 / 0.4
#: 198 Pois(k; 2.33), computed
PREDICTED = np.array([19.26, 44.89, 52.29, 40.61, 23.66, 11.02, 4.28, 1.43, 0.42, 0.11])
#: many sites, each with a small release probability, are the Poisson limit
SITES = 20_000


def pooled(counts: np.ndarray) -> np.ndarray:
    """Six quanta and more in one class."""
    return np.append(counts[:6], counts[6:].sum())


def test_end_plate_counts_are_the_poisson_limit_of_binomial_release() -> None:
    assert OBSERVED.sum() == TRIALS
    assert pytest.approx(2.33, abs=0.01) == M
    expected = TRIALS * count_probabilities(SITES, 2.33 / SITES)[:10]
    assert expected == pytest.approx(PREDICTED, abs=0.01)
    assert expected == pytest.approx(TRIALS * poisson.pmf(np.arange(10), 2.33), abs=0.01)


def test_three_estimates_of_the_quantal_content_agree() -> None:
    """m 2.33 from the means, 2.398 from failures, 2.291 from the variance of the table.

    Standard errors .108 and .216 (computed); the package's own formulas, put in, give them back.
    """
    k = np.arange(10)
    mean = OBSERVED @ k / TRIALS
    spread = OBSERVED @ (k - mean) ** 2 / TRIALS
    by_failures, by_variance = np.log(TRIALS / OBSERVED[0]), mean**2 / spread
    assert mean == pytest.approx(2.394, abs=1e-3)
    assert by_failures == pytest.approx(2.398, abs=1e-3)
    assert by_variance == pytest.approx(2.291, abs=1e-3)
    assert -np.log(failure_rate(SITES, by_failures / SITES)) == pytest.approx(2.398, abs=2e-3)
    assert inverse_cv2(SITES, by_variance / SITES, 0) == pytest.approx(2.291, abs=2e-3)
    assert abs(by_failures - M) < 4 * 0.216
    assert TRIALS * failure_rate(SITES, M / SITES) == pytest.approx(19.26, abs=0.1)


def test_the_end_plate_histogram_fits_poisson_and_not_five_sites() -> None:
    """chi^2 1.41, 6 df, p .97 for Poisson; five sites of the same mean are rejected (control)."""
    limit = count_probabilities(SITES, 2.33 / SITES)
    fit = chisquare(pooled(OBSERVED), pooled(limit / limit.sum()) * TRIALS)
    assert fit.statistic == pytest.approx(1.41, abs=0.01)
    assert fit.pvalue == pytest.approx(0.97, abs=0.01)
    few = count_probabilities(5, 2.33 / 5)
    expected = np.append(few, 0.0)
    observed = pooled(OBSERVED)
    top = chisquare([*observed[:5], observed[5:].sum()], TRIALS * expected[:6])
    assert top.pvalue < 1e-3


def test_poisson_fails_for_a_release_probability_of_one_half() -> None:
    """Johnson & Wernig 1971 (looked up): Poisson fails above p = .2; 500 trials, N 5, p .5."""
    rng = np.random.default_rng(3)
    counts = np.bincount(rng.choice(6, 500, p=count_probabilities(5, 0.5)), minlength=6)
    limit = poisson.pmf(np.arange(6), 2.5)
    limit[-1] += 1 - limit.sum()
    assert chisquare(counts, 500 * limit).pvalue < 1e-6
    assert chisquare(counts, 500 * count_probabilities(5, 0.5)).pvalue > 1e-3


def test_the_tail_of_the_end_plate_without_quantal_variance() -> None:
    """P(at least 3 quanta of .4 mV) by the Poisson tail of scipy."""
    found = tail(1.2, SITES, 2.33 / SITES, 0.4, 0)
    assert found == pytest.approx(poisson.sf(2, 2.33), abs=1e-4)
