"""A rule does what it says it is for."""

from __future__ import annotations

import math
from typing import Any, ClassVar

from plastic.laws._interface import Broken, Case, Law, Row
from plastic.laws._running import Watched, teach
from plastic.rules._interface import Claim


class Claims(Law):
    """Every claim of a rule holds: pairings change the factor by as much as it says."""

    drawn: ClassVar[bool] = False

    def idle(self, part: Any) -> str:
        """A rule need not claim anything."""
        return "" if part.claims else "claims nothing"

    def broken(self, case: Case) -> Broken | None:
        """Run the pairings of every claim."""
        for claim in type(case.part).claims:
            cls = type(case.part)
            rule = cls.from_set(claim.chosen, **claim.given) if claim.chosen else cls(**claim.given)
            pre, post = pairings(claim)
            end = max([0.0, *pre, *post])
            window = float(getattr(rule, "window", 0.0)) if rule.reads == "rates" else 0.0
            learner = Watched(rule, 1)
            teach(learner, [pre], post, math.nextafter(end + window, math.inf))
            change = float(learner.factor()[0]) - 1
            if not claim.low <= change <= claim.high:
                bound = claim.low if change < claim.low else claim.high
                side = "at least" if change < claim.low else "at most"
                made = Case(rule, (pre,), post, end)
                row = Row("change of the factor", bound, change)
                return Broken(f"claim: {claim.words}", (row,), side, "found", made)
        return None


def pairings(claim: Claim) -> tuple[tuple[float, ...], tuple[float, ...]]:
    """Return the spike times of the input and of the cell (ms) in the pairings of a claim."""
    first = max(0.0, -claim.lag)
    starts = [first + k * 1000.0 / claim.rate for k in range(claim.times)]
    pre = (t + j * claim.apart for t in starts for j in range(claim.pre))
    post = (t + claim.lag + j * claim.apart for t in starts for j in range(claim.post))
    return tuple(pre), tuple(post)
