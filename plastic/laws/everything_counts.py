"""Whatever is declared does something."""

from __future__ import annotations

import math
from collections.abc import Iterable
from typing import Any, ClassVar

from plastic.laws._interface import Broken, Case, Law, Row
from plastic.laws._running import Snapshot, Watched, changed, teach
from plastic.laws._trains import Trains, dense, versions
from plastic.rules._interface import Rule

#: trains on which something must show: slow and fast ones, and pairings 5 ms apart
PAIRS = tuple(200.0 * k for k in range(1, 41))
TRAINS: tuple[Trains, ...] = (
    dense(1, 10.0, 3000.0),
    dense(2, 40.0, 800.0),
    [PAIRS, PAIRS[::2], tuple(t + 5.0 for t in PAIRS)],
)
#: amplitudes are tried as they are, and so large that bounds are touched
LARGER = (1.0, 300.0)


class EverythingCounts(Law):
    """Every parameter, state and trace that a rule declares changes what some weight becomes.

    Each is changed alone, with the default and every published set, on slow and on fast trains,
    with amplitudes as they are and much larger.
    """

    drawn: ClassVar[bool] = False

    def broken(self, case: Case) -> Broken | None:
        """Look for what changes nothing anywhere."""
        cls = type(case.part)
        parameters, variables = dict.fromkeys(cls.parameters), {**cls.states, **cls.traces}
        left = {f"parameter {n}": n for n in parameters} | {f"variable {n}": n for n in variables}
        for rule in _tried(cls):
            for trains in TRAINS:
                base = _weights(rule, trains)
                for what in list(left):
                    others = _others(rule, left[what], what.startswith("parameter"), trains)
                    if any(other != base for other in others):
                        del left[what]
            if not left:
                return None
        rows = tuple(Row(what, math.nan, math.nan) for what in left)
        return Broken("what is declared here changes no weight", rows, "-", "-", Case(case.part))


def _tried(cls: type[Rule]) -> Iterable[Rule]:
    for _, rule in versions(cls):
        for larger in LARGER:
            values = {n: min(larger * getattr(rule, n), cls.parameters[n].high)
                      for n in cls.amplitudes}  # fmt: skip
            yield changed(rule, **values)


def _others(rule: Rule, name: str, is_parameter: bool, trains: Trains) -> Iterable[Any]:
    """Yield the weights for other values of one parameter, or another start of one variable."""
    if not is_parameter:
        yield _weights(rule, trains, moved=name)
        return
    declared, value = rule.parameters[name], getattr(rule, name)
    tried = (1.3 * value, 0.7 * value, 0.5, declared.low, declared.high, 0.5 * value)
    for other in tried:
        if math.isfinite(other) and declared.low <= other <= declared.high and other != value:
            yield _weights(changed(rule, **{name: other}), trains)


def _weights(rule: Rule, trains: Trains, moved: str = "") -> Snapshot | str:
    """Return every weight at several times; what raises is another outcome, too.

    The variable `moved` is moved half way, when all of them have some history.
    """
    learner = Watched(rule, 2)
    end = max(t for train in trains for t in train)
    half = 0.5 * end + 1 / 16
    early, late = ([[t for t in train if (t > half) == after] for train in trains]
                   for after in (False, True))  # fmt: skip
    try:
        found = teach(learner, early[:-1], early[-1], half)
        if moved in learner.per_cell:
            learner.per_cell[moved] += 5.0
        elif moved:
            rows = learner.per_input if moved in learner.per_input else learner.traces
            rows[moved][:] += 5.0
        found += teach(learner, late[:-1], late[-1], 1.5 * end, stops=[0.7 * end, end])
    except Exception as error:
        return str(error)
    return {f"{n} {k}": s[n] for k, s in enumerate(found) for n in rule.weights}
