"""The power-law pair rule against its closed forms: fixed point, drift, relaxation, moments."""

from __future__ import annotations

import math

import numpy as np
import pytest

from plastic import impose
from plastic.rules.power_law_timing import PowerLawTiming
from tests.published.poisson import changes, mean_and_error, train

#: Morrison, Aertsen & Diesmann 2007, parameters from memory (mid); pA
PUBLISHED = {"lambda_": 0.1, "alpha": 0.11, "mu": 0.4, "tau_plus": 20.0, "tau_minus": 20.0}


def fixed_point(rule: PowerLawTiming) -> float:
    """w_0 (tau+ / (alpha tau-))^(1/(1-mu)), uncorrelated Poisson trains (derived); pA."""
    ratio = rule.tau_plus / (rule.alpha * rule.tau_minus)
    return float(rule.w_0 * ratio ** (1 / (1 - rule.mu)))


def drift(rule: PowerLawTiming, w: float, pre: float, post: float) -> float:
    """r_pre r_post lambda (w_0^(1-mu) w^mu tau+ - alpha w tau-), all-to-all (derived); pA/s."""
    up = rule.w_0 ** (1 - rule.mu) * w**rule.mu * rule.tau_plus
    return float(pre * post * rule.lambda_ * (up - rule.alpha * w * rule.tau_minus) / 1000)


@pytest.mark.parametrize("multiple", [0.5, 1.0, 2.0])
def test_the_drift_under_poisson_trains_is_the_closed_form(multiple: float) -> None:
    """12 and 20 Hz, at half, once and twice the fixed point of 39.5985 w_0; 300 stretches of 50 s,
    four standard errors. Control: away from the fixed point the drift is not zero."""
    w = multiple * fixed_point(PowerLawTiming(**PUBLISHED))
    assert w / multiple == pytest.approx(39.5985, abs=5e-5)
    rule = PowerLawTiming(**PUBLISHED, w_start=w)
    found = changes(rule, 12, 20, runs=300, seconds=50, burn_in=1, seed=41)
    mean, error = (value / 50 for value in mean_and_error(found))
    assert abs(mean - drift(rule, w, 12, 20)) < 4 * error
    assert (abs(mean) < 4 * error) == (multiple == 1)


def relaxed(rule: PowerLawTiming, at: np.ndarray, rate: float) -> np.ndarray:
    """Closed form of dw/dt = drift (derived): w^(1-mu) relaxes exponentially; `at` in ms."""
    share = 1 - rule.mu
    goal, start = fixed_point(rule) ** share, rule.w_start**share
    speed = share * rate * rate * rule.lambda_ * rule.alpha * rule.tau_minus / 1e6
    return np.asarray((goal + (start - goal) * np.exp(-speed * at)) ** (1 / share))


@pytest.mark.parametrize("start", [15.0, 80.0])
def test_the_weight_relaxes_to_the_fixed_point_as_the_closed_form_says(start: float) -> None:
    """100 Hz, lambda = 1e-4, 20 inputs, three relaxation times from below and from above: within
    1 % of the closed form all the way. Control: the linear rule (mu = 0) with the same fixed point
    passes elsewhere, by more than 2 %."""
    given = {**PUBLISHED, "lambda_": 1e-4, "w_start": start}
    rule, draw, end = PowerLawTiming(**given), np.random.default_rng(42), 225e3
    at = np.linspace(0, end, 16)
    pre = {str(k): train(100, end, draw) for k in range(20)}
    found = impose(rule, pre, train(100, end, draw), readings=at).w.values.mean(axis=0)
    np.testing.assert_allclose(found, relaxed(rule, at, 100), rtol=0.01)
    linear = PowerLawTiming(**{**given, "mu": 0.0, "w_0": fixed_point(rule) * 0.11})
    assert fixed_point(linear) == pytest.approx(fixed_point(rule))
    assert np.abs(found / relaxed(linear, at, 100) - 1).max() > 0.02


C_P, C_D, TAU, WIDEST, INPUTS = 1.0, 0.05, 20.0, 40.0, 300
#: mean of exp(-lag/tau) and of its square for lags uniform up to `WIDEST`
F1 = TAU / WIDEST * (1 - math.exp(-WIDEST / TAU))
F2 = TAU / (2 * WIDEST) * (1 - math.exp(-2 * WIDEST / TAU))


def random_pairs(start: float, after: np.ndarray, seed: int) -> np.ndarray:
    """Return weights (mu = 0), one row per input, `after` so many isolated pairs of random sign
    with lags uniform up to 40 ms."""
    rule = PowerLawTiming(
        lambda_=C_P, alpha=C_D / C_P, mu=0, tau_plus=TAU, tau_minus=TAU, w_start=start
    )
    draw, number = np.random.default_rng(seed), int(after[-1])
    post = 1000.0 * np.arange(1, number + 1)
    pre = {str(k): post - draw.uniform(-WIDEST, WIDEST, number) for k in range(INPUTS)}
    return np.asarray(impose(rule, pre, post, readings=after * 1000.0 + 500).w.values)


def mean_square(f1: float, f2: float) -> float:
    """Stationary E w^2 of the exact recursion under isolated pairs (derived and checked)."""
    return (2 * C_P * f1 * C_P / C_D + C_P**2 * f2) / (2 * C_D * f1 - C_D**2 * f2)


def test_constant_potentiation_with_proportional_depression_keeps_mean_and_variance() -> None:
    """van Rossum, Bi & Turrigiano 2000 without noise (form from memory, mid): mean c_p/c_d = 20,
    variance 11.5168 (derived and checked). 300 inputs, 10 000 pairs, four standard errors, which
    are at most 0.3 % and 1 %. Control: lags that were all the same, f2 = f1^2, are out."""
    found = random_pairs(C_P / C_D, np.arange(1000, 10_001, 20), seed=43)
    mean, error = mean_and_error(found.mean(axis=1))
    assert error < 0.003 * 20
    assert abs(mean - 20) < 4 * error
    assert mean_square(F1, F2) - 20**2 == pytest.approx(11.5168, abs=5e-5)
    spread, error = mean_and_error(((found - 20) ** 2).mean(axis=1))
    assert error < 0.01 * 11.5168
    assert abs(spread - 11.5168) < 4 * error
    assert abs(spread - (mean_square(F1, F1**2) - 20**2)) > 4 * error


def test_its_mean_forgets_the_start_by_one_factor_per_pair() -> None:
    """1 - c_d f1/2 per pair, exact (derived); 300 inputs from half the fixed point, four standard
    errors at every reading. Control: forgetting by c_d f1 per pair is out."""
    after = np.array([20, 50, 100, 150])
    found = random_pairs(10.0, after, seed=44)
    errors = found.std(axis=0, ddof=1) / math.sqrt(INPUTS)
    wanted, wrong = (20 - 10 * (1 - C_D * F1 * k) ** after for k in (0.5, 1.0))
    assert (np.abs(found.mean(axis=0) - wanted) < 4 * errors).all()
    assert (np.abs(found.mean(axis=0) - wrong) > 4 * errors).any()
