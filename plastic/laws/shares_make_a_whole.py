"""Parts of a route make up the whole."""

from __future__ import annotations

from typing import ClassVar

from plastic.laws._interface import Broken, Case, Law, Needs, Row


class SharesMakeAWhole(Law):
    """Two shares that sum to one give together what the whole gives, away from the limits."""

    about: ClassVar = "route"
    needs: ClassVar[Needs] = Needs(numbers={"thousandths": (1000, 4000), "permille": (1, 999)})

    def broken(self, case: Case) -> Broken | None:
        """Compare the product of two shares with the whole."""
        route, factor = case.part, case.numbers["thousandths"] / 1000
        share = case.numbers["permille"] / 1000
        offset = 1.0 if route.form == "excess" else 0.0
        parts = [float(route.multiple(factor, s)) for s in (share, 1 - share, 1.0)]
        if any(value in (route.lowest, route.highest) for value in parts):
            return None
        first, rest, whole = (value + offset for value in parts)
        if abs(first * rest - whole) <= 1e-9 * abs(whole):
            return None
        row = Row(f"multiple at a factor of {factor:g}", whole, first * rest)
        return Broken("two shares are not the whole", (row,), "whole", "two shares")
