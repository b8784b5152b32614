"""More is more, up to the ceiling."""

from __future__ import annotations

from typing import ClassVar

from plastic.laws._interface import Broken, Case, Law, Needs, Row


class MonotoneRoute(Law):
    """A larger factor never moves a route back: it rises up to its ceiling and stays there."""

    about: ClassVar = "route"
    needs: ClassVar[Needs] = Needs(
        parameters="ends",
        numbers={"thousandths": (0, 10**7), "more": (1, 10**7), "permille": (1, 1000)},
    )

    def broken(self, case: Case) -> Broken | None:
        """Compare two factors, and a factor just above 1 with 1."""
        route, n = case.part, case.numbers
        share = n["permille"] / 1000
        pairs = [(n["thousandths"] / 1000, (n["thousandths"] + n["more"]) / 1000), (1.0, 1.001)]
        for few, many in pairs:
            one, other = (float(route.multiple(f, share)) for f in (few, many))
            row = Row(f"multiple of the base at {few:g} and {many:g}", one, other)
            if route.sign * (other - one) < 0:
                return Broken("more moves it back", (row,), "at less", "at more")
        room = route.highest if route.sign > 0 else -route.lowest
        if other == one and room > (1.0 if route.sign > 0 else -1.0):
            return Broken("just above 1 it does not move", (row,), "at 1", "above")
        return None
