"""Every number stays a number."""

from __future__ import annotations

import math
from typing import ClassVar

from plastic.laws._interface import Broken, Case, Law, Needs, Row
from plastic.laws._running import Watched, teach


class FiniteNumbers(Law):
    """No number overflows or gets lost, at the ends of every parameter's range and after any gap.

    A hook that raises an error breaks this law.
    """

    needs: ClassVar[Needs] = Needs(events=8, gap=1e9, parameters="ends")

    def broken(self, case: Case) -> Broken | None:
        """Look at every variable just after every spike and at the end."""
        learner = Watched(case.part, len(case.pre))
        stops = [math.nextafter(t, math.inf) for t in case.instants]
        for found in teach(learner, case.pre, case.post, case.end, stops=stops):
            wrong = [
                Row(name, 0.0, value)
                for name, row in found.items()
                for value in row
                if not math.isfinite(value)
            ]
            if wrong:
                return Broken("a variable is no number", tuple(wrong), "a number", "found")
        return None
