"""Dense trains for laws that look at a rule once: always the same, with spikes that coincide."""

from __future__ import annotations

import random

from plastic.rules._interface import Rule

Trains = list[tuple[float, ...]]


def dense(seed: int, rate: float, span: float) -> Trains:
    """Return trains of two inputs and of the cell (the last), at a rate in Hz for `span` ms."""
    draw = random.Random(seed)
    count = max(1, round(rate * span / 1000))
    trains = [{draw.randrange(1, int(8 * span)) / 8 for _ in range(count)} for _ in range(3)]
    trains[0] |= set(sorted(trains[2])[::5])
    trains[1] |= set(sorted(trains[0])[::4])
    return [tuple(sorted(train)) for train in trains]


def versions(rule: type[Rule]) -> list[tuple[str, Rule]]:
    """Return a rule with its default parameters and with every published set."""
    return [("default", rule()), *((name, rule.from_set(name)) for name in rule.sets)]
