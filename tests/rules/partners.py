"""Who is paired with whom, by looking through whole trains: the slow road to a pair rule."""

from __future__ import annotations

import math
from collections.abc import Callable, Sequence

import numpy as np
import pytest

from plastic import Rule, impose

Times = Sequence[float]
#: lags (ms, positive) of the pairs that potentiate and of those that depress
Pairs = tuple[list[float], list[float]]

A_PLUS, A_MINUS, TAU_PLUS, TAU_MINUS = 0.01, 0.02, 20.0, 40.0


def all_to_all(pre: Times, post: Times) -> Pairs:
    """Pair every spike with every other."""
    return [b - a for a in pre for b in post if a < b], [a - b for a in pre for b in post if b < a]


def nearest(pre: Times, post: Times) -> Pairs:
    """Pair a spike with the last one of the other side before it."""
    return last_before(post, pre), last_before(pre, post)


def pre_centred(pre: Times, post: Times) -> Pairs:
    """Pair a presynaptic spike with the postsynaptic ones just before and just after it."""
    after = [min(b for b in post if b > a) - a for a in pre if any(b > a for b in post)]
    return after, last_before(pre, post)


def reduced(pre: Times, post: Times) -> Pairs:
    """Pair a spike with the last one of the other side, if none of its own is in between."""
    return neighbours(post, pre), neighbours(pre, post)


def last_before(these: Times, those: Times) -> list[float]:
    """Return how long ago the last one of `those` was at each of `these` that has one."""
    return [t - max(s for s in those if s < t) for t in these if any(s < t for s in those)]


def neighbours(these: Times, those: Times) -> list[float]:
    """Return how long ago the last one of `those` was, where none of `these` came since."""
    lags = [(t, t - max(s for s in those if s < t)) for t in these if any(s < t for s in those)]
    return [lag for t, lag in lags if not any(t - lag < other < t for other in these)]


def trains(seed: int, rate: float = 40.0, span: float = 400.0) -> tuple[Times, Times]:
    """Return two trains (ms) in which some spikes coincide and one side has runs of its own."""
    draw = np.random.default_rng(seed)
    pre, post = (draw.uniform(0, span, draw.poisson(rate * span / 1000)) for _ in range(2))
    pre = np.union1d(pre, post[::3])
    return pre.tolist(), np.unique(post).tolist()


def up(lag: float) -> float:
    """Return what one pair potentiates at a lag of so many ms, presynaptic first."""
    return A_PLUS * math.exp(-lag / TAU_PLUS)


def down(lag: float) -> float:
    """Return what one pair depresses at a lag of so many ms, postsynaptic first."""
    return A_MINUS * math.exp(-lag / TAU_MINUS)


def expected(pairing: Callable[[Times, Times], Pairs], pre: Times, post: Times) -> float:
    """Return the sum of the window over the pairs of a scheme."""
    after, before = pairing(pre, post)
    return sum(map(up, after)) - sum(map(down, before))


def change(rule: type[Rule], pre: Times, post: Times) -> float:
    """Return what the rule makes of the trains with the window above."""
    given = rule(a_plus=A_PLUS, a_minus=A_MINUS, tau_plus=TAU_PLUS, tau_minus=TAU_MINUS)
    return float(impose(given, pre, post, compiled=False).w[0, -1]) - 1


SCHEMES = {f.__name__: f for f in (all_to_all, nearest, pre_centred, reduced)}


def assert_only_scheme(rule: type[Rule], name: str, seed: int) -> None:
    """Assert that the rule pairs as the scheme `name` says and as no other does."""
    pre, post = trains(seed)
    found = change(rule, pre, post)
    assert found == pytest.approx(expected(SCHEMES[name], pre, post), rel=1e-11, abs=1e-14)
    for other in SCHEMES.keys() - {name}:
        assert abs(found - expected(SCHEMES[other], pre, post)) > 1e-4, other
