"""Seconds or milliseconds: the unit of time is ours, not the rule's."""

from __future__ import annotations

from typing import ClassVar

from plastic.laws._interface import Broken, Case, Law, Needs
from plastic.laws._running import Watched, changed, differing, disagree, outcome, snapshot
from plastic.rules._interface import Rule


class TimeUnits(Law):
    """All times and time constants may be stretched together: no millisecond is hidden in a rule.

    Parameters in ms are multiplied, those in Hz divided; ``rate_powers`` says which parameters
    without a unit carry a power of a rate.
    """

    needs: ClassVar[Needs] = Needs(numbers={"times": (2, 9)})

    def broken(self, case: Case) -> Broken | None:
        """Compare the weights with those of the stretched rule on stretched times."""
        rule, k = case.part, float(case.numbers["times"])
        start = snapshot(Watched(rule, len(case.pre)))
        plain = outcome(rule, case.pre, case.post, case.end)
        trains = [[k * t for t in train] for train in (*case.pre, case.post)]
        other = outcome(stretched(rule, k), trains[:-1], trains[-1], k * case.end)
        rows = differing(plain, other, start, names=rule.weights)
        return disagree(f"with all times {k:g} times as long the weights differ", rows,
                        "as they are", "stretched")  # fmt: skip


def stretched(rule: Rule, k: float) -> Rule:
    """Return the rule in a world in which everything takes `k` times as long."""
    powers = {"ms": 1, "Hz": -1}
    values = {
        name: getattr(rule, name) * k ** powers.get(declared.unit, -rule.rate_powers.get(name, 0))
        for name, declared in rule.parameters.items()
    }
    return changed(rule, **values)
