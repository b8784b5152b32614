"""What the results hold: names, dimensions, units and words, in one table.

The variables of measures come from the catalogue of measures; everything else is listed here.
"""

from __future__ import annotations

from dataclasses import dataclass

from plastic.measures import find, names
from plastic.study.verdicts import CAUSES, VERDICTS

ARM = ("rule", "route", "protocol")
STATUSES = ("complete", "not_applicable", "stopped", "not_run")
COMPLETE, NOT_APPLICABLE, STOPPED, NOT_RUN = range(4)

#: said beside every count, so that a median is not taken over the cells that got there
UNREACHED = " (infinite: not reached; no number: there before anything was learned)"

_INPUT = (*ARM, "cell", "input", "reading")
_CONTACT = (*ARM, "cell", "contact", "reading")
_STRETCH = (*ARM, "cell", "stretch", "reading")
_CELL = (*ARM, "cell")


@dataclass(frozen=True)
class Variable:
    """One variable of the results; `flags` makes it a CF flag variable (-1: none)."""

    dims: tuple[str, ...]
    unit: str
    long_name: str
    flags: tuple[str, ...] = ()

    @property
    def whole(self) -> bool:
        """Whether it is stored as a small whole number."""
        return bool(self.flags)


VARIABLES: dict[str, Variable] = {
    "factor": Variable(_INPUT, "1", "factor induced by the rule, multiple of the baseline"),
    "factor_expressed": Variable(_INPUT, "1", "factor expressed by the route so far"),
    "weight": Variable(_INPUT, "1", "first weight of the rule"),
    "fires_alone_induced": Variable(
        _INPUT, "1", "probability that the input alone fires the cell, all of the change expressed"
    ),
    **{name: Variable(_INPUT, find(name).unit, find(name).long_name) for name in names()},
    "release_probability": Variable(_CONTACT, "1", "release probability"),
    "quantum": Variable(_CONTACT, "nS", "quantal conductance, behind the spine neck"),
    "sites": Variable(_CONTACT, "1", "release sites"),
    "diameter": Variable(_STRETCH, "um", "diameter of the dendrite"),
    "repeats_to_criterion": Variable(
        _CELL, "1", "repeats until the expressed change reached the criterion" + UNREACHED
    ),
    "repeats_to_criterion_induced": Variable(
        _CELL, "1", "repeats until the induced change reached the criterion" + UNREACHED
    ),
    "minutes_to_criterion": Variable(
        _CELL, "min", "time until the expressed change reached the criterion" + UNREACHED
    ),
    "verdict": Variable(_CELL, "1", "verdict on the expressed change", VERDICTS),
    "verdict_induced": Variable(_CELL, "1", "verdict on the induced change", VERDICTS),
    "never_cause": Variable(_CELL, "1", "why the input can never drive the cell", CAUSES[1:]),
    "extrapolated": Variable(
        _CELL, "1", "count beyond the dose at which the rule was measured", ("no", "yes")
    ),
    "partner_fired": Variable(_CELL, "1", "share of repeats with a spike of the cell"),
    "spikes": Variable(_CELL, "1", "spikes of the cell during the induction"),
    "realised_lag": Variable(
        _CELL,
        "ms",
        "median realised lag, first presynaptic spike of a repeat to the nearest spike of the soma",
    ),
    "ceiling": Variable(_CELL, "1", "factor at which every channel of the route is at its limit"),
}
