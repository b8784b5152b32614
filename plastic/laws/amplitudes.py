"""Amplitudes scale what a rule does."""

from __future__ import annotations

from typing import Any, ClassVar

from plastic.laws._interface import Broken, Case, Law, Needs, Row
from plastic.laws._running import Watched, teach, with_amplitudes
from plastic.rules._interface import Rule

#: by how much amplitudes are made smaller, and a change that is too small to have all its digits
TINY, VANISHING = 1e-30, 1e-250


class Amplitudes(Law):
    """Small changes are proportional to the amplitudes, down to the last digit.

    It fails when digits are lost, or when a parameter that sets no size is called an amplitude.
    """

    needs: ClassVar[Needs] = Needs()

    def idle(self, part: Any) -> str:
        """Only declared amplitudes can be scaled."""
        return "" if part.amplitudes else "declares no amplitudes"

    def broken(self, case: Case) -> Broken | None:
        """Compare every change of a weight with a third of it at three times the amplitudes.

        The amplitudes are so small that the weight stays where it is, and changes are exact.
        """
        one, three, usual = (
            _changes(with_amplitudes(case.part, times), case) for times in (TINY, 3 * TINY, 1.0)
        )
        if [who for who, _ in one] != [who for who, _ in three]:
            return Broken("with other amplitudes other variables change")
        largest, ordinary = (max([abs(v) for _, v in some], default=0.0) for some in (one, usual))
        if largest == 0 and ordinary > VANISHING:
            row = Row("largest change", ordinary, 0.0)
            return Broken("small changes are lost", (row,), "at the amplitudes", "at tiny ones")
        for (who, a), (_, b) in zip(one, three, strict=True):
            if abs(b / 3 - a) > 1e-9 * abs(a) + 1e-12 * largest + VANISHING * TINY:
                row = Row(f"{who}, per amplitude", a / TINY, b / 3 / TINY)
                says = "a change does not scale with the amplitudes"
                return Broken(says, (row,), "at tiny amplitudes", "at three times those")
        return None


def _changes(rule: Rule, case: Case) -> list[tuple[str, float]]:
    learner = Watched(rule, len(case.pre))
    teach(learner, case.pre, case.post, case.end)
    return [
        (f"change of {name} at {t:g} ms ({hook})", value)
        for t, hook, changes in learner.heard
        for name, value in changes.items()
        if name in rule.weights
    ]
