"""The door `plastic.present`: what it refuses, what it keeps, and the mean of a random order."""

from __future__ import annotations

import math
from typing import Any

import numpy as np
import pytest

from plastic import present
from plastic.errors import Misfit
from plastic.rules.pair_timing import PairTiming
from plastic.rules.sliding_threshold import SlidingThreshold
from tests.engine.samples import Rated

PATTERNS = np.array([[4.0, 1.0, 0.0], [0.5, 3.0, 2.0]])
CHANCE = np.array([0.7, 0.3])
START = np.array([0.9, 1.1, 1.0])
RULE = SlidingThreshold.from_set("patterns", eta=1e-3, tau_theta=5)


def one_step(rule: SlidingThreshold, chance: np.ndarray) -> tuple[np.ndarray, float]:
    """Return the mean change of weights and threshold at one presentation, from the equations:
    dw = eta x y (y - theta), dtheta = (theta_rest + y^2/y_0 - theta) (1 - exp(-window/tau))."""
    y = PATTERNS @ START
    theta = rule.theta_rest
    each = rule.eta * PATTERNS * (y * (y - theta))[:, None]
    goal = rule.theta_rest + y**2 / rule.y_0
    moved = (goal - theta) * -math.expm1(-rule.window / rule.tau_theta)
    return chance @ each, float(chance @ moved)


@pytest.mark.parametrize(
    ("given", "said"),
    [
        ({"rule": PairTiming()}, "PairTiming on patterns: got a rule that reads spikes but"),
        ({"patterns": [1.0, 2.0]}, r"patterns: got an array of shape \(2,\) but expected finite"),
        ({"patterns": 3.0}, r"patterns: got an array of shape \(\)"),
        ({"patterns": []}, r"patterns: got an array of shape \(0,\)"),
        ({"patterns": [[1.0, math.nan]]}, "patterns: got an array"),
        ({"probabilities": [1.0]}, r"probabilities: got \[1\.\] but expected 2 numbers >= 0 that"),
        ({"probabilities": [0.5, 0.6]}, "probabilities: got .* that sum to 1"),
        ({"probabilities": [1.5, -0.5]}, "probabilities: got"),
        ({"probabilities": [0.5, math.nan]}, "probabilities: got"),
        ({"order": "shuffled"}, "order: got 'shuffled' but expected 'mean' or 'random'"),
        ({"start": [1.0, 1.0]}, r"start: got \[1\. 1\.\] but expected 3 finite weights"),
        ({"start": [1.0, 1.0, math.inf]}, "start: got .* finite weights"),
        ({"every": 0}, "every: got 0 but expected 1 or more presentations"),
    ],
    ids=lambda x: "-".join(map(str, x)) + str(*x.values()) if isinstance(x, dict) else "",
)
def test_what_does_not_fit_is_refused(given: dict[str, Any], said: str) -> None:
    whole: dict[str, Any] = {"rule": RULE, "patterns": PATTERNS, "presentations": 1, **given}
    with pytest.raises(Misfit, match=said):
        present(whole.pop("rule"), whole.pop("patterns"), **whole)


def test_everything_is_labelled_and_has_a_unit() -> None:
    data = present(RULE, PATTERNS, presentations=3)
    assert dict(data.sizes) == {"reading": 4, "input": 3, "pattern": 2}
    assert {name: (v.dims, v.attrs["units"]) for name, v in data.data_vars.items()} == {
        "weight": (("reading", "input"), "1"),
        "response": (("reading", "pattern"), "Hz"),
        "theta": (("reading",), "1"),
    }
    assert data.attrs["order"] == "mean"
    assert data.attrs["rule"].startswith("SlidingThreshold(eta=0.001, ")


def test_a_response_is_the_sum_of_weighted_rates() -> None:
    data = present(RULE, PATTERNS, presentations=20, start=START)
    assert data.weight[0].values.tolist() == START.tolist()
    np.testing.assert_allclose(data.response, data.weight.values @ PATTERNS.T, rtol=1e-14)
    assert np.ptp(data.response.values, axis=0).min() > 0


