"""The catalogue of measures: numbers that a rig could report."""

from __future__ import annotations

from plastic.catalogue import Catalogue
from plastic.measures._interface import Measure, Readout

_catalogue: Catalogue[Measure] = Catalogue("plastic.measures", "measure")
names = _catalogue.names
find = _catalogue.find

__all__ = ["Measure", "Readout", "find", "names"]
