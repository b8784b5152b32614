"""Inputs have no numbers."""

from __future__ import annotations

from typing import ClassVar

from plastic.laws._interface import Broken, Case, Law, Needs
from plastic.laws._running import Snapshot, Watched, differing, disagree, outcome, snapshot


class InputOrder(Law):
    """Inputs may be renumbered: each learns from its spikes, not from its place in a list."""

    needs: ClassVar[Needs] = Needs(inputs=2)

    def broken(self, case: Case) -> Broken | None:
        """Compare a run with the run of the inputs in the opposite order."""
        start = snapshot(Watched(case.part, len(case.pre)))
        there = outcome(case.part, case.pre, case.post, case.end)
        back = outcome(case.part, case.pre[::-1], case.post, case.end)
        turned: Snapshot = {name: row[::-1] for name, row in back.items()}
        rows = differing(there, turned, start)
        return disagree("two inputs in the opposite order learn otherwise", rows, "first", "turned")
