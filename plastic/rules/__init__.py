"""The catalogue of learning rules: one file, one class, one published rule."""

from __future__ import annotations

from plastic.catalogue import Catalogue
from plastic.rules._interface import Rule

_catalogue: Catalogue[Rule] = Catalogue("plastic.rules", "rule")
names = _catalogue.names
find = _catalogue.find

__all__ = ["Rule", "find", "names"]
