"""A route moves its own input."""

from __future__ import annotations

from typing import ClassVar

from plastic.laws._interface import Broken, Case, Law

#: physical variables that several inputs share
SHARED = ("diameter", "inhibition")


class OthersUntouched(Law):
    """Other inputs stay as they are, unless the route says that it moves what they share.

    The diameter of a dendrite and the inhibition of a cell are shared; a route that moves them says
    so in ``touches_others``, and one that moves anything else must not.
    """

    about: ClassVar = "route"
    drawn: ClassVar[bool] = False

    def broken(self, case: Case) -> Broken | None:
        """Compare what the route moves with what it says."""
        route = case.part
        if route.touches_others == (route.target in SHARED):
            return None
        says = "is shared, and the route does not say so" if route.target in SHARED else "is not"
        return Broken(f"touches_others = {route.touches_others}, but the {route.target} {says}")
