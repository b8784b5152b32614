"""The pair rule between its bounds: soft-bound fixed points, and the density between hard ones."""

from __future__ import annotations

import math

import numpy as np
import pytest
import scipy.sparse as sp
from numpy.typing import NDArray
from scipy.sparse.linalg import spsolve

from plastic import impose
from plastic.rules.pair_timing import PairTiming
from tests.published.poisson import mean_and_error, train

Array = NDArray[np.float64]
ALPHA = 1.05
#: Gutig et al. 2003 (form from memory, high; derived): w*/w_max = 1 / (1 + alpha^(1/mu))
FIXED_POINTS = {1.0: 0.4878049, 0.5: 0.4756243, 0.1: 0.3803880, 0.02: 0.0802092}


def fixed_point(mu: float) -> float:
    return 1 / (1 + ALPHA ** (1 / mu))


def settled(mu: float, step: float, seed: int) -> tuple[float, float]:
    """Return mean and standard error of w/w_max over 30 stretches of four relaxation times.

    Five inputs and a cell of 100 Hz, all independent, start 30 % above the fixed point; the first
    six relaxation times are left out.
    """
    x, rate = fixed_point(mu), 100.0
    slope = mu * ((1 - x) ** (mu - 1) + ALPHA * x ** (mu - 1))  # of the drift, in units of step
    relaxation = 1e6 / (rate**2 * 20 * slope * step)  # ms
    w_max = 1 / (1.3 * x)
    rule = PairTiming(
        a_plus=w_max * step,
        a_minus=w_max * step * ALPHA,
        tau_plus=20,
        tau_minus=20,
        w_max=w_max,
        mu=mu,
    )
    draw, end = np.random.default_rng(seed), 126 * relaxation
    pre = {str(k): train(rate, end, draw) for k in range(5)}
    at = np.linspace(6 * relaxation, end, 601)[1:]
    found = impose(rule, pre, train(rate, end, draw), readings=at).w.values / w_max
    return mean_and_error(found.mean(axis=0).reshape(30, 20).mean(axis=1))


@pytest.mark.parametrize(
    ("mu", "step"), [(1.0, 1e-3), (0.5, 1e-3), (0.1, 2e-4), (0.02, 1e-4)], ids=str
)
def test_a_soft_bounded_weight_settles_at_the_fixed_point(mu: float, step: float) -> None:
    """Independent Poisson trains, steps small; four standard errors, which are at most 1.5 % of
    the fixed point. Control: the fixed points of the other exponents are out."""
    assert fixed_point(mu) == pytest.approx(FIXED_POINTS[mu], abs=5.1e-8)
    mean, error = settled(mu, step, seed=31)
    assert error < 0.015 * fixed_point(mu)
    assert abs(mean - fixed_point(mu)) < 4 * error
    others = [value for other, value in FIXED_POINTS.items() if other != mu]
    assert min(abs(mean - value) for value in others) > 4 * error


LAG = 1.0  # ms, of every pair of the walks below


def walk(
    up: float, down: float, seed: int, *, inputs: int, pairs: int, left_out: int, mu: float = 0.0
) -> Array:
    """Return weights in [0, 1], one row per input, under isolated pairs of random sign.

    Every pair moves a weight by `up` or by `-down` (at mu = 0), each with probability 1/2.
    """
    left = math.exp(-LAG / 20)
    rule = PairTiming(
        a_plus=up / left, a_minus=down / left, tau_plus=20, tau_minus=20, w_max=1, mu=mu
    )
    draw, post = np.random.default_rng(seed), 1000.0 * np.arange(1, pairs + 1)
    pre = {str(k): post - LAG * draw.choice([-1, 1], pairs) for k in range(inputs)}
    at = 1000.0 * np.arange(left_out, pairs, 25) + 500
    return np.asarray(impose(rule, pre, post, readings=at).w.values)


def stationary(up: int, down: int, length: int) -> Array:
    """Return the exact density of the clipped walk on 0 ... length, from its transition matrix."""
    k = np.arange(length + 1)
    to = np.concatenate([np.minimum(k + up, length), np.maximum(k - down, 0)])
    steps = sp.csr_array((np.full(2 * len(k), 0.5), (to, np.tile(k, 2))), (len(k), len(k)))
    balance = sp.lil_array(steps - sp.eye_array(len(k)))
    balance[0] = 1  # one of its equations follows from the others: probabilities add up to 1
    return np.asarray(spsolve(sp.csc_array(balance), np.eye(len(k))[0]))


def tenths(up: int, down: int, length: int) -> Array:
    """Return the exact probability of each tenth of the range."""
    where = np.minimum(10 * np.arange(length + 1) // length, 9)
    return np.bincount(where, stationary(up, down, length))


def diffusion_mean(up: float, down: float) -> float:
    """Mean of the Fokker-Planck density exp(k w) on [0, 1], k = 2 drift / diffusion (derived)."""
    k = 2 * (up - down) / (up**2 + down**2)
    return 1 / (1 - math.exp(-k)) - 1 / k


def test_a_hard_bounded_weight_has_the_density_of_the_clipped_walk() -> None:
    """Steps of 0.02 up and 0.0225 down, 8 and 9 of 400: every tenth of the range, four standard
    errors over 100 inputs. Edges lie between lattice points, so that rounding moves no weight.
    Controls: a uniform density is out, and so are soft bounds (mu = 1).
    """
    size = {"inputs": 100, "pairs": 60_000, "left_out": 5_000}
    exact, found = tenths(8, 9, 400), walk(0.02, 0.0225, seed=32, **size)
    edges = np.linspace(0, 1, 11) - 1e-3
    edges[-1] = 1.1
    share = np.array([np.histogram(w, edges)[0] / len(w) for w in found])
    errors = share.std(axis=0, ddof=1) / math.sqrt(len(found))
    assert (np.abs(share.mean(axis=0) - exact) < 4 * errors).all()
    assert (np.abs(exact - 0.1) > 4 * errors).all()
    soft = walk(0.02, 0.0225, seed=32, mu=1.0, **size)
    assert abs(np.mean(soft < edges[1]) - exact[0]) > 4 * errors[0]


def test_with_small_steps_the_mean_between_hard_bounds_is_that_of_the_diffusion() -> None:
    """Steps of 0.005 and 0.00516, half a per cent of the range, k = -6.199: mean 0.1593 (derived);
    four standard errors, which are at most 4 % of it. The exact walk differs from the diffusion in
    proportion to the step: by half at 0.01 of what it is at 0.02. Control: an upward drift is out.
    """
    assert diffusion_mean(0.005, 0.00516) == pytest.approx(0.1593, abs=5e-5)
    apart = [
        stationary(up, down, n) @ np.arange(n + 1) / n - diffusion_mean(up / n, down / n)
        for up, down, n in ((8, 9, 400), (50, 53, 5000))
    ]
    assert apart[1] / apart[0] == pytest.approx(0.5, abs=0.1)
    found = walk(0.005, 0.00516, seed=33, inputs=50, pairs=200_000, left_out=40_000)
    mean, error = mean_and_error(found.mean(axis=1))
    assert error < 0.04 * mean
    assert abs(mean - diffusion_mean(0.005, 0.00516)) < 4 * error
    assert abs(mean - diffusion_mean(0.00516, 0.005)) > 4 * error
