"""The catalogue of laws: one file, one class, one sentence that any part must survive."""

from __future__ import annotations

from plastic.catalogue import Catalogue
from plastic.laws._interface import Broken, Case, Law, Needs, Row

_catalogue: Catalogue[Law] = Catalogue("plastic.laws", "law")
names = _catalogue.names
find = _catalogue.find

__all__ = ["Broken", "Case", "Law", "Needs", "Row", "find", "names"]
