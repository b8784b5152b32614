"""A cell that is left alone comes to rest."""

from __future__ import annotations

from typing import ClassVar

import numpy as np

from plastic.laws._cells import impulses
from plastic.laws._interface import Broken, Case, Law, Needs, Row


class Rest(Law):
    """Rest is rest: after any charge every node of a passive cell decays to it from one side."""

    about: ClassVar = "cell"
    needs: ClassVar[Needs] = Needs(numbers={"tenths": (1, 500)})

    def broken(self, case: Case) -> Broken | None:
        """Look for a node beyond rest, and for one that is not at rest after 60 time constants."""
        t = case.numbers["tenths"] / 10
        soon, late = (impulses(case.part, wait) for wait in (t, 60 * case.part.tau_m))
        largest = float(np.abs(impulses(case.part, 0.0)).max())
        beyond, left = float(soon.min()), float(np.abs(late).max())
        if beyond < -1e-12 * largest:
            row = Row(f"lowest mV per pC after {t:g} ms", 0.0, beyond)
            return Broken("charge takes a node beyond rest", (row,), "rest", "found")
        if left > 1e-12 * largest:
            row = Row("largest mV per pC after 60 time constants", 0.0, left)
            return Broken("a node does not come back to rest", (row,), "rest", "found")
        return None
