"""An input knows its own spikes and those of the cell."""

from __future__ import annotations

from typing import ClassVar

from plastic.laws._interface import Broken, Case, Law, Needs
from plastic.laws._running import Watched, differing, disagree, snapshot, teach


class Locality(Law):
    """An input's change depends only on its own history and the cell's, not on other inputs.

    A rule that counts rates opens its windows for the whole cell, so that for those a third input
    fires at every instant of both runs.
    """

    needs: ClassVar[Needs] = Needs(inputs=2)

    def broken(self, case: Case) -> Broken | None:
        """Compare an input beside an active with the same input beside a silent one."""
        a, b = case.pre
        clock = [case.instants] if case.part.reads == "rates" else []
        names = list(snapshot(Watched(case.part, 1)))
        # both are looked at at every instant: how a gap is cut is the affair of another law
        alone, beside = (
            teach(
                Watched(case.part, 2 + len(clock)),
                [a, other, *clock],
                case.post,
                case.end,
                stops=case.instants,
            )[-1]
            for other in ((), b)
        )
        start = {name: row[:1] for name, row in snapshot(Watched(case.part, 1)).items()}
        one, other = ({n: found[n][:1] for n in names} for found in (alone, beside))
        rows = differing(one, other, start)
        says = "input 0 learns otherwise when input 1 fires"
        return disagree(says, rows, "beside a silent input", "beside an active one")
