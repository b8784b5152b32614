"""An independent fine cable: node-centred finite volumes, Crank-Nicolson, conductance synapse.

It shares no code with the package. One uniform dendrite with a sealed far end hangs on a lumped
soma; the nodes stand at 0, h, 2h ... l, so that a synapse sits exactly on a node. The synaptic
conductance is sampled in the middle of each step (second order in time and space).
Units: um, ms, mV, nS, pF, pA; Rm ohm cm^2, Ri ohm cm, Cm uF/cm^2. Voltages are from rest.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray
from scipy.linalg import solve_banded

Floats = NDArray[np.float64]


@dataclass(frozen=True)
class FineCable:
    """One dendrite of `pieces` equal finite volumes on a soma of `load` nS."""

    length: float
    diameter: float
    load: float
    rm: float = 20_000.0
    ri: float = 150.0
    cm: float = 1.0
    pieces: int = 200

    @property
    def tau(self) -> float:
        return self.rm * self.cm * 1e-3

    def leaks(self) -> Floats:
        """Leak of each node, nS; the end nodes own half a piece."""
        h = self.length / self.pieces
        membrane = np.pi * self.diameter * h * 1e-8 / self.rm * 1e9
        leak = np.full(self.pieces + 1, membrane)
        leak[[0, -1]] /= 2
        leak[0] += self.load
        return leak

    def axial(self) -> float:
        """Axial conductance between neighbouring nodes, nS."""
        h = self.length / self.pieces
        return np.pi * self.diameter**2 / 4 * 1e-8 / (self.ri * h * 1e-4) * 1e9

    def bands(self) -> Floats:
        """The conductance matrix as three bands, shape (3, node), nS."""
        g = self.axial()
        bands = np.zeros((3, self.pieces + 1))
        bands[0, 1:] = bands[2, :-1] = -g
        bands[1] = self.leaks() + 2 * g
        bands[1, [0, -1]] -= g
        return bands

    def steady(self, node: int, current: float = 1000.0) -> Floats:
        """Steady voltage of all nodes, mV; with 1000 pA it reads as Mohm."""
        injected = np.zeros(self.pieces + 1)
        injected[node] = current
        return np.asarray(solve_banded((1, 1), self.bands(), injected))

    def run(
        self,
        node: int,
        g: Callable[[Floats], Floats],
        reversal: float,
        *,
        dt: float,
        duration: float,
        current: Callable[[Floats], Floats] | None = None,
    ) -> tuple[Floats, Floats]:
        """Voltage over time of the soma and of `node`, shape (2, step + 1), with the times."""
        steps = round(duration / dt)
        middle = (np.arange(steps) + 0.5) * dt
        g_mid = np.asarray(g(middle))
        i_mid = np.zeros(steps) if current is None else np.asarray(current(middle))
        half = self.bands() / 2
        C = self.leaks() * self.tau
        v = np.zeros(self.pieces + 1)
        seen = np.zeros((2, steps + 1))
        left = half.copy()
        left[1] += C / dt
        diagonal = left[1, node]
        for s in range(steps):
            right = (C / dt - half[1]) * v
            right[:-1] -= half[0, 1:] * v[1:]
            right[1:] -= half[2, :-1] * v[:-1]
            right[node] += g_mid[s] * (reversal - v[node] / 2) + i_mid[s]
            left[1, node] = diagonal + g_mid[s] / 2
            v = solve_banded((1, 1), left, right, check_finite=False)
            seen[:, s + 1] = v[0], v[node]
        return np.arange(steps + 1) * dt, seen
