"""A passive cell makes no energy."""

from __future__ import annotations

from typing import ClassVar

import numpy as np

from plastic.laws._cells import impulses
from plastic.laws._interface import Broken, Case, Law, Needs, Row


class Energy(Law):
    """Without input the energy on the membranes of a passive cell never grows."""

    about: ClassVar = "cell"
    needs: ClassVar[Needs] = Needs(numbers={"tenths": (1, 500), "node": (0, 20)})

    def broken(self, case: Case) -> Broken | None:
        """Compare the energy that 1 pC leaves after some times, halving and doubling."""
        t = case.numbers["tenths"] / 10
        node = case.numbers["node"] % case.part.tree.n_nodes
        weight = case.part.capacitance / 2
        times = [t * k for k in (0.0, 0.25, 0.5, 1.0, 2.0)]
        energy = [float(np.sum(weight * impulses(case.part, s)[:, node] ** 2)) for s in times]
        for k in range(1, len(times)):
            if energy[k] > energy[k - 1] * (1 + 1e-9):
                row = Row(f"fJ at {times[k - 1]:g} and {times[k]:g} ms", energy[k - 1], energy[k])
                return Broken("energy grows without input", (row,), "before", "after")
        return None
