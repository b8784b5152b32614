"""The sliding threshold against Intrator & Cooper 1992: fixed points, energy, stability."""

from __future__ import annotations

import itertools

import numpy as np
import pytest
from scipy.optimize import brentq

from plastic import impose, present
from plastic.rules.pair_timing import PairTiming
from plastic.rules.sliding_threshold import SlidingThreshold

PATTERNS = np.array([[1, 0.2, 0.1], [0.3, 1, 0.2], [0.1, 0.4, 1]])
CHANCE = np.array([0.5, 0.3, 0.2])
SELECTIVE = np.diag(1 / CHANCE)
FAST = SlidingThreshold.from_set("patterns", eta=0.04, tau_theta=2.5)


def field(
    rule: SlidingThreshold, weights: np.ndarray, theta: float, *mix: np.ndarray
) -> np.ndarray:
    """Return the averaged change of (weights, theta) per presentation, from the rule's hooks."""
    patterns, chance = mix or (PATTERNS, CHANCE)
    total = np.zeros(len(weights) + 1)
    for x, p in zip(patterns, chance, strict=True):
        y = float(weights @ x)
        total[:-1] += [p * rule.at_presentation(float(rate), y, theta)["w"] for rate in x]
        total[-1] += p * rule.cell_at_presentation(y, theta)["theta"]
    return total


def jacobian(
    rule: SlidingThreshold, weights: np.ndarray, theta: float, *mix: np.ndarray
) -> np.ndarray:
    """Return the derivative of `field` by central differences (exact but for rounding: the field is
    a polynomial of third degree, whose error here is 1e-8 of its curvature)."""
    at, step = np.append(weights, theta), 1e-4
    columns = []
    for k in range(len(at)):
        ahead, behind = at.copy(), at.copy()
        ahead[k] += step
        behind[k] -= step
        difference = field(rule, ahead[:-1], ahead[-1], *mix) - field(
            rule, behind[:-1], behind[-1], *mix
        )
        columns.append(difference / (2 * step))
    return np.array(columns).T


def state_of(subset: tuple[int, ...]) -> tuple[np.ndarray, float]:
    """Return weights and threshold of the fixed point that answers the patterns in `subset`."""
    theta = 1 / CHANCE[list(subset)].sum() if subset else 0.0
    answers = np.array([theta if k in subset else 0.0 for k in range(3)])
    return np.linalg.solve(PATTERNS, answers), theta


SUBSETS = [s for size in range(4) for s in itertools.combinations(range(3), size)]


@pytest.mark.parametrize("start", [(0.3, 0.2, 0.1), (0.05, 0.6, 0.1), (0.02, 0.1, 0.9)])
def test_every_start_ends_at_an_answer_to_one_pattern(start: tuple[float, ...]) -> None:
    """Responses (2, 0, 0), (0, 10/3, 0) or (0, 0, 5): y_k = 1 / p_k; derived and checked."""
    found = present(
        FAST, PATTERNS, probabilities=CHANCE, presentations=3500, start=start, every=3500
    )
    answer = found.response.values[-1]
    assert min(np.abs(answer - state).max() for state in SELECTIVE) < 1e-8
    assert float(found.theta[-1]) == pytest.approx(answer.max(), abs=1e-8)


def test_the_three_answers_are_all_reached() -> None:
    """The test above proves little if every start ended at the same pattern."""
    ends = set()
    for start in ((0.3, 0.2, 0.1), (0.05, 0.6, 0.1), (0.02, 0.1, 0.9)):
        found = present(
            FAST, PATTERNS, probabilities=CHANCE, presentations=800, start=start, every=800
        )
        ends.add(int(found.response.values[-1].argmax()))
    assert ends == {0, 1, 2}


@pytest.mark.parametrize("subset", SUBSETS, ids=str)
def test_any_subset_of_patterns_has_a_fixed_point(subset: tuple[int, ...]) -> None:
    """2^K fixed points: theta = 1 / sum of the subset's probabilities (derived)."""
    rule = SlidingThreshold.from_set("patterns", eta=1)
    np.testing.assert_allclose(field(rule, *state_of(subset)), 0, atol=1e-12)


@pytest.mark.parametrize("subset", [s for s in SUBSETS if s], ids=str)
def test_only_an_answer_to_one_pattern_is_stable(subset: tuple[int, ...]) -> None:
    """A mixture of m patterns has at least m - 1 growing directions (derived)."""
    rule = SlidingThreshold.from_set("patterns", eta=1e-3, tau_theta=1)
    growing = (np.linalg.eigvals(jacobian(rule, *state_of(subset))).real > 1e-9).sum()
    assert growing >= len(subset) - 1
    assert (growing == 0) == (len(subset) == 1)


@pytest.mark.parametrize("k", range(3))
def test_unit_patterns_relax_at_the_derived_rates(k: int) -> None:
    """Orthonormal patterns, fast threshold: eigenvalues -p_j / p_k and -1 (derived)."""
    eta = 1e-4
    rule = SlidingThreshold.from_set("patterns", eta=eta, tau_theta=1e-3)
    mix = (np.eye(3), CHANCE)
    slow = np.linalg.eigvals(jacobian(rule, SELECTIVE[k], 1 / CHANCE[k], *mix))
    rates = np.sort(slow.real[np.abs(slow) < 0.5]) / eta
    derived = np.sort([-1.0, *(-CHANCE[j] / CHANCE[k] for j in range(3) if j != k)])
    np.testing.assert_allclose(rates, derived, rtol=1e-2)


