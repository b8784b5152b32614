"""Routes and cells with one fault each."""

from __future__ import annotations

from typing import Any

import numpy as np
from numpy.typing import ArrayLike, NDArray

from plastic.parameters import parameter
from plastic.routes._interface import Route

Floats = NDArray[np.float64]


class Plain(Route):
    """A route without a fault."""

    highest: float = parameter(4.0, "1", low=1, high=100, source="invented")
    target = "quantum"
    evidence = "hypothesis"


def route(fault: str, multiple: Any = None, **body: Any) -> type[Route]:
    """Return a route with another map, or with other words."""
    own: dict[str, Any] = {
        "highest": parameter(4.0, "1", low=1, high=100, source="invented"),
        "target": "quantum",
        "evidence": "hypothesis",
        **({"multiple": multiple} if multiple else {}),
        **body,
    }
    return type(fault, (Route,), {"__module__": __name__, "__doc__": f"{fault}.", **own})


def off_by_a_percent(self: Route, factor: ArrayLike, share: float = 1.0) -> Floats:
    return np.clip(1.01 * np.asarray(factor, float) ** share, self.lowest, self.highest)


def turning(self: Route, factor: ArrayLike, share: float = 1.0) -> Floats:
    value = np.asarray(factor, float)
    return np.clip(value * np.maximum(2.0 - value, 0.0), self.lowest, self.highest)


def constant(self: Route, factor: ArrayLike, share: float = 1.0) -> Floats:
    return np.ones_like(np.asarray(factor, float))


def unlimited(self: Route, factor: ArrayLike, share: float = 1.0) -> Floats:
    return np.asarray(np.asarray(factor, float) ** share)


def dividing(self: Route, factor: ArrayLike, share: float = 1.0) -> Floats:
    with np.errstate(divide="ignore", over="ignore"):
        return np.asarray(2.0 - np.asarray(factor, float) ** -share)


def linear(self: Route, factor: ArrayLike, share: float = 1.0) -> Floats:
    value = 1.0 + share * (np.asarray(factor, float) - 1.0)
    return np.clip(value, self.lowest, self.highest)
