"""The catalogue of routes: where in the cell a change of strength is expressed."""

from __future__ import annotations

from plastic.catalogue import Catalogue
from plastic.routes._interface import Mixture, Route

_catalogue: Catalogue[Route] = Catalogue("plastic.routes", "route")
names = _catalogue.names
find = _catalogue.find

__all__ = ["Mixture", "Route", "find", "names"]
