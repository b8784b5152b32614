"""The covariance rule against its closed forms: growth by a matrix exponential, and drift."""

from __future__ import annotations

import math

import numpy as np
import pytest
from scipy.integrate import solve_ivp
from scipy.linalg import expm

from plastic import present
from plastic.rules.covariance import Covariance
from tests.published.poisson import mean_and_error

PATTERNS = np.array([[5.0, 1, 2], [1, 4, 0], [2, 2, 6], [0, 3, 1]])
CHANCE = np.array([0.4, 0.3, 0.2, 0.1])
START = np.array([0.3, -0.1, 0.2])
FORMS = {"both": (1.0, 1.0), "active_inputs": (0.0, 1.0), "active_cell": (1.0, 0.0)}
every_form = pytest.mark.parametrize("form", FORMS)


def rule_of(form: str, **given: float) -> Covariance:
    x, y = FORMS[form]
    return Covariance.from_set("patterns", centre_x=x, centre_y=y, **given)


def covariance() -> np.ndarray:
    """Return the covariance of the inputs, by numpy."""
    return np.cov(PATTERNS.T, aweights=CHANCE, bias=True)


def field(rule: Covariance, weights: np.ndarray) -> np.ndarray:
    """Return the mean change per presentation over eta, of a linear cell with exact averages."""
    x_mean = CHANCE @ PATTERNS
    total = np.zeros(len(weights))
    for rates, p in zip(PATTERNS, CHANCE, strict=True):
        given = {"post_rate": float(weights @ rates), "y_mean": float(weights @ x_mean)}
        total += [
            p * rule.at_presentation(float(x), x_mean=float(m), **given)["w"]
            for x, m in zip(rates, x_mean, strict=True)
        ]
    return total / rule.eta


@every_form
def test_every_form_drifts_by_the_covariance_when_averages_are_exact(form: str) -> None:
    """Sejnowski 1977 (forms from memory, high; the equality derived): the mean is eta C w."""
    np.testing.assert_allclose(
        field(rule_of(form), START), covariance() @ START, rtol=1e-12, atol=1e-14
    )


def test_without_any_average_it_is_the_plain_product_of_rates() -> None:
    """The control of the law above: E[x x'] w, which is not C w."""
    plain = field(Covariance.from_set("patterns", centre_x=0, centre_y=0), START)
    moments = covariance() + np.outer(CHANCE @ PATTERNS, CHANCE @ PATTERNS)
    np.testing.assert_allclose(plain, moments @ START, rtol=1e-12)
    assert np.abs(plain - covariance() @ START).max() > 0.1


@every_form
def test_a_linear_cell_grows_by_the_matrix_exponential(form: str) -> None:
    """w(t) = e^(C t) w(0) (derived); the averaged rule is integrated to 1e-11."""
    rule, end = rule_of(form), 0.8
    found = solve_ivp(
        lambda _, w: field(rule, w), (0, end), START, method="DOP853", rtol=1e-11, atol=1e-13
    )
    np.testing.assert_allclose(found.y[:, -1], expm(end * covariance()) @ START, rtol=1e-9)


def test_presented_patterns_of_mean_zero_grow_step_by_step_to_the_exponential() -> None:
    """The door `present`: k presentations are (1 + eta C)^k, which nears e^(k eta C) as eta falls;
    the gap halves with eta (derived). The average of the cell stays at its rest, 0."""
    centred = PATTERNS - CHANCE @ PATTERNS
    gaps = []
    for eta, k in ((2e-3, 200), (1e-3, 400)):
        found = present(
            Covariance.from_set("patterns", eta=eta),
            centred,
            probabilities=CHANCE,
            presentations=k,
            start=START,
            every=k,
        )
        end = found.weight.values[-1]
        exact = np.linalg.matrix_power(np.eye(3) + eta * covariance(), k) @ START
        np.testing.assert_allclose(end, exact, rtol=1e-10)
        assert float(abs(found.y_mean).max()) < 1e-12
        gaps.append(np.abs(end - expm(k * eta * covariance()) @ START).max())
    assert gaps[0] / gaps[1] == pytest.approx(2, rel=0.05)


LEARNERS, PRESENTATIONS, BURN_IN = 2000, 300, 60
MEMORY = 3.0  # of the averages, in presentations


def drift(rule: Covariance, correlation: float, seed: int) -> tuple[float, float]:
    """Return the mean change per presentation over eta, and its standard error over learners.

    Normal rates of mean 5 and 8 Hz, SD 2 and 3 Hz; the averages are the rule's own.
    """
    draw = np.random.default_rng(seed)
    x_mean, y_mean, total = np.full(LEARNERS, 5.0), np.full(LEARNERS, 8.0), np.zeros(LEARNERS)
    for k in range(BURN_IN + PRESENTATIONS):
        a, b = draw.normal(size=(2, LEARNERS))
        x, y = 5 + 2 * a, 8 + 3 * (correlation * a + math.sqrt(1 - correlation**2) * b)
        change = rule.at_presentation(x, y, x_mean=x_mean, y_mean=y_mean)  # type: ignore[arg-type]
        total += change["w"] * (k >= BURN_IN)
        x_mean = x_mean + change["x_mean"]
        y_mean = y_mean + rule.cell_at_presentation(y, y_mean)["y_mean"]  # type: ignore[arg-type]
    return mean_and_error(total / (PRESENTATIONS * rule.eta))


def expected(form: str, correlation: float) -> float:
    """Cov(x, y), and 2 / (2 - m) of it when both averages carry the noise of the same
    presentations, each of which moves them by m = 1 - e^(-1/memory) (derived)."""
    m = -math.expm1(-1 / MEMORY)
    return correlation * 2 * 3 * (2 / (2 - m) if FORMS[form] == (1, 1) else 1.0)


@every_form
@pytest.mark.parametrize("correlation", [0.0, 0.6])
def test_the_drift_is_the_covariance_whatever_the_means(form: str, correlation: float) -> None:
    """2000 learners of 300 presentations, standard error over learners, 4 of them allowed. With a
    memory of 3 presentations the default form is 1.165 times the covariance.

    Controls: with the noise of the averages ascribed to the wrong forms, and without averages
    (E[x y], 40 more), the drift is more than 4 away."""
    rule = rule_of(form, tau_mean=MEMORY)
    mean, error = drift(rule, correlation, seed=7)
    assert abs(mean - expected(form, correlation)) < 4 * error
    assert abs(mean - expected(form, correlation) - 40) > 4 * error
    swapped = expected("both" if form != "both" else "active_cell", correlation)
    assert (abs(mean - swapped) > 4 * error) == (correlation > 0)
