"""Weights are bounded."""

from __future__ import annotations

import math
from typing import ClassVar

from plastic.laws._interface import Broken, Case, Law, Needs, Row
from plastic.laws._running import Watched, teach


class Bounds(Law):
    """Every weight has bounds, starts within them and stays there, whatever it starts from."""

    needs: ClassVar[Needs] = Needs(events=8, parameters="ends", numbers={"sixteenths": (0, 16)})

    def broken(self, case: Case) -> Broken | None:
        """Start anywhere within the bounds and look after every spike."""
        rule, learner = case.part, Watched(case.part, len(case.pre))
        share = case.numbers["sixteenths"] / 16
        for name, declared in rule.weights.items():
            low, start, high = map(rule.number, (declared.low, declared.start, declared.high))
            if not (math.isfinite(low) and math.isfinite(high)):
                return Broken(f"{name} has no bound", (Row(f"bounds of {name}", low, high),),
                              "low", "high")  # fmt: skip
            if not low <= start <= high:
                wrong = Row(f"start of {name}", low if start < low else high, start)
                return Broken(f"{name} starts beyond a bound", (wrong,), "bound", "start")
            learner.per_input[name][:] = low + (high - low) * share
        stops = [math.nextafter(t, math.inf) for t in case.instants]
        for found in teach(learner, case.pre, case.post, case.end, stops=stops):
            for name, declared in rule.weights.items():
                low, high = rule.number(declared.low), rule.number(declared.high)
                for w in found[name]:
                    if not low <= w <= high:
                        beyond = Row(name, low if w < low else high, w)
                        return Broken(f"{name} left its bounds", (beyond,), "bound", "found")
        return None
