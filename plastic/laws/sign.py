"""An excitatory input stays one."""

from __future__ import annotations

import math
from typing import ClassVar

from plastic.laws._interface import Broken, Case, Law, Needs, Row
from plastic.laws._running import Watched, changed, teach
from plastic.rules._interface import Rule


class Sign(Law):
    """A weight never changes its sign: learning does not turn excitation into inhibition.

    It is tried with amplitudes up to a thousand times larger, and with the bounds of the weight as
    the rule has them by default: who sets a bound below zero wants signed weights.
    """

    needs: ClassVar[Needs] = Needs(events=8, numbers={"decades": (0, 3)})

    def broken(self, case: Case) -> Broken | None:
        """Look at every weight after every spike."""
        rule = _strong(case)
        stops = [math.nextafter(t, math.inf) for t in case.instants]
        for found in teach(
            Watched(rule, len(case.pre)), case.pre, case.post, case.end, stops=stops
        ):
            for name, declared in rule.weights.items():
                start = rule.number(declared.start)
                for w in found[name]:
                    if w * start < 0:
                        return Broken(f"{name} changed its sign", (Row(name, start, w),),
                                      "start", "found")  # fmt: skip
        return None


def _strong(case: Case) -> Rule:
    """Return the rule with larger amplitudes, within their declared range."""
    rule: Rule = case.part
    bounds = [b for w in rule.weights.values() for b in (w.low, w.high) if isinstance(b, str)]
    values = {name: rule.parameters[name].default for name in bounds}
    for name in rule.amplitudes:
        values[name] = min(10.0 ** case.numbers["decades"] * getattr(rule, name),
                           rule.parameters[name].high)  # fmt: skip
    return changed(rule, **values)
