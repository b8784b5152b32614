"""Steady state of whole cells: closed forms of the continuous cable for any unbranched dendrites.

Each dendrite is a sealed cylinder on a soma that is loaded by everything else (Rall 1959, formulas
from memory, sure); the sensitivities are their derivatives (own derivation). Written in SI units,
without the package.
"""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass
from itertools import combinations, pairwise

import numpy as np
import pytest
from numpy.typing import NDArray

from plastic.membrane.cable import build_tree, conductances, input_resistance, transfer_resistance
from tests.membrane.random_cells import RI, RM, RandomCell, random_cell

Floats = NDArray[np.float64]


@dataclass(frozen=True)
class Site:
    """A place on a sealed cylinder of G siemens, L and X length constants, on a load of B G."""

    G: float
    L: float
    X: float
    B: float
    lam: float  # um

    @classmethod
    def of(cls, cell: RandomCell, name: str, x: float) -> Site:
        G, L, lam = semi_infinite(cell, name)
        elsewhere = cell.load * 1e-9 + sum(
            g * math.tanh(length)
            for other in cell.dendrites
            if other != name
            for g, length, _ in [semi_infinite(cell, other)]
        )
        return cls(G, L, x / lam, elsewhere / G, lam)

    @property
    def soma(self) -> float:
        """Input resistance of the soma, Mohm."""
        return 1e-6 / (self.G * (self.B + math.tanh(self.L)))

    @property
    def passed(self) -> float:
        """Voltage here per voltage at the soma, for a current into the soma."""
        return math.cosh(self.L - self.X) / math.cosh(self.L)

    @property
    def local(self) -> float:
        """Input resistance here, Mohm."""
        return self.soma * self.passed / self.attenuation

    @property
    def attenuation(self) -> float:
        """Voltage at the soma per voltage here, for a current here: 1/(cosh X + B sinh X)."""
        return 1 / (math.cosh(self.X) + self.B * math.sinh(self.X))

    @property
    def by_width(self) -> tuple[float, float]:
        """d log / d log diameter of transfer resistance and attenuation: S_DC and S_sat."""
        L, X, B = self.L, self.X, self.B
        own = L / 2 * (B * math.sinh(L) + math.cosh(L)) - 1.5 * math.sinh(L)
        dc = own / (B * math.cosh(L) + math.sinh(L)) - (L - X) / 2 * math.tanh(L - X)
        sat = X / 2 * (math.sinh(X) + B * math.cosh(X)) + 1.5 * B * math.sinh(X)
        return dc, sat * self.attenuation

    @property
    def by_distance(self) -> tuple[float, float]:
        """d log / d distance of transfer resistance and attenuation, 1/um."""
        steeper = (math.sinh(self.X) + self.B * math.cosh(self.X)) * self.attenuation
        return -math.tanh(self.L - self.X) / self.lam, -steeper / self.lam


def semi_infinite(cell: RandomCell, name: str) -> tuple[float, float, float]:
    """G_inf (S), length in length constants, and length constant (um) of a dendrite."""
    d, length = cell.dendrites[name].diameter * 1e-6, cell.dendrites[name].length * 1e-6
    lam = math.sqrt(d / 4 * (RM * 1e-4) / (RI * 1e-2))
    G = math.pi * d**1.5 / (2 * math.sqrt(RM * 1e-4 * RI * 1e-2))
    return G, length / lam, lam * 1e6


def cells(count: int, seed: int = 4) -> list[RandomCell]:
    rng = np.random.default_rng(seed)
    return [random_cell(rng) for _ in range(count)]


def test_resistances_and_attenuations_are_those_of_the_continuous_cable() -> None:
    for cell in cells(200):
        G = cell.matrix
        for name, x in cell.places:
            site, node = Site.of(cell, name, x), cell.tree.node_of[name, x]
            across, local = transfer_resistance(G, node, 0), input_resistance(G, node)
            soma = input_resistance(G, 0)
            assert soma == pytest.approx(site.soma, rel=1e-9)
            assert across == pytest.approx(site.soma * site.passed, rel=1e-9)
            assert local == pytest.approx(site.local, rel=1e-9)
            assert across / local == pytest.approx(site.attenuation, rel=1e-9)
            assert across / soma == pytest.approx(site.passed, rel=1e-9)


