"""Poisson trains and the drift of a weight under them."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from plastic import Rule, impose

Array = NDArray[np.float64]

#: amplitudes are scaled by this, so that a long run stays far from the bounds; the rules tested
#: here are linear in their amplitudes, and the scale is divided out again
SMALL = 1e-6


def train(rate: float, duration: float, draw: np.random.Generator) -> Array:
    """Return the spikes of a Poisson train; rate in Hz, duration in ms."""
    spikes = draw.uniform(0, duration, draw.poisson(rate * duration / 1000))
    return np.unique(spikes)


def scaled(rule: Rule, by: float = SMALL) -> Rule:
    """Return the rule with every amplitude multiplied."""
    changed = {name: getattr(rule, name) * by for name in type(rule).amplitudes}
    return type(rule)(**{**rule.values, **changed})


def changes(
    rule: Rule, pre: float, post: float, *, runs: int, seconds: float, burn_in: float, seed: int
) -> Array:
    """Return the change of the weight in `runs` successive stretches of one long run.

    The stretches follow a burn-in (s) and are independent but for their edges, a part of
    tau / seconds of each. Independent Poisson trains of `pre` and `post` Hz.
    """
    draw = np.random.default_rng(seed)
    marks = 1000 * (burn_in + seconds * np.arange(runs + 1))
    trains = [train(rate, float(marks[-1]), draw) for rate in (pre, post)]
    return between(rule, *trains, marks)


def between(rule: Rule, pre: Array, post: Array, marks: Array) -> Array:
    """Return the change of the weight from each of `marks` (ms) to the next, on given trains."""
    return np.diff(impose(scaled(rule), pre, post, readings=marks).w.values[0]) / SMALL


def mean_and_error(values: Array) -> tuple[float, float]:
    """Return the mean and its standard error."""
    return float(values.mean()), float(values.std(ddof=1) / np.sqrt(len(values)))
