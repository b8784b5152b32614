"""Nothing moves before its cause."""

from __future__ import annotations

from typing import ClassVar

from plastic.laws._interface import Broken, Case, Law, Needs
from plastic.laws._running import Watched, differing, disagree, outcome, teach


class CauseFirst(Law):
    """Nothing moves before its cause: later spikes do not change what was there before them."""

    needs: ClassVar[Needs] = Needs(numbers={"from_the_end": (1, 5)})

    def broken(self, case: Case) -> Broken | None:
        """Compare what is there just before a spike with a run in which it never comes."""
        if not case.instants:
            return None
        last = min(case.numbers["from_the_end"], len(case.instants))
        t = case.instants[-last]
        full = teach(Watched(case.part, len(case.pre)), case.pre, case.post, case.end, stops=[t])[0]
        early = [[s for s in train if s < t] for train in (*case.pre, case.post)]
        without = outcome(case.part, early[:-1], early[-1], t)
        rows = differing(without, full, exact=True)
        says = f"just before {t:g} ms it matters what comes from then on"
        return disagree(says, rows, "when nothing comes", "when it comes")
