"""Protocols that several tests use."""

from __future__ import annotations

from typing import Any

from hypothesis import strategies as st

from plastic.protocols import Schedule
from plastic.protocols.pairing import Pairing

BURSTS = {
    "pattern": {"far": ["0 ms"], "near": ["10 ms", "20 ms", "30 ms"]},
    "repeat": {"times": 3, "every": "10 s"},
    "baseline": "2 min",
    "follow_up": "1 min",
    "test": {"inputs": ["far", "near"], "every": "30 s"},
}


def bursts(**changed: Any) -> Schedule:
    """Return the schedule of BURSTS with some keys changed; far learns."""
    return Pairing.model_validate({**BURSTS, **changed}).schedule("bursts", learns=["far"])


@st.composite
def patterns(draw: st.DrawFn) -> dict[str, list[float]]:
    """Draw times (ms) of two inputs within half a second, each on a grid of 0.5 ms."""
    times = st.lists(st.integers(0, 1000), min_size=1, max_size=6, unique=True)
    return {name: [t / 2 for t in sorted(draw(times))] for name in ("far", "near")}


def written(pattern: dict[str, list[float]]) -> dict[str, list[str]]:
    """Return a pattern as a study writes it."""
    return {name: [f"{t} ms" for t in times] for name, times in pattern.items()}
