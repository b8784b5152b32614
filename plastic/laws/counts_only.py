"""Rates are counts over a window."""

from __future__ import annotations

from typing import Any, ClassVar

from plastic.laws._interface import Broken, Case, Law, Needs
from plastic.laws._running import Watched, differing, disagree, outcome, snapshot


class CountsOnly(Law):
    """A rule that reads rates counts spikes: where they lie within its window does not matter."""

    needs: ClassVar[Needs] = Needs(
        events=0, gap=5000.0, numbers={"pre": (0, 5), "post": (0, 5), "step": (1, 12)}
    )

    def idle(self, part: Any) -> str:
        """It is about rates."""
        return "" if part.reads == "rates" else "reads spikes"

    def broken(self, case: Case) -> Broken | None:
        """Turn the spikes of one window round; a second input opens the window in both."""
        rule, step = case.part, case.numbers["step"] / 64
        early = [rule.window * step * k / 13 for k in range(1, case.numbers["pre"] + 1)]
        late = [rule.window * (1 - step * k / 17) for k in range(1, case.numbers["post"] + 1)]
        end = rule.window + case.end
        start = snapshot(Watched(rule, 2))
        one = outcome(rule, [early, [0.0]], late, end)
        turned = [[rule.window - t for t in train] for train in (early, late)]
        other = outcome(rule, [turned[0], [0.0]], turned[1], end)
        rows = differing(one, other, start)
        says = "the order of spikes within one window matters"
        made = disagree(says, rows, "input first", "cell first")
        if made is None:
            return None
        shown = Case(rule, (tuple(early), (0.0,)), tuple(sorted(late)), end)
        return Broken(made.says, made.rows, made.one, made.other, shown)
