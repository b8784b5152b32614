"""Cells with one fault each."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from plastic.laws._cells import PassiveCell
from plastic.membrane.tree import Dendrite

Floats = NDArray[np.float64]
ONE = {"d": Dendrite(300.0, 2.0)}
PLACES = (("d", 150.0), ("d", 300.0))


@dataclass(frozen=True, eq=False)
class OneWay(PassiveCell):
    """Current flows out of a node more easily than into it."""

    @property
    def matrix(self) -> Floats:
        whole = super().matrix
        return np.asarray(whole + 0.2 * np.triu(whole, 1))


@dataclass(frozen=True, eq=False)
class Charging(PassiveCell):
    """The leak of the soma feeds it."""

    @property
    def matrix(self) -> Floats:
        whole = super().matrix.copy()
        whole[0, 0] -= 3 * whole.sum()
        return np.asarray(whole)


@dataclass(frozen=True, eq=False)
class Overshooting(PassiveCell):
    """Neighbours push each other away."""

    @property
    def matrix(self) -> Floats:
        whole = super().matrix
        return np.asarray(2 * np.diag(np.diag(whole)) - whole)
