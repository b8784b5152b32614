"""At the dose at which a rule was measured, its bounds play no part."""

from __future__ import annotations

from typing import Any, ClassVar

from plastic.laws._interface import Broken, Case, Law, Needs, Row
from plastic.laws._running import outcome


class DoseWithinBounds(Law):
    """No runaway: at its measured dose of slow pairings a rule reaches none of its bounds."""

    needs: ClassVar[Needs] = Needs(
        events=0, gap=1.0, parameters="published", numbers={"lag": (-100, 100), "seconds": (1, 10)}
    )
    share: ClassVar[float] = 0.2

    def idle(self, part: Any) -> str:
        """Only a rule that says at how many repeats it was measured has a dose."""
        return "" if part.dose else "declares no dose"

    def broken(self, case: Case) -> Broken | None:
        """Pair as often as the dose says, one pairing every so many seconds."""
        rule, lag = case.part, case.numbers["lag"]
        every = 1000.0 * case.numbers["seconds"]
        pre = tuple(200.0 + every * k for k in range(rule.dose))
        post = tuple(t + lag for t in pre)
        end = max(pre[-1], post[-1]) + 1.0
        found = outcome(rule, [pre], post, end)
        for name, declared in rule.weights.items():
            for bound in (rule.number(declared.low), rule.number(declared.high)):
                if found[name][0] == bound:
                    says = f"{rule.dose} pairings at a lag of {lag} ms end at a bound of {name}"
                    made = Case(rule, (pre,), post, end)
                    return Broken(says, (Row(name, bound, bound),), "bound", "found", made)
        return None
