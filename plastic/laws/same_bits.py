"""The same experiment twice is one experiment."""

from __future__ import annotations

from typing import ClassVar

from plastic.laws._interface import Broken, Case, Law, Needs, Row
from plastic.laws._running import differing, disagree, outcome


class SameBits(Law):
    """The same spikes give the same bits, whatever ran before: nothing is remembered or random."""

    needs: ClassVar[Needs] = Needs()

    def broken(self, case: Case) -> Broken | None:
        """Run a case, another one, and the case again, with the same rule and with a new one."""
        rule, values = case.part, case.part.values
        first = outcome(rule, case.pre, case.post, case.end)
        outcome(rule, [case.post], case.pre[0], case.end)
        again = outcome(rule, case.pre, case.post, case.end)
        moved = [Row(f"parameter {n}", v, rule.values[n]) for n, v in values.items()
                 if rule.values[n] != v]  # fmt: skip
        if moved:
            return Broken("a run changes the rule itself", tuple(moved), "before", "after")
        rows = differing(first, again, exact=True)
        return disagree("the same run twice is not the same", rows, "first", "again")
