"""A passive cell, as the laws about cells need it."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray
from scipy.linalg import expm

from plastic.membrane.cable import conductances, leaks
from plastic.membrane.tree import Dendrite, Tree, build_tree

Floats = NDArray[np.float64]


@dataclass(frozen=True, eq=False)
class PassiveCell:
    """A soma with the conductance of the rest of the cell, and unbranched passive dendrites.

    Attributes
    ----------
    dendrites : mapping of name to Dendrite
    places : tuple of (dendrite, distance in um)
    load : float, nS
    refine : int
        Extra nodes in each piece.
    rm, ri, tau_m : float; ohm cm^2, ohm cm, ms
    """

    dendrites: Mapping[str, Dendrite]
    places: tuple[tuple[str, float], ...]
    load: float = 5.0
    refine: int = 1
    rm: float = 15_000.0
    ri: float = 150.0
    tau_m: float = 15.0

    @property
    def tree(self) -> Tree:
        """The cell, cut at its places."""
        return build_tree(self.dendrites, self.places, self.refine)

    @property
    def matrix(self) -> Floats:
        """Conductances between nodes and to rest, nS."""
        return conductances(self.tree, self.load, self.rm, self.ri)

    @property
    def capacitance(self) -> Floats:
        """Capacitance of every node, pF."""
        return self.tau_m * leaks(self.tree, self.load, self.rm, self.ri)


def impulses(cell: PassiveCell, t: float) -> Floats:
    """Return the voltage of every node (mV) `t` ms after 1 pC entered each node (columns)."""
    capacitance = cell.capacitance
    flow = -cell.matrix / capacitance[:, np.newaxis]
    return np.asarray(expm(t * flow) * 1000.0 / capacitance, dtype=float)