def energy(answers: np.ndarray) -> np.ndarray:
    """R = E[y^3] / 3 - (E[y^2])^2 / 4, whose gradient the weights climb (derived)."""
    return (answers**3 @ CHANCE) / 3 - (answers**2 @ CHANCE) ** 2 / 4


@pytest.mark.parametrize("start", [(0.3, 0.2, 0.1), (0.05, 0.6, 0.1), (0.02, 0.1, 0.9)])
def test_the_energy_never_falls_and_ends_at_its_peak(start: tuple[float, ...]) -> None:
    """With a fast threshold; at the end R = 1 / (12 p_k^2). Control: a slow threshold does fall."""
    rule = SlidingThreshold.from_set("patterns", eta=0.01, tau_theta=1e-3)
    found = present(rule, PATTERNS, probabilities=CHANCE, presentations=6000, start=start)
    climbed = energy(found.response.values[1:])
    assert np.diff(climbed).min() > -1e-12
    assert climbed[-1] == pytest.approx(1 / (12 * CHANCE[found.response.values[-1].argmax()] ** 2))
    slow = SlidingThreshold.from_set("patterns", eta=0.01, tau_theta=200)
    lost = present(slow, PATTERNS, probabilities=CHANCE, presentations=2000, start=start)
    assert np.diff(energy(lost.response.values)).min() < -1e-3


@pytest.mark.parametrize(
    ("gram", "rho", "critical", "omega"),
    [
        ((1, 0, 1), 0.5, 1.0, 1.0),
        ((1, 0.5, 1), 0.5, 4 / 3, 0.86603),
        ((1, 0.5, 1), 0.3, 1.414622, 0.77868),
        ((1, 0.8, 1), 0.6, 1.883505, 0.80304),
        ((2, 0.5, 1), 0.5, 0.540065, 1.95061),
    ],
    ids=str,
)
def test_a_slow_threshold_oscillates_beyond_the_derived_ratio(
    gram: tuple[float, float, float], rho: float, critical: float, omega: float
) -> None:
    """Own algebra, checked against eigenvalues, after the idea of Udeigwe, Munro & Ermentrout 2017
    (abstract looked up). The ratio is tau_theta / tau_w; omega in units of 1 / tau_w."""
    a, b, c = gram
    patterns = np.linalg.cholesky(np.array([[a, b], [b, c]]))
    mix, answer = (patterns, np.array([rho, 1 - rho])), np.array([1 / rho, 0.0])
    weights, eta = np.linalg.solve(patterns, answer), 1e-6

    def eigenvalues(ratio: float) -> np.ndarray:
        rule = SlidingThreshold.from_set("patterns", eta=eta, tau_theta=ratio / eta)
        return np.linalg.eigvals(jacobian(rule, weights, 1 / rho, *mix)) / eta

    found = brentq(lambda ratio: eigenvalues(ratio).real.max(), 0.7 * critical, 1.3 * critical)
    assert found == pytest.approx(critical, rel=1e-5)
    assert np.abs(eigenvalues(found).imag).max() == pytest.approx(omega, rel=1e-4)
    assert eigenvalues(0.9 * critical).real.max() < 0 < eigenvalues(1.1 * critical).real.max()


def test_patterns_in_random_order_reach_the_same_answer() -> None:
    """Small steps: the mean answer is within 2 % of 1 / p_k (derived). Its standard error, from six
    seeds, is 0.6 %. Control: the first presentations are not there yet."""
    rule = SlidingThreshold.from_set("patterns", eta=0.004, tau_theta=25)
    found = present(
        rule,
        PATTERNS,
        probabilities=CHANCE,
        presentations=30_000,
        start=(0.3, 0.2, 0.1),
        order="random",
        seed=4,
        every=10,
    )
    answer = found.response.values[-2400:].mean(axis=0)
    end = SELECTIVE[answer.argmax()]
    assert np.abs(answer - end).max() < 0.02 * end.max()
    assert np.abs(found.response.values[:50].mean(axis=0) - end).max() > 0.02 * end.max()


def test_the_threshold_survives_ten_silent_minutes_on_spikes() -> None:
    """Compiled, on spike times; `theta_rest` is ours. Control: without it the threshold is gone."""
    silent, burst = 600_000.0, np.array([10.0, 20.0, 30.0])
    times = {"pre": [0.0, silent], "post": [*burst, *(silent + burst)]}
    for rest, kept in ((10.0, True), (0.0, False)):
        found = impose(SlidingThreshold(theta_rest=rest), **times, readings=[200, silent])
        assert (float(found.theta[1]) > 0.99 * 10) == kept
        assert (float(found.theta[1]) < 1e-3 * float(found.theta[0])) != kept


def test_it_is_blind_to_the_order_of_spikes_and_the_pair_rule_is_not() -> None:
    forward, backward = ([0.0], [10.0, 20.0]), ([20.0], [0.0, 10.0])
    for rule, blind in ((SlidingThreshold(), True), (PairTiming(), False)):
        changes = [float(impose(rule, *times).factor[0, -1]) for times in (forward, backward)]
        assert (changes[0] == changes[1]) == blind
        assert changes[0] != 1.0
