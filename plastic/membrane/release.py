"""Binomial release of quanta, its short-term dynamics, and the chance to pass a conductance.

N sites release independently, each with probability p, a quantum of mean q and coefficient of
variation cv. N may be fractional: the whole sites and one more that releases with probability
(N - floor N) p. All functions broadcast.

References
----------
del Castillo J, Katz B (1954) J Physiol 124:560 and Boyd IA, Martin AR (1956) J Physiol 132:74 for
quantal release (from memory); Tsodyks MV, Markram H (1997) PNAS 94:719 and Markram H, Wang Y,
Tsodyks M (1998) PNAS 95:5323 for depletion and facilitation (equations from memory).
"""

from __future__ import annotations

import math

import numpy as np
from numpy.typing import ArrayLike, NDArray
from scipy.special import gammaln, ndtr, xlog1py, xlogy

Floats = NDArray[np.float64]

#: relative slack of "k quanta reach g_star" without quantal variance: 3 * 0.7 must reach 2.1
ROUNDING = 1e-12


def _whole_and_fraction(sites: ArrayLike) -> tuple[Floats, Floats]:
    sites = np.asarray(sites, float)
    if not np.all((sites >= 0) & np.isfinite(sites)):
        raise ValueError(f"sites = {sites}: must be 0 or more and finite")
    return np.floor(sites), sites - np.floor(sites)


def _probability(p: ArrayLike) -> Floats:
    p = np.asarray(p, float)
    if not np.all((p >= 0) & (p <= 1)):
        raise ValueError(f"release probability = {p}: must lie in [0, 1]")
    return p


def mean_conductance(sites: ArrayLike, p: ArrayLike, q: ArrayLike) -> Floats:
    """Return the mean peak conductance of one input, N p q.

    Parameters
    ----------
    sites : array_like, number of release sites
    p : array_like, release probability
    q : array_like, quantum, nS

    Returns
    -------
    array, broadcast shape, nS
    """
    return np.asarray(np.asarray(sites, float) * _probability(p) * np.asarray(q, float))


def _count_variance(sites: ArrayLike, p: ArrayLike) -> Floats:
    """Return the variance of the number of quanta: N p (1 - p) for whole N."""
    whole, fraction = _whole_and_fraction(sites)
    p = _probability(p)
    return np.asarray(whole * p * (1 - p) + fraction * p * (1 - fraction * p))


def variance(
    sites: ArrayLike, p: ArrayLike, q: ArrayLike, quantal_cv: ArrayLike, noise: ArrayLike = 0.0
) -> Floats:
    """Return the variance of the peak conductance, N p q^2 (1 - p + cv^2) + noise^2.

    A fractional site adds ``f p (1 - f p)`` instead of ``f p (1 - p)``.

    Parameters
    ----------
    sites, p, q
        As for `mean_conductance`.
    quantal_cv : array_like, coefficient of variation of one quantum
    noise : array_like, standard deviation of the recording noise, unit of `q`

    Returns
    -------
    array, broadcast shape, unit of `q` squared
    """
    quantal = np.asarray(sites, float) * _probability(p) * np.asarray(quantal_cv, float) ** 2
    counted = _count_variance(sites, p) + quantal
    return np.asarray(np.asarray(q, float) ** 2 * counted + np.asarray(noise, float) ** 2)


def inverse_cv2(
    sites: ArrayLike, p: ArrayLike, quantal_cv: ArrayLike, noise_over_q: ArrayLike = 0.0
) -> Floats:
    """Return mean^2/variance of the peak conductance; N p / (1 - p + cv^2) without noise.

    0 where nothing is released, infinite where release is certain and without variance.

    Parameters
    ----------
    sites, p, quantal_cv
        As for `variance`.
    noise_over_q : array_like, standard deviation of the recording noise as a multiple of q

    Returns
    -------
    array, broadcast shape, dimensionless
    """
    mean = mean_conductance(sites, p, 1.0)
    spread = variance(sites, p, 1.0, quantal_cv, noise_over_q)
    mean, spread = np.broadcast_arrays(mean, spread)
    safe = np.where(spread > 0, spread, 1.0)
    return np.where(mean == 0, 0.0, np.where(spread > 0, mean**2 / safe, np.inf))


def failure_rate(sites: ArrayLike, p: ArrayLike) -> Floats:
    """Return the probability that no quantum is released, (1 - p)^floor(N) (1 - f p).

    Parameters
    ----------
    sites, p
        As for `mean_conductance`; f = N - floor(N).

    Returns
    -------
    array, broadcast shape, probability
    """
    whole, fraction = _whole_and_fraction(sites)
    p = _probability(p)
    return (1 - p) ** whole * (1 - fraction * p)


def _kept(interval: ArrayLike, tau: ArrayLike) -> Floats:
    """Return e^(-interval/tau), 0 where tau = 0 (no such process)."""
    interval, tau = np.broadcast_arrays(np.asarray(interval, float), np.asarray(tau, float))
    if not (np.all(tau >= 0) and np.all(interval >= 0)):
        raise ValueError(f"tau = {tau} ms, interval = {interval} ms: neither may be negative")
    with np.errstate(over="ignore"):  # a tau next to 0 keeps nothing, which is what e^-inf says
        return np.where(tau > 0, np.exp(-interval / np.where(tau > 0, tau, 1.0)), 0.0)


