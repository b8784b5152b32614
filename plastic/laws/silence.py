"""Nothing moves in a silent cell."""

from __future__ import annotations

from typing import ClassVar

from plastic.laws._interface import Broken, Case, Law, Needs
from plastic.laws._running import Watched, differing, disagree, outcome, snapshot


class Silence(Law):
    """Without a spike nothing changes, however long one waits.

    A rule that drifts in silence declares why, in ``in_silence``; its drift is what its flow says.
    """

    needs: ClassVar[Needs] = Needs(events=0, gap=1e7)

    def broken(self, case: Case) -> Broken | None:
        """Compare the start with the end of a silence."""
        start = snapshot(Watched(case.part, len(case.pre)))
        rows = differing(start, outcome(case.part, case.pre, (), case.end), start)
        says = f"{case.end:g} ms of silence change what should rest"
        return disagree(says, rows, "at the start", "at the end")
