"""A passive cell answers the same both ways."""

from __future__ import annotations

from typing import ClassVar

from plastic.laws._cells import impulses
from plastic.laws._interface import Broken, Case, Law, Needs, Row


class Reciprocity(Law):
    """Charge into one place of a cell moves another as it would the other way round."""

    about: ClassVar = "cell"
    needs: ClassVar[Needs] = Needs(numbers={"tenths": (1, 500)})

    def broken(self, case: Case) -> Broken | None:
        """Compare the voltages between every two nodes, both ways."""
        t = case.numbers["tenths"] / 10
        found = impulses(case.part, t)
        for a in range(len(found)):
            for b in range(a):
                one, other = float(found[a, b]), float(found[b, a])
                if abs(one - other) > 1e-9 * max(abs(one), abs(other)) + 1e-13 * abs(found).max():
                    row = Row(f"mV per pC between nodes {b} and {a} after {t:g} ms", one, other)
                    return Broken("one way is not the other", (row,), "there", "back")
        return None
