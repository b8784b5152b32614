"""Published pairing data and the spike trains they were fitted on."""

from __future__ import annotations

from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from plastic import Rule, impose

Array = NDArray[np.float64]
RATES = (0.1, 10.0, 20.0, 40.0, 50.0)  # Hz


class Point(NamedTuple):
    """One row of a table of the literature: lag ms, rate Hz, fractional change and its SEM."""

    lag: float
    rate: float
    mean: float
    sem: float


#: Sjostrom, Turrigiano & Nelson 2001 (Neuron 32:1149) as tabulated by Pfister & Gerstner 2006;
#: numbers from memory (high; the last two SEMs of each row mid), corroborated by the error E
SJOSTROM = [
    *map(Point, [10.0] * 5, RATES, (-0.04, 0.14, 0.29, 0.53, 0.56), (0.05, 0.10, 0.14, 0.11, 0.26)),
    *map(
        Point, [-10.0] * 5, RATES, (-0.29, -0.41, -0.34, 0.56, 0.75), (0.08, 0.11, 0.10, 0.32, 0.19)
    ),
]

#: Wang, Gerkin, Nauen & Bi 2005 (Nat Neurosci 8:187), from memory (high): the spikes of one
#: repetition, as (presynaptic, postsynaptic) times in ms
WANG = {
    "pair +10": ([0], [10]),
    "pair -10": ([0], [-10]),
    "pre-post-pre (5, -5)": ([-5, 5], [0]),
    "pre-post-pre (10, -10)": ([-10, 10], [0]),
    "pre-post-pre (15, -5)": ([-15, 5], [0]),
    "pre-post-pre (5, -15)": ([-5, 15], [0]),
    "post-pre-post (-5, 5)": ([0], [-5, 5]),
    "post-pre-post (-10, 10)": ([0], [-10, 10]),
    "post-pre-post (-5, 15)": ([0], [-5, 15]),
    "post-pre-post (-15, 5)": ([0], [-15, 5]),
}


def pairs(lag: float, rate: float, number: int = 60) -> tuple[Array, Array]:
    """Return `number` continuous pairs, the schedule of the published fits; ms."""
    pre = 100 + 1000 / rate * np.arange(number)
    return pre, pre + lag


def repeated(pre: list[float], post: list[float], number: int = 60) -> tuple[Array, Array]:
    """Return `number` repetitions of a pattern at 1 Hz; ms."""
    starts = 100 + 1000.0 * np.arange(number)[:, None]
    return (starts + np.array(pre)).ravel(), (starts + np.array(post)).ravel()


def change(rule: Rule, pre: Array, post: Array) -> float:
    """Return the fractional change of the weight."""
    return float(impose(rule, pre, post, compiled=False).w[0, -1]) - 1


def misfit(found: Array) -> float:
    """Return E = mean of ((model - data) / SEM)^2 over the ten points of `SJOSTROM`."""
    mean, sem = (np.array([getattr(p, name) for p in SJOSTROM]) for name in ("mean", "sem"))
    return float(np.mean(((found - mean) / sem) ** 2))
