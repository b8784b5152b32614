"""How to add a route: a route is data.

A channel of expression is one class in one file that says which physical variable of an input (or
of its dendrite) the rule's factor moves, by which map, how late and how fast, up to what limit, and
how good the evidence is. The engine knows the closed list of physical variables in `TARGETS`;
nothing is compiled per route.

    power    value = base * factor ** (sign * share), within [lowest, highest] times the base
    excess   value = base * max(0, factor ** share - 1)

Both are defined at, above and below factor 1 and from a zero baseline. A release probability is
bounded by the ``highest`` of the input's release instead of a multiple.
"""

from __future__ import annotations

import inspect
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from typing import ClassVar, Literal

import numpy as np
from numpy.typing import ArrayLike, NDArray

from plastic.errors import Misfit
from plastic.parameters import Parametrised, parameter

Target = Literal["probability", "quantum", "sites", "neck", "added_sites", "diameter", "inhibition"]

#: the physical variables a factor may move; the order is the engine's code for them
TARGETS: tuple[Target, ...] = (
    "probability",
    "quantum",
    "sites",
    "neck",
    "added_sites",
    "diameter",
    "inhibition",
)


class Route(Parametrised):
    """Base of every channel of expression; see the manual at the top of this module."""

    delay: float = parameter(0.0, "ms", low=0, source="ours")
    tau: float = parameter(0.0, "ms", low=0, source="ours")
    lowest: float = parameter(0.0, "1", low=0, high=1, source="ours: no lower limit is known")
    highest: float = parameter(1e6, "1", low=1, source="ours: no upper limit is known")

    target: ClassVar[Target]
    form: ClassVar[Literal["power", "excess"]] = "power"
    sign: ClassVar[Literal[-1, 1]] = 1
    evidence: ClassVar[Literal["established", "contested", "hypothesis"]]
    equation: ClassVar[str] = ""
    references: ClassVar[Sequence[str]] = ()
    #: what stops this route when it stops, as a verdict says it
    limit_cause: ClassVar[str] = ""
    #: True when expression touches inputs other than the one that learned
    touches_others: ClassVar[bool] = False

    def multiple(self, factor: ArrayLike, share: float = 1.0) -> NDArray[np.float64]:
        """Return the physical variable as a multiple of its base, within the route's limits.

        Parameters
        ----------
        factor : array, dimensionless, >= 0
        share : float
            Exponent, 1 for a pure route.
        """
        value = np.asarray(factor, dtype=float)
        if self.form == "excess":
            return np.clip(value**share - 1.0, 0.0, self.highest)
        with np.errstate(divide="ignore", over="ignore"):
            return np.clip(value ** (self.sign * share), self.lowest, self.highest)

    @classmethod
    def summary(cls) -> str:
        """Return the first line of the route's docstring."""
        return (inspect.getdoc(cls) or "").split("\n")[0]


@dataclass(frozen=True)
class Mixture:
    """One column of the comparison: channels and their shares of the factor's exponent.

    A pure route has one share of 1. Shares are at least 0 and sum to 1, unless
    ``matched`` says that they were divided by a sensitivity afterwards.
    """

    name: str
    shares: Mapping[str, float]
    channels: Mapping[str, Route]
    matched: bool = False

    def __post_init__(self) -> None:
        total = sum(self.shares.values())
        if set(self.shares) != set(self.channels):
            raise Misfit(
                f"route {self.name!r}",
                got=f"shares of {sorted(self.shares)}",
                expected=f"shares of {sorted(self.channels)}",
            )
        if not self.shares or min(self.shares.values()) < 0:
            raise Misfit(f"route {self.name!r}", got=str(dict(self.shares)), expected="shares >= 0")
        if not self.matched and abs(total - 1) > 1e-9:
            raise Misfit(
                f"route {self.name!r}", got=f"shares that sum to {total:g}", expected="a sum of 1"
            )

    @classmethod
    def pure(cls, name: str, channel: Route) -> Mixture:
        """Return the route that gives all of the factor to one channel."""
        return cls(name, {name: 1.0}, {name: channel})
