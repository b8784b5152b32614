"""A route knows what to do with any factor."""

from __future__ import annotations

import math
from typing import ClassVar

from plastic.laws._interface import Broken, Case, Law, Needs, Row


class RouteDefined(Law):
    """A route is defined within its limits at every factor from 0 on, and leaves a base of zero."""

    about: ClassVar = "route"
    needs: ClassVar[Needs] = Needs(
        parameters="ends", numbers={"thousandths": (0, 10**9), "permille": (0, 1000)}
    )

    def broken(self, case: Case) -> Broken | None:
        """Look at one factor, at the smallest above 0 and at 0."""
        route, share = case.part, case.numbers["permille"] / 1000
        low = 0.0 if route.form == "excess" else route.lowest
        for factor in (case.numbers["thousandths"] / 1000, 5e-324, 0.0):
            value = float(route.multiple(factor, share))
            if not math.isfinite(value) or 0.0 * value != 0.0:
                wrong = Row(f"multiple at {factor:g}", low, value)
                return Broken("it is no number", (wrong,), "lowest", "found")
            if not low <= value <= route.highest:
                wrong = Row(f"multiple at {factor:g}", low if value < low else route.highest, value)
                return Broken("it leaves its limits", (wrong,), "limit", "found")
        return None
