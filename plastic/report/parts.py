"""The parts of the catalogues as tables: what there is, and everything about one of them."""

from __future__ import annotations

import inspect
from collections.abc import Mapping
from typing import Any

from plastic.catalogue import Catalogue
from plastic.errors import UnknownName
from plastic.laws import Law
from plastic.measures import Measure
from plastic.parameters import Parametrised
from plastic.protocols import Protocol
from plastic.report.grid import Grid
from plastic.routes import Route
from plastic.rules._interface import Rule

#: the catalogues by the name of their room
ROOMS: Mapping[str, Catalogue[Any]] = {
    room: Catalogue(f"plastic.{room}", room.removesuffix("s"))
    for room in ("rules", "routes", "protocols", "measures", "laws")
}


def catalogue_grid(room: str) -> Grid:
    """Return what a catalogue holds.

    Parameters
    ----------
    room : str
        "rules", "routes", "protocols", "measures" or "laws".
    """
    catalogue = ROOMS[room]
    found = {name: catalogue.find(name) for name in catalogue.names()}
    rows = [[name, *_traits(part), summary(part)] for name, part in found.items()]
    columns = {
        "rules": ["rule", "sets", "measured at"],
        "routes": ["route", "evidence"],
        "laws": ["law", "about"],
    }.get(room, [room.removesuffix("s")])
    return Grid(room, [*columns, "what it is"], rows)


def show_grids(name: str) -> list[Grid]:
    """Return everything about the part called `name`, in whatever catalogue it is.

    Raises
    ------
    UnknownName
        When no catalogue has it; the message offers the nearest name.
    """
    found = [(room, c.find(name)) for room, c in ROOMS.items() if name in c.names()]
    if not found:
        everything = [label for catalogue in ROOMS.values() for label in catalogue.names()]
        raise UnknownName("rule, route, protocol, measure or law", name, everything)
    return [grid for room, part in found for grid in _shown(room, name, part)]


def summary(part: Any) -> str:
    """Return the first line of a part's docstring."""
    return (inspect.getdoc(part) or "").split("\n")[0]


def _traits(part: Any) -> list[str]:
    if inspect.isclass(part) and issubclass(part, Rule):
        return [", ".join(part.sets) or "-", f"{part.dose} repeats" if part.dose else "-"]
    if inspect.isclass(part) and issubclass(part, Law):
        return [part.about]
    return [part.evidence] if inspect.isclass(part) and issubclass(part, Route) else []


def _shown(room: str, name: str, part: Any) -> list[Grid]:
    about = [["what", room.removesuffix("s")], *_facts(part)]
    lines = (inspect.getdoc(part) or "").replace("``", "").splitlines()
    grids = [Grid(name, ["", ""], about, ["", *lines])]
    if inspect.isclass(part) and issubclass(part, Parametrised):
        grids += [_parameters(part), _sets(part)]
    if inspect.isclass(part) and issubclass(part, Protocol):
        grids.append(_keys(part))
    references = [[text] for text in getattr(part, "references", ())]
    grids.append(Grid("", ["references"], references))
    return [grid for grid in grids if grid.rows]


def _facts(part: Any) -> list[list[str]]:
    facts: list[tuple[str, str]] = [("equation", str(getattr(part, "equation", "")))]
    if inspect.isclass(part) and issubclass(part, Rule):
        facts += [
            ("reads", part.reads),
            ("presynaptic moment", part.pre_is),
            ("measured at", f"{part.dose} repeats" if part.dose else "no counted protocol"),
            ("spread over cells", ", ".join(part.amplitudes)),
            ("illustrative", part.illustrative),
            ("in silence", part.in_silence),
            ("claims", "; ".join(claim.words for claim in part.claims)),
            ("exempt from laws", "; ".join(f"{k}: {v}" for k, v in part.exempt.items())),
        ]
    if inspect.isclass(part) and issubclass(part, Route):
        facts += [
            ("evidence", part.evidence),
            ("limit", part.limit_cause),
            ("touches other inputs", "yes" if part.touches_others else "no"),
        ]
    if inspect.isclass(part) and issubclass(part, Measure):
        facts += [("unit", part.unit), ("in results", part.long_name)]
    return [[key, text] for key, text in facts if text]


def _parameters(part: type[Parametrised]) -> Grid:
    rows = [
        [name, f"{p.default:g}", "" if p.unit == "1" else p.unit, p.allowed, p.source]
        for name, p in part.parameters.items()
    ]
    return Grid("", ["parameter", "default", "unit", "allowed", "source"], rows)


def _sets(part: type[Parametrised]) -> Grid:
    rows = [
        [name, ", ".join(f"{k} = {v:g}" for k, v in values.items()) or "the defaults"]
        for name, values in part.sets.items()
    ]
    return Grid("", ["set", "values"], rows)


def _keys(part: type[Protocol]) -> Grid:
    rows = []
    for name, field in part.model_fields.items():
        default = "required" if field.is_required() else _default(field.get_default())
        rows.append([name, default, field.description or ""])
    return Grid("", ["key", "default (times in ms)", "write"], rows)


def _default(value: Any) -> str:
    if value is None or value == ():
        return "none"
    return f"{value:.10g}" if isinstance(value, float) else str(value)
