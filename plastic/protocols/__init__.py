"""The catalogue of protocols: when every input, and the cell, is made to fire."""

from __future__ import annotations

from plastic.catalogue import Catalogue
from plastic.protocols._controls import (
    CONTROLS,
    controlled,
    inhibition_blocked,
    only_test_pulses,
    reversed_order,
    unpaired,
)
from plastic.protocols._interface import Protocol
from plastic.protocols._schedule import INJECTED, Epoch, Schedule

_catalogue: Catalogue[Protocol] = Catalogue("plastic.protocols", "protocol")
names = _catalogue.names
find = _catalogue.find

__all__ = [
    "CONTROLS",
    "INJECTED",
    "Epoch",
    "Protocol",
    "Schedule",
    "controlled",
    "find",
    "inhibition_blocked",
    "names",
    "only_test_pulses",
    "reversed_order",
    "unpaired",
]
