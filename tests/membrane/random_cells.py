"""Random cells of several unbranched dendrites, cut at random places."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from plastic.membrane.cable import conductances
from plastic.membrane.tree import Dendrite, Tree, build_tree

RM, RI = 20_000.0, 150.0


@dataclass(frozen=True)
class RandomCell:
    """A cell, its load and dendrites, and the places asked for with their nodes."""

    tree: Tree
    load: float
    dendrites: dict[str, Dendrite]
    places: list[tuple[str, float]]

    @property
    def matrix(self) -> NDArray[np.float64]:
        """Conductances, nS."""
        return conductances(self.tree, self.load, RM, RI)

    def node(self, k: int) -> int:
        """Node of one of the places."""
        return self.tree.node_of[self.places[k]]


def random_cell(rng: np.random.Generator, *, refine: int | None = None) -> RandomCell:
    """One to four dendrites of 60 to 900 um and 0.4 to 4 um on a soma of 0.2 to 40 nS."""
    dendrites = {
        f"d{k}": Dendrite(float(rng.uniform(60, 900)), float(np.exp(rng.uniform(-0.9, 1.4))))
        for k in range(rng.integers(1, 5))
    }
    places = [
        (name, float(x))
        for name, dendrite in dendrites.items()
        for x in rng.uniform(0.02, 1, rng.integers(1, 4)) * dendrite.length
    ]
    cut = int(rng.integers(0, 4)) if refine is None else refine
    load = float(np.exp(rng.uniform(np.log(0.2), np.log(40))))
    return RandomCell(build_tree(dendrites, places, cut), load, dendrites, places)
