"""Oja's rule against its closed solution, its misalignment, and the components of an EEG."""

from __future__ import annotations

import math

import numpy as np
import pytest
from matplotlib.cbook import get_sample_data
from scipy.integrate import solve_ivp
from scipy.linalg import expm

from plastic import present
from plastic.rules.covariance import Covariance
from plastic.rules.principal_component import PrincipalComponent

OJA = PrincipalComponent.from_set("patterns")
#: patterns of mean zero, every one with its negative
HALF = np.array([[2.0, 1, 0], [0.5, -1, 1], [1, 0.3, -0.8], [0.2, 0.4, 0.9]])
PATTERNS = np.concatenate([HALF, -HALF])
MIXING = HALF.T @ HALF / len(HALF)  # the covariance of the inputs
VALUES, VECTORS = (part[..., ::-1] for part in np.linalg.eigh(MIXING))


def field(weights: np.ndarray) -> np.ndarray:
    """Return the mean change per presentation over eta, of a linear cell."""
    total = np.zeros(len(weights))
    for rates in PATTERNS:
        y = float(weights @ rates)
        total += [
            OJA.at_presentation(float(x), y, float(w))["w"]
            for x, w in zip(rates, weights, strict=True)
        ]
    return total / (len(PATTERNS) * OJA.eta)


def solution(start: np.ndarray, t: float) -> np.ndarray:
    """w(t) = e^(Ct) w0 / sqrt(1 - |w0|^2 + w0' e^(2Ct) w0) (derived, checked against the ODE)."""
    grown = expm(t * MIXING) @ start
    return grown / math.sqrt(1 - start @ start + grown @ grown)


@pytest.mark.parametrize("start", [(0.1, 0.05, -0.2), (0.0, 0.6, 0.8), (1.5, -2.0, 0.3)], ids=str)
@pytest.mark.parametrize("t", [0.3, 2.0, 6.0])
def test_the_averaged_rule_follows_its_closed_solution(start: tuple[float, ...], t: float) -> None:
    """Oja 1982: short, unit and long starts; integrated to 1e-12."""
    found = solve_ivp(lambda _, w: field(w), (0, t), start, method="DOP853", rtol=1e-12, atol=1e-13)
    np.testing.assert_allclose(found.y[:, -1], solution(np.array(start), t), rtol=1e-9, atol=1e-10)


def test_the_first_component_is_approached_at_the_derived_rates() -> None:
    """At the first eigenvector: -2 lambda_1 along it, -(lambda_1 - lambda_j) across (derived).
    Every other eigenvector is a fixed point that grows towards a larger one."""
    step = 1e-5
    for k in range(3):
        at = VECTORS[:, k]
        np.testing.assert_allclose(field(at), 0, atol=1e-12)
        slope = np.array([field(at + d) - field(at - d) for d in step * np.eye(3)]).T / (2 * step)
        derived = [VALUES[j] - VALUES[k] if j != k else -2 * VALUES[k] for j in range(3)]
        found = np.sort(np.linalg.eigvals(slope).real)
        np.testing.assert_allclose(found, np.sort(derived), rtol=1e-6)
        assert (found.max() < 0) == (k == 0)


LAMBDAS, ETA, LEARNERS = np.array([3.0, 1.5, 0.7]), 2e-3, 6000


def test_constant_steps_leave_the_derived_misalignment() -> None:
    """Gaussian inputs of variances 3, 1.5, 0.7 and eta = 0.002: E[w_j^2] = eta l_1 l_j /
    (2 (l_1 - l_j)) = 0.003000, 0.000913 (derived). 6000 learners run for six times the slowest
    relaxation; standard error over learners, 4 of them allowed, and O(eta) of the value on top.

    Control: with half or twice the step the misalignment is more than 4 errors away.
    """
    rule, draw = PrincipalComponent.from_set("patterns", eta=ETA), np.random.default_rng(3)
    w = np.zeros((3, LEARNERS))
    w[0] = 1
    spread = np.sqrt(LAMBDAS)[:, None]
    for _ in range(2000):
        x = draw.standard_normal(size=(3, LEARNERS)) * spread
        y = (w * x).sum(axis=0)
        w += rule.at_presentation(x, y, w)["w"]  # type: ignore[arg-type]
    squares = w[1:] ** 2
    mean, error = squares.mean(axis=1), squares.std(axis=1, ddof=1) / math.sqrt(LEARNERS)
    derived = ETA * LAMBDAS[0] * LAMBDAS[1:] / (2 * (LAMBDAS[0] - LAMBDAS[1:]))
    np.testing.assert_allclose(derived, [0.003000, 0.000913], atol=5e-7)  # as printed
    assert (np.abs(mean - derived) < 4 * error + ETA * LAMBDAS[0] * derived).all()
    for wrong in (0.5, 2.0):
        assert (np.abs(mean - wrong * derived) > 4 * error).all()


@pytest.fixture(scope="module")
def eeg() -> np.ndarray:
    """Return every tenth of 800 samples of a four-channel EEG that matplotlib ships, centred."""
    samples = np.fromfile(get_sample_data("eeg.dat", asfileobj=False)).reshape(800, 4)[::10]
    return samples - samples.mean(axis=0)


def components(samples: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
    """Return principal components as rows, and their variances, by numpy."""
    _, s, rows = np.linalg.svd(samples, full_matrices=False)
    return rows, s**2 / len(samples)


def learned(samples: np.ndarray, presentations: int) -> np.ndarray:
    """Return the weights after the averaged patterns were presented so many times."""
    rule = PrincipalComponent.from_set("patterns", eta=0.4)
    found = present(
        rule, samples, presentations=presentations, start=[0.4, -0.3, 0.2, 0.1], every=presentations
    )
    return found.weight.values[-1]


def test_it_finds_the_first_component_of_an_eeg(eeg: np.ndarray) -> None:
    """The reference is a singular value decomposition. Length 1, variance lambda_1.

    Control: the covariance rule on the same patterns keeps no length.
    """
    rows, variances = components(eeg)
    w = learned(eeg, 150)
    np.testing.assert_allclose(w * np.sign(w @ rows[0]), rows[0], atol=1e-6)
    assert np.mean((eeg @ w) ** 2) == pytest.approx(variances[0], rel=1e-9)
    hebb = present(Covariance.from_set("patterns", eta=0.4), eeg, presentations=8, every=8)
    assert np.linalg.norm(hebb.weight.values[-1]) > 10


def test_what_a_component_leaves_has_the_next_one(eeg: np.ndarray) -> None:
    """The fixed points of Sanger 1989, one after the other: each output sees what the earlier ones
    leave of a pattern. Rows are orthonormal and in order."""
    rows, _ = components(eeg)
    left, found = eeg.copy(), []
    for _ in range(3):
        w = learned(left, 300)
        found.append(w)
        left -= np.outer(left @ w, w)
    aligned = np.array(found) * np.sign((np.array(found) * rows[:3]).sum(axis=1))[:, None]
    np.testing.assert_allclose(aligned, rows[:3], atol=1e-5)
    np.testing.assert_allclose(aligned @ aligned.T, np.eye(3), atol=1e-5)