def paired_pulse_ratio(
    p: ArrayLike, tau_rec: ArrayLike, tau_fac: ArrayLike, interval: ArrayLike
) -> Floats:
    """Return the mean second response over the first of a rested synapse.

    ``[1 + (1 - p) e^(-interval/tau_fac)] [1 - p e^(-interval/tau_rec)]``

    Parameters
    ----------
    p : array_like, release probability (utilisation) of a rested synapse
    tau_rec, tau_fac : array_like, ms
        Recovery from depletion and decay of facilitation; 0 means the synapse has none.
    interval : array_like, ms

    Returns
    -------
    array, broadcast shape, dimensionless
    """
    p = _probability(p)
    return (1 + (1 - p) * _kept(interval, tau_fac)) * (1 - p * _kept(interval, tau_rec))


def recursion(p: float, tau_rec: float, tau_fac: float, times: ArrayLike) -> tuple[Floats, Floats]:
    """Return utilisation and resources seen by each presynaptic spike.

    ``u' = p + u (1 - p) e^(-dt/tau_fac)`` and ``R' = 1 - [1 - R (1 - u)] e^(-dt/tau_rec)``, from
    u = p and R = 1; u and R are the values that spike uses, and depletion is by its own u (the
    printed recursion of 1998 counts its index differently; from memory). The mean response to a
    spike is N q u R.

    Parameters
    ----------
    p : float, release probability of a rested synapse
    tau_rec, tau_fac : float, ms
        0 means the synapse has no such process.
    times : array_like, shape (spike,), ms, increasing

    Returns
    -------
    u, R : array, shape (spike,), dimensionless
    """
    start = float(_probability(p))
    times = np.asarray(times, float)
    gaps = np.diff(times)
    if times.ndim != 1 or not np.all(gaps > 0):
        raise ValueError("presynaptic spike times must be one increasing list")
    u, R = np.full(times.shape, start), np.ones(times.shape)
    facilitation, depletion = _kept(gaps, tau_fac), _kept(gaps, tau_rec)
    for i in range(len(gaps)):
        u[i + 1] = start + u[i] * (1 - start) * facilitation[i]
        R[i + 1] = 1 - (1 - R[i] * (1 - u[i])) * depletion[i]
    return u, R


def _binomial(k: Floats, n: Floats, p: Floats) -> Floats:
    """Return the binomial probabilities of k out of n, 0 outside 0 <= k <= n."""
    inside = (k >= 0) & (k <= n)
    k = np.where(inside, k, 0.0)
    log_choose = gammaln(n + 1) - gammaln(k + 1) - gammaln(n - k + 1)
    return np.where(inside, np.exp(log_choose + xlogy(k, p) + xlog1py(n - k, -p)), 0.0)


def count_probabilities(sites: ArrayLike, p: ArrayLike) -> Floats:
    """Return the probabilities of 0, 1, 2 ... released quanta.

    Parameters
    ----------
    sites, p
        As for `mean_conductance`.

    Returns
    -------
    array, shape (..., 1 + ceil of the largest N), probability
        Broadcast shape of `sites` and `p`, then the count; zeros beyond an input's own sites.
    """
    whole, fraction = (part[..., np.newaxis] for part in _whole_and_fraction(sites))
    p = _probability(p)[..., np.newaxis]
    most = math.ceil(float(np.max(sites))) if np.size(sites) else 0
    k = np.arange(most + 1.0)
    extra = fraction * p
    return _binomial(k, whole, p) * (1 - extra) + _binomial(k - 1, whole, p) * extra


def tail(
    g_star: ArrayLike, sites: ArrayLike, p: ArrayLike, q: ArrayLike, quantal_cv: ArrayLike
) -> Floats:
    """Return the probability that one release reaches the total conductance `g_star`.

    Sum over k of P(k quanta) P(k quanta >= g_star), where k quanta sum to a normal number of mean
    ``k q`` and variance ``k (cv q)^2``, negative sums counting as 0. Without quantal variance k
    quanta reach `g_star` when ``k q >= g_star``. Any `g_star` <= 0 is reached, an infinite one
    never; NaN stays NaN.

    Parameters
    ----------
    g_star : array_like, nS
    sites, p, q, quantal_cv
        As for `variance`.

    Returns
    -------
    array, broadcast shape, probability
    """
    cv, quantum, wanted = (
        np.asarray(value, float)[..., np.newaxis] for value in (quantal_cv, q, g_star)
    )
    if not (np.all(cv >= 0) and np.all(quantum >= 0)):
        raise ValueError(f"quantum = {quantum} nS, quantal cv = {cv}: neither may be negative")
    probabilities = count_probabilities(sites, p)
    k = np.arange(float(probabilities.shape[-1]))
    mean, spread = k * quantum, np.sqrt(k) * cv * quantum
    safe = np.where(spread > 0, spread, 1.0)
    with np.errstate(over="ignore"):  # a cv next to 0 is a step, which is what ndtr(inf) says
        by_chance = ndtr((mean - wanted) / safe)
    by_step = mean >= wanted * (1 - ROUNDING)
    total = np.sum(probabilities * np.where(spread > 0, by_chance, by_step), axis=-1)
    reached = np.where(wanted[..., 0] <= 0, 1.0, np.minimum(total, 1.0))
    return np.where(np.isnan(wanted[..., 0]), np.nan, reached)
