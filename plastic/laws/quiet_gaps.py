"""Time between spikes may be taken in one piece or in several."""

from __future__ import annotations

from itertools import pairwise
from typing import ClassVar

from plastic.laws._interface import Broken, Case, Law, Needs
from plastic.laws._running import Watched, differing, disagree, snapshot, teach


class QuietGaps(Law):
    """A quiet gap may be cut anywhere: looking in between changes nothing.

    It fails for a decay that is taken in steps instead of exactly.
    """

    needs: ClassVar[Needs] = Needs(events=6, numbers={"permille": (1, 999), "cuts": (1, 3)})

    def broken(self, case: Case) -> Broken | None:
        """Compare a run with one that stops in every gap."""
        learner = Watched(case.part, len(case.pre))
        start = snapshot(learner)
        whole = teach(learner, case.pre, case.post, case.end)[-1]
        again = Watched(case.part, len(case.pre))
        cut = teach(again, case.pre, case.post, case.end, stops=_cuts(case))[-1]
        rows = differing(whole, cut, start)
        return disagree("stopping in the gaps changes the outcome", rows, "in one", "cut")


def _cuts(case: Case) -> list[float]:
    part = case.numbers["permille"] / 1000
    marks = [0.0, *case.instants, case.end]
    gaps = [(a, b) for a, b in pairwise(marks) if b > a]
    return [a + (b - a) * part**k for a, b in gaps for k in range(1, case.numbers["cuts"] + 1)]