def test_a_mean_presentation_is_the_weighted_mean_of_all_patterns() -> None:
    """All patterns read one state; the threshold's change is that of the old threshold."""
    data = present(RULE, PATTERNS, probabilities=CHANCE, presentations=1, start=START)
    dw, dtheta = one_step(RULE, CHANCE)
    np.testing.assert_allclose(data.weight[1] - START, dw, rtol=1e-12)
    assert float(data.theta[1] - data.theta[0]) == pytest.approx(dtheta, rel=1e-12)


def test_patterns_are_equally_likely_unless_said() -> None:
    said = present(RULE, PATTERNS, probabilities=[0.5, 0.5], presentations=5)
    assert present(RULE, PATTERNS, presentations=5).equals(said)


@pytest.mark.parametrize("order", ["mean", "random"])
def test_weights_are_kept_after_every_so_many_presentations(order: str) -> None:
    whole = present(RULE, PATTERNS, presentations=10, order=order, seed=2)
    some = present(RULE, PATTERNS, presentations=10, order=order, seed=2, every=4)
    assert some.weight.values.tolist() == whole.weight.values[[0, 4, 8]].tolist()


def test_a_random_order_presents_one_pattern_each_time() -> None:
    """Every step is that of one pattern alone, and both occur."""
    data = present(RULE, PATTERNS, presentations=1, start=START, order="random", seed=0)
    alone = [one_step(RULE, chance)[0] for chance in np.eye(2)]
    seen = set()
    for seed in range(12):
        data = present(RULE, PATTERNS, presentations=1, start=START, order="random", seed=seed)
        change = data.weight.values[1] - START
        near = [np.allclose(change, one, rtol=1e-10) for one in alone]
        assert sum(near) == 1
        seen.add(near.index(True))
    assert seen == {0, 1}


def test_a_seed_repeats_its_order_and_another_does_not() -> None:
    def run(seed: int) -> list[float]:
        found = present(RULE, PATTERNS, presentations=30, order="random", seed=seed)
        return [float(v) for v in found.weight.values.ravel()]

    assert run(1) == run(1) != run(2)


def test_a_random_order_averages_to_the_mean() -> None:
    """One presentation, 1500 seeds: z of the mean change of every weight and of the threshold.
    Standard error: that of the sample. Control: the mean of other probabilities."""
    given = {"probabilities": CHANCE, "presentations": 1, "start": START, "order": "random"}
    runs = [present(RULE, PATTERNS, **given, seed=seed) for seed in range(1500)]
    weights = np.array([run.weight.values[1] - START for run in runs])
    thresholds = np.array([float(run.theta[1] - run.theta[0]) for run in runs])
    changes = np.column_stack([weights, thresholds])
    error = changes.std(axis=0) / math.sqrt(len(changes))

    def scores(chance: np.ndarray) -> np.ndarray:
        dw, dtheta = one_step(RULE, chance)
        return np.abs((changes.mean(axis=0) - [*dw, dtheta]) / error)

    assert scores(CHANCE).max() < 4
    assert scores(np.array([0.5, 0.5])).max() > 4


def test_bounds_hold_for_every_pattern() -> None:
    """Rated may at most double its weight; from 1.9 a strong pattern stops at 2."""
    data = present(Rated(eta=1.0), [[50.0, 0.0]], presentations=1, start=[1.9, 1.0])
    assert data.weight.values[-1].tolist() == [2.0, 1.0]


def test_a_state_of_the_cell_is_carried_on_and_one_of_an_input_is_not_shown() -> None:
    """Weights at rest: theta relaxes to the mean response y, y + (10 - y) exp(-3 * 40 / 500)."""
    data = present(Rated(eta=0.0), PATTERNS, presentations=3)
    y = float((PATTERNS @ np.ones(3)).mean())
    assert float(data.theta[-1]) == pytest.approx(y + (10 - y) * math.exp(-120 / 500), rel=1e-12)
    assert set(data) == {"weight", "response", "theta"}
