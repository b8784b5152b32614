"""Two half inputs are one."""

from __future__ import annotations

import math
from typing import ClassVar

from plastic.laws._interface import Broken, Case, Law, Needs, Row
from plastic.laws._running import Snapshot, Watched, differing, disagree, snapshot, teach


class HalfWeights(Law):
    """Two inputs of half the weight that fire together are one input, before and after."""

    needs: ClassVar[Needs] = Needs()
    promised: ClassVar[bool] = True

    def broken(self, case: Case) -> Broken | None:
        """Compare an input with two of half its weight, and half its bounds, that fire with it."""
        rule, train = case.part, case.pre[0]
        one, two = Watched(rule, 1), Watched(rule, 2)
        for name in rule.weights:
            for row in (two.per_input[name], two.low[name], two.high[name]):
                row *= 0.5
        start = snapshot(one)
        whole = teach(one, [train], case.post, case.end)[-1]
        halves = teach(two, [train, train], case.post, case.end)[-1]
        summed: Snapshot = {name: (math.fsum(halves[name]),) for name in rule.weights}
        rows: tuple[Row, ...] = differing(whole, summed, start, names=rule.weights)
        return disagree("two halves do not make a whole", rows, "one input", "two halves")
