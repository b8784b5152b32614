"""Drift of a pair rule under independent Poisson trains, for each scheme of pairing.

Derived and checked by an independent simulation. Time constants in ms, rates in Hz, drift in 1/s.
"""

from __future__ import annotations

from collections.abc import Callable

import numpy as np
from numpy.typing import NDArray

from plastic import Rule
from tests.published.poisson import changes, mean_and_error

Array = NDArray[np.float64]

#: Izhikevich & Desai 2003 (Neural Comput 15:1511), amplitudes of a whole protocol; from memory
A_PLUS, A_MINUS, TAU_PLUS, TAU_MINUS = 1.03, 0.51, 14.0, 34.0
#: the amplitudes that the rules are given; their changes are multiplied by 60 again
PAIRS = 60
RUNS, SECONDS = 400, 50.0


def all_to_all(pre: float, post: float) -> float:
    """Kempter, Gerstner & van Hemmen 1999."""
    return pre * post * (A_PLUS * TAU_PLUS - A_MINUS * TAU_MINUS) / 1000


def nearest(pre: float, post: float) -> float:
    """Symmetric: a spike with the last one of the other side."""
    up, down = A_PLUS / (pre + 1000 / TAU_PLUS), A_MINUS / (post + 1000 / TAU_MINUS)
    return pre * post * (up - down)


def pre_centred(pre: float, post: float) -> float:
    """Izhikevich & Desai 2003: a presynaptic spike with the two postsynaptic ones around it."""
    up, down = A_PLUS / (post + 1000 / TAU_PLUS), A_MINUS / (post + 1000 / TAU_MINUS)
    return pre * post * (up - down)


def reduced(pre: float, post: float) -> float:
    """Reduced symmetric: immediate neighbours in the merged train."""
    both = pre + post
    return pre * post * (A_PLUS / (both + 1000 / TAU_PLUS) - A_MINUS / (both + 1000 / TAU_MINUS))


DRIFTS: dict[str, Callable[[float, float], float]] = {
    f.__name__: f for f in (all_to_all, nearest, pre_centred, reduced)
}


def measured(rule: type[Rule], pre: float, post: float, seed: int) -> tuple[float, float]:
    """Return drift and its standard error (1/s) over 400 stretches of 50 s."""
    given = rule(
        a_plus=A_PLUS / PAIRS, a_minus=A_MINUS / PAIRS, tau_plus=TAU_PLUS, tau_minus=TAU_MINUS
    )
    found = changes(given, pre, post, runs=RUNS, seconds=SECONDS, burn_in=1, seed=seed)
    mean, error = mean_and_error(PAIRS * found)
    return mean / SECONDS, error / SECONDS


def assert_drifts_as(rule: type[Rule], name: str, seed: int) -> None:
    """Assert that at 12 and 20 Hz the drift is within four standard errors of the scheme `name`,
    and of no other scheme."""
    mean, error = measured(rule, 12, 20, seed)
    apart = {other: abs(mean - drift(12, 20)) / error for other, drift in DRIFTS.items()}
    assert apart.pop(name) < 4
    assert min(apart.values()) > 4, apart
