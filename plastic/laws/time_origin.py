"""The hour on the clock teaches nothing."""

from __future__ import annotations

from typing import ClassVar

from plastic.laws._interface import Broken, Case, Law, Needs
from plastic.laws._running import Watched, differing, disagree, snapshot, teach


class TimeOrigin(Law):
    """Time may be shifted: only the times between spikes count."""

    needs: ClassVar[Needs] = Needs(numbers={"shift": (1, 10**6)})

    def broken(self, case: Case) -> Broken | None:
        """Compare a run with the same run by a clock that shows `shift` ms more."""
        shift = float(case.numbers["shift"])
        learner, later = (Watched(case.part, len(case.pre)) for _ in range(2))
        start = snapshot(learner)
        now = teach(learner, case.pre, case.post, case.end)[-1]
        later.t = shift
        moved = [[t + shift for t in train] for train in (*case.pre, case.post)]
        then = teach(later, moved[:-1], moved[-1], case.end + shift)[-1]
        rows = differing(now, then, start)
        return disagree(f"{shift:g} ms later the same spikes teach otherwise", rows, "now", "later")
