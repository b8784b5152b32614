"""Spikes of one instant do not see each other."""

from __future__ import annotations

import math
from typing import Any, ClassVar

from plastic.laws._interface import Broken, Case, Law, Needs
from plastic.laws._running import Snapshot, Watched, differing, disagree, snapshot, teach


class Coincidence(Law):
    """Two spikes of one instant change what each would alone, added: neither sees the other."""

    needs: ClassVar[Needs] = Needs(events=6)

    def idle(self, part: Any) -> str:
        """Windows count spikes, whatever their order."""
        return "reads rates, and the order within a window does not count" if (
            part.reads == "rates"
        ) else ""  # fmt: skip

    def broken(self, case: Case) -> Broken | None:
        """Let a history end with an instant of no spike, of one of each side, and of both."""
        nothing = _after(case, False, False)
        pre, post = _after(case, True, False), _after(case, False, True)
        both = _after(case, True, True)
        added: Snapshot = {
            name: tuple(
                a + b - o for a, b, o in zip(pre[name], post[name], nothing[name], strict=True)
            )
            for name in nothing
        }
        rows = differing(added, both, nothing)
        says = f"at {case.end:g} ms a spike of the input and one of the cell see each other"
        return disagree(says, rows, "one by one", "together")


def _after(case: Case, pre: bool, post: bool) -> Snapshot:
    learner = Watched(case.part, 1)
    teach(learner, case.pre, case.post, case.end)
    for name in case.part.weights:  # a bound adds nothing up
        learner.low[name][:], learner.high[name][:] = -math.inf, math.inf
    learner.instant(case.end, [0] if pre else [], {0: 1.0} if post else None)
    return snapshot(learner)
