"""A rule on imposed spike times, as the laws need it: in plain Python, watched, from any start."""

from __future__ import annotations

import math
from collections.abc import Iterable, Mapping, Sequence
from typing import Any

from plastic.engine.learning import Learner
from plastic.laws._interface import Broken, Row
from plastic.rules._interface import Changes, Rule

#: variables by name; one value per input, or one of the cell
Snapshot = Mapping[str, tuple[float, ...]]
#: two roads to the same number may differ by this share of the change, and of the number
OF_CHANGE, OF_NUMBER = 1e-9, 1e-12


class Seen(dict[str, tuple[float, ...]]):
    """A snapshot that knows how large its variables have been: their digits are no finer."""

    peaks: Mapping[str, float]


class Watched(Learner):
    """A learner that keeps what every hook returned, and how large every variable has been.

    Attributes
    ----------
    heard : list of (time in ms, hook, changes)
    peaks : dict
    """

    def __init__(self, rule: Rule, inputs: int) -> None:
        super().__init__(rule, inputs)
        self.heard: list[tuple[float, str, Changes]] = []
        self.peaks: dict[str, float] = {}

    def _call(self, hook: str, known: Mapping[str, float]) -> Changes:
        changes = super()._call(hook, known)
        self.heard.append((self.t, hook, changes))
        return changes

    def _add(self, i: int, changes: Changes) -> None:
        super()._add(i, changes)
        for name in changes:
            self.peaks[name] = max(abs(self.per_input[name][i]), self.peaks.get(name, 0.0))

    def _add_cell(self, changes: Changes) -> None:
        super()._add_cell(changes)
        for name in changes:
            self.peaks[name] = max(abs(self.per_cell[name]), self.peaks.get(name, 0.0))


def snapshot(learner: Watched) -> Seen:
    """Return every variable of a learner, as it is now."""
    found = Seen((name, tuple(map(float, row))) for name, row in learner.per_input.items())
    found.update((name, (float(value),)) for name, value in learner.per_cell.items())
    found.peaks = dict(learner.peaks)
    return found


def teach(
    learner: Watched,
    pre: Sequence[Sequence[float]],
    post: Sequence[float],
    end: float,
    *,
    stops: Iterable[float] = (),
) -> list[Seen]:
    """Give a learner its spikes; return what it is just before every stop, and at the end."""
    found, reached = [], set(stops)
    times = {*post, *(t for train in pre for t in train)}
    cell = set(post)
    trains = [set(train) for train in pre]
    for t in sorted(times | reached):
        learner.finish(t)
        if t in reached:
            found.append(snapshot(learner))
        if t in times:
            fired = [i for i, train in enumerate(trains) if t in train]
            learner.instant(t, fired, {0: 1.0} if t in cell else None)
    learner.finish(end)
    return [*found, snapshot(learner)]


def outcome(rule: Rule, pre: Sequence[Sequence[float]], post: Sequence[float], end: float) -> Seen:
    """Return what a rule leaves at the end of imposed spike times."""
    return teach(Watched(rule, len(pre)), pre, post, end)[-1]


def differing(
    one: Snapshot,
    other: Snapshot,
    start: Snapshot | None = None,
    *,
    names: Iterable[str] | None = None,
    exact: bool = False,
) -> tuple[Row, ...]:
    """Return the variables on which two outcomes disagree."""
    rows = []
    peaks = [getattr(found, "peaks", {}) for found in (one, other)]
    for name in one if names is None else names:
        peak = max(found.get(name, 0.0) for found in peaks)
        for i, (a, b) in enumerate(zip(one[name], other[name], strict=True)):
            begin = a if start is None else start[name][min(i, len(start[name]) - 1)]
            scale = max(abs(a), abs(b), abs(begin), peak)
            allowed = OF_CHANGE * max(abs(a - begin), abs(b - begin)) + OF_NUMBER * scale
            agree = a == b if exact else abs(a - b) <= allowed
            if not agree:
                rows.append(Row(f"{name} of input {i}" if len(one[name]) > 1 else name, a, b))
    return tuple(rows)


def disagree(says: str, rows: tuple[Row, ...], one: str, other: str) -> Broken | None:
    """Return a broken law when there are rows, and None when there are none."""
    return Broken(says, rows, one, other) if rows else None


def changed(rule: Rule, **values: float) -> Rule:
    """Return a rule with other values of its parameters, whatever their declared bounds."""
    made: Any = object.__new__(type(rule))
    for name, value in {**rule.values, **values}.items():
        object.__setattr__(made, name, float(value))
    return made  # type: ignore[no-any-return]


def with_amplitudes(rule: Rule, times: float) -> Rule:
    """Return a rule whose amplitudes are multiplied."""
    return changed(rule, **{name: times * getattr(rule, name) for name in rule.amplitudes})


def longest_time(rule: Rule) -> float:
    """Return the longest time constant of a rule's traces and parameters, ms."""
    traces = [rule.number(tr.tau) for tr in rule.traces.values()]
    own = [getattr(rule, n) for n, p in rule.parameters.items() if p.unit == "ms"]
    return max([*traces, *own], default=math.nan)
