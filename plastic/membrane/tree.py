"""Soma and dendrites, cut into nodes and stretches at the places where something happens."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from itertools import pairwise

import numpy as np
from numpy.typing import NDArray

from plastic.errors import UnknownName

Floats = NDArray[np.float64]

SOMA = "soma"
#: um; places nearer to each other than this share a node (a shorter stretch would only lose digits)
TOUCH = 1e-3


@dataclass(frozen=True)
class Dendrite:
    """An unbranched, uniform dendrite with a sealed far end; `length` and `diameter` in um."""

    length: float
    diameter: float

    def __post_init__(self) -> None:
        for name, value in (("length", self.length), ("diameter", self.diameter)):
            if not (np.isfinite(value) and value > 0):
                raise ValueError(f"dendrite {name} = {value} um: must be positive and finite")


@dataclass(frozen=True, eq=False)
class Tree:
    """Soma and dendrites, cut into nodes and stretches. Build it with `build_tree`.

    Attributes
    ----------
    n_nodes : int
        The soma is node 0; the nodes of each dendrite follow from near to far.
    node_of : dict
        (dendrite or "soma", distance in um) of each place asked for -> node.
    node_distance : array, shape (node,), um
        Path distance from the soma.
    node_dendrite : list of str, one per node
        "soma" for node 0.
    stretch_parent, stretch_child : array of int, shape (stretch,)
        Nodes at the near and the far end; child -1 marks the sealed stub beyond a last node.
    stretch_length, stretch_diameter : array, shape (stretch,), um
    stretch_dendrite : list of str, one per stretch
    """

    n_nodes: int
    node_of: dict[tuple[str, float], int]
    node_distance: Floats
    node_dendrite: list[str]
    stretch_parent: NDArray[np.intp]
    stretch_child: NDArray[np.intp]
    stretch_length: Floats
    stretch_diameter: Floats
    stretch_dendrite: list[str]

    def path(self, node: int) -> list[int]:
        """Return the stretches between the soma and `node`, the nearest to the soma first."""
        above = {int(child): s for s, child in enumerate(self.stretch_child) if child >= 0}
        found: list[int] = []
        while node != 0:
            found.append(above[node])
            node = int(self.stretch_parent[above[node]])
        return found[::-1]

    def beyond(self, stretch: int) -> set[int]:
        """Return the nodes at the far end of `stretch` or farther; empty for a sealed stub."""
        return {node for node in range(1, self.n_nodes) if stretch in self.path(node)}


def build_tree(
    dendrites: Mapping[str, Dendrite], places: Sequence[tuple[str, float]], refine: int
) -> Tree:
    """Cut dendrites at the places where something happens.

    Each piece between neighbouring places (or the soma and the first place) becomes ``refine + 1``
    equal stretches; what lies beyond the last place is one sealed stub. A dendrite without places
    is one stub on the soma.

    Parameters
    ----------
    dendrites : mapping of name to Dendrite
    places : sequence of (dendrite name or "soma", path distance from the soma in um)
        Places nearer to each other, to the soma or to the tip than 0.001 um share that node.
    refine : int
        Extra nodes in each piece, 0 or more; steady state does not depend on it.

    Raises
    ------
    UnknownName
        A place on a dendrite that does not exist.
    ValueError
        A distance outside the dendrite, a dendrite called "soma", or `refine` below 0.
    """
    if SOMA in dendrites:
        raise ValueError(f"no dendrite may be called {SOMA!r}: that is the name of node 0")
    if refine < 0:
        raise ValueError(f"refine = {refine}: must be 0 or more")
    for name, distance in places:
        _check_place(dendrites, name, distance)
    node_distance, node_dendrite = [0.0], [SOMA]
    stretches: list[tuple[int, int, float, float, str]] = []
    for name, dendrite in dendrites.items():
        marks = _marks([x for on, x in places if on == name], dendrite.length)
        parent, near = 0, 0.0
        for far in _grid(marks, refine):
            child = len(node_distance)
            node_distance.append(far)
            node_dendrite.append(name)
            stretches.append((parent, child, far - near, dendrite.diameter, name))
            parent, near = child, far
        if near < dendrite.length:
            stretches.append((parent, -1, dendrite.length - near, dendrite.diameter, name))
    distances = np.array(node_distance)
    node_of = {(on, x): _node_at(distances, node_dendrite, on, x) for on, x in places}
    return Tree(
        n_nodes=len(node_distance),
        node_of={(SOMA, 0.0): 0, **node_of},
        node_distance=distances,
        node_dendrite=node_dendrite,
        stretch_parent=np.array([s[0] for s in stretches], dtype=np.intp),
        stretch_child=np.array([s[1] for s in stretches], dtype=np.intp),
        stretch_length=np.array([s[2] for s in stretches], dtype=float),
        stretch_diameter=np.array([s[3] for s in stretches], dtype=float),
        stretch_dendrite=[s[4] for s in stretches],
    )


def _check_place(dendrites: Mapping[str, Dendrite], name: str, distance: float) -> None:
    if name != SOMA and name not in dendrites:
        raise UnknownName("dendrite", name, [SOMA, *dendrites])
    length = 0.0 if name == SOMA else dendrites[name].length
    if not 0 <= distance <= length + TOUCH:
        raise ValueError(f"a place at {distance} um on {name!r} is outside [0, {length}] um")


def _marks(distances: Sequence[float], length: float) -> list[float]:
    """Return where to cut, sorted, with what touches merged; a mark at the tip is the tip."""
    kept = [0.0]
    for distance in sorted(distances):
        if distance > length - TOUCH and length - kept[-1] > TOUCH:
            kept.append(length)
        elif distance - kept[-1] > TOUCH and distance <= length - TOUCH:
            kept.append(distance)
    return kept


def _grid(marks: Sequence[float], refine: int) -> list[float]:
    return [float(x) for a, b in pairwise(marks) for x in np.linspace(a, b, refine + 2)[1:]]


def _node_at(distances: Floats, dendrite: Sequence[str], name: str, distance: float) -> int:
    on = np.array([node in (name, SOMA) for node in dendrite])
    return int(np.argmin(np.where(on, np.abs(distances - distance), np.inf)))
