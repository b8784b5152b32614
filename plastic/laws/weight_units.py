"""The unit of a weight is ours, too."""

from __future__ import annotations

from typing import Any, ClassVar

from plastic.laws._interface import Broken, Case, Law, Needs
from plastic.laws._running import Snapshot, Watched, changed, differing, disagree, outcome, snapshot
from plastic.rules._interface import Rule


class WeightUnits(Law):
    """A weight may be written in another unit: all that carries the unit is multiplied with it."""

    needs: ClassVar[Needs] = Needs(numbers={"times": (2, 9)})

    def idle(self, part: Any) -> str:
        """Only weights whose start or bound is a parameter with a unit have one."""
        return "" if _unit(part) else "no weight has a unit"

    def broken(self, case: Case) -> Broken | None:
        """Compare the weights, multiplied, with those of the rule in the smaller unit."""
        rule, k = case.part, float(case.numbers["times"])
        unit = _unit(type(rule))
        larger = {n: k * getattr(rule, n) for n, p in rule.parameters.items() if p.unit == unit}
        start = _times(snapshot(Watched(rule, len(case.pre))), rule, k)
        plain = _times(outcome(rule, case.pre, case.post, case.end), rule, k)
        other = outcome(changed(rule, **larger), case.pre, case.post, case.end)
        rows = differing(plain, other, start, names=rule.weights)
        says = f"in a unit {k:g} times smaller the weights differ"
        return disagree(says, rows, "converted", "found")


def _unit(rule: type[Rule]) -> str:
    """Return the unit of the first weight that has one."""
    for declared in rule.weights.values():
        for number in (declared.start, declared.high, declared.low):
            if isinstance(number, str) and rule.parameters[number].unit != "1":
                return rule.parameters[number].unit
    return ""


def _times(found: Snapshot, rule: Rule, k: float) -> Snapshot:
    return {n: tuple(k * v for v in row) for n, row in found.items() if n in rule.weights}
