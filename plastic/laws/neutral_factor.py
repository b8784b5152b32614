"""No change of the factor, no change of the synapse."""

from __future__ import annotations

from typing import ClassVar

from plastic.laws._interface import Broken, Case, Law, Needs, Row


class NeutralFactor(Law):
    """At a factor of 1 nothing has moved, whatever the route's share."""

    about: ClassVar = "route"
    needs: ClassVar[Needs] = Needs(parameters="ends", numbers={"permille": (0, 1000)})

    def broken(self, case: Case) -> Broken | None:
        """Look at the multiple at 1."""
        neutral = 0.0 if case.part.form == "excess" else 1.0
        found = float(case.part.multiple(1.0, case.numbers["permille"] / 1000))
        if found == neutral:
            return None
        return Broken("a factor of 1 moves it", (Row("multiple of the base", neutral, found),))