def test_between_two_places_the_resistance_is_that_of_the_continuous_cable() -> None:
    """On one dendrite R_yy times the fall from the farther to the nearer; on two, by the soma."""
    for cell in cells(200, seed=5):
        G = cell.matrix
        for (a, x), (b, y) in combinations(cell.places, 2):
            one, other = Site.of(cell, a, x), Site.of(cell, b, y)
            near, far = (one, other) if x < y else (other, one)
            same = near.local * math.cosh(far.L - far.X) / math.cosh(near.L - near.X)
            expected = same if a == b else one.soma * one.passed * other.passed
            nodes = cell.tree.node_of[a, x], cell.tree.node_of[b, y]
            assert transfer_resistance(G, *nodes) == pytest.approx(expected, rel=1e-9)


def test_the_matrix_of_resistances_is_symmetric() -> None:
    """Reciprocity, |K - K^T| < 1e-12 |K|, by an inverse that knows nothing of symmetry."""
    for cell in cells(200, seed=6):
        K = np.linalg.inv(cell.matrix)
        assert np.abs(K - K.T).max() < 1e-12 * np.abs(K).max()


def derivative(f: Callable[[float], Floats], step: float) -> Floats:
    """Return f'(0) by central differences, extrapolated to a step of 0 three times (Richardson)."""
    rows = [(f(step / 2**k) - f(-step / 2**k)) / (2 * step / 2**k) for k in range(4)]
    for order in (4, 16, 64):
        rows = [(order * b - a) / (order - 1) for a, b in pairwise(rows)]
    return rows[0]


def logs(cell: RandomCell, name: str, x: float, multiple: float = 1.0) -> Floats:
    """log of transfer resistance and attenuation of a place on a dendrite of another width."""
    tree = build_tree(cell.dendrites, [(name, x)], 1)
    own = np.array([on == name for on in tree.stretch_dendrite])
    G = conductances(tree, cell.load, RM, RI, np.where(own, multiple, 1.0))
    node = tree.node_of[name, x]
    across = transfer_resistance(G, node, 0)
    return np.log([across, across / input_resistance(G, node)])


def test_the_sensitivity_to_the_diameter_is_the_closed_form() -> None:
    """S_DC and S_sat for every place of 60 cells, to 1e-9."""
    for cell in cells(60, seed=7):
        for name, x in cell.places:
            found = derivative(lambda u, at=(name, x): logs(cell, *at, math.exp(u)), 0.2)  # noqa: B023
            assert found == pytest.approx(Site.of(cell, name, x).by_width, abs=1e-9)


def test_the_sensitivity_to_the_distance_is_the_closed_form() -> None:
    """-tanh(L - X)/lambda for the transfer resistance; in units of 1/lambda, to 1e-9."""
    for cell in cells(60, seed=8):
        for name, dendrite in cell.dendrites.items():
            x = 0.6 * dendrite.length
            site = Site.of(cell, name, x)
            step = min(0.2 * x, 0.2 * site.lam)  # log A is singular not far below x = 0
            found = derivative(lambda u, at=(name, x): logs(cell, at[0], at[1] + u), step)  # noqa: B023
            expected = np.array(site.by_distance) * site.lam
            assert found * site.lam == pytest.approx(expected, abs=1e-9)


def test_a_plain_difference_would_not_reach_the_tolerance() -> None:
    """Control: without extrapolation the same step misses the closed form by far."""
    cell = cells(1)[0]
    name, x = cell.places[0]
    plain = (logs(cell, name, x, math.exp(0.2)) - logs(cell, name, x, math.exp(-0.2))) / 0.4
    assert abs(plain - Site.of(cell, name, x).by_width).max() > 1e-6
