"""Reports of invented rules, made once."""

from __future__ import annotations

import functools

from plastic import check
from plastic.checking.verdicts import Report
from tests.laws.faulty import FAULTS, variant

#: four laws, so that a report takes no time
LAWS = ("silence", "time_units", "half_period", "claims")


@functools.cache
def report_of(fault: str) -> Report:
    """Return the report of a faulty rule, or of a sound one that is exempt in some way."""
    made = {
        "Exempt": variant("Exempt", at_post=FAULTS["HardCodedMilliseconds"][0].at_post,
                          exempt={"time_units": "the table it was fitted to is in ms"}),
        "Needless": variant("Needless", exempt={"time_units": "no reason at all"}),
        "Elsewhere": variant("Elsewhere", exempt={"counts_only": "it reads spikes"}),
        "Clean": variant("Clean"),
    }  # fmt: skip
    rule = made[fault] if fault in made else FAULTS[fault][0]
    laws = [*LAWS, "counts_only"] if fault == "Elsewhere" else LAWS
    return check(rule, examples=40, seed=3, only=laws)
