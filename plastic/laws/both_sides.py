"""It takes two."""

from __future__ import annotations

from typing import ClassVar

from plastic.laws._interface import Broken, Case, Law, Needs
from plastic.laws._running import Watched, differing, disagree, outcome, snapshot


class BothSides(Law):
    """Spikes of one side alone change no weight: the input needs the cell, the cell the input."""

    needs: ClassVar[Needs] = Needs(events=6)
    promised: ClassVar[bool] = True

    def broken(self, case: Case) -> Broken | None:
        """Leave out the spikes of the cell, then those of the input."""
        start = snapshot(Watched(case.part, 1))
        for pre, post, who in ((case.pre[0], (), "input"), ((), case.post, "cell")):
            found = outcome(case.part, [pre], post, case.end)
            rows = differing(start, found, start, names=case.part.weights)
            if rows:
                says = f"spikes of the {who} alone change a weight"
                return disagree(says, rows, "at the start", "at the end")
        return None
