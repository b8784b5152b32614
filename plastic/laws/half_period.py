"""Half a period before is half a period after."""

from __future__ import annotations

import math
from typing import Any, ClassVar

from plastic.laws._interface import Broken, Case, Law, Needs, Row
from plastic.laws._running import Watched, longest_time, teach, with_amplitudes
from plastic.rules._interface import Rule

#: by how much amplitudes are made smaller: the weight stays where it is
TINY = 1e-30


class HalfPeriod(Law):
    """In a long train +lag and -lag agree when the interval between pairings is twice the lag.

    Both are the same train but for its start, which a rule should forget. The change per pairing is
    compared with amplitudes so small that the weight stays where it is.
    """

    needs: ClassVar[Needs] = Needs(
        events=0, gap=1.0, parameters="published", numbers={"sixteenths": (8, 32)}
    )
    share: ClassVar[float] = 0.1

    def idle(self, part: Any) -> str:
        """It is about spikes whose lag counts and about changes that can be made small."""
        if part.reads == "rates":
            return "reads rates, and lags do not count"
        if not part.amplitudes:
            return "declares no amplitudes"
        return "moves in silence" if part.in_silence else ""

    def broken(self, case: Case) -> Broken | None:
        """Compare the weights' changes over the last pairing of two trains."""
        rule = with_amplitudes(case.part, TINY)
        # a power of two times a whole number of eighths of a millisecond: exact sums
        period = max(math.ceil(longest_time(rule) * case.numbers["sixteenths"] / 4), 4) / 4
        count = math.ceil(45.0 * longest_time(rule) / period) + 2
        pre = tuple(period * (k + 1) for k in range(count))
        after = _last(rule, pre, tuple(t + period / 2 for t in pre), period)
        before = _last(rule, pre, tuple(t - period / 2 for t in pre), period)
        rows = tuple(
            Row(f"change of {n} per pairing, per amplitude", sum(one) / TINY, sum(after[n]) / TINY)
            for n, one in before.items()
            if abs(sum(one) - sum(after[n])) > 1e-9 * sum(map(abs, (*one, *after[n])))
        )
        if not rows:
            return None
        says = f"pairings every {period:g} ms: the order of a long train is remembered"
        return Broken(says, rows, f"lag -{period / 2:g} ms", f"lag +{period / 2:g} ms")


def _last(
    rule: Rule, pre: tuple[float, ...], post: tuple[float, ...], period: float
) -> dict[str, list[float]]:
    """Return the changes of every weight over the last whole period."""
    learner = Watched(rule, 1)
    end = pre[-1]
    teach(learner, [pre], post, max(end, post[-1]))
    last = [changes for t, _, changes in learner.heard if end - period < t <= end]
    return {name: [changes.get(name, 0.0) for changes in last] for name in rule.weights}
