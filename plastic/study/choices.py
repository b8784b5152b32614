"""Read the choices of a study: which rule, which route, which protocol."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any

from pydantic import ValidationInfo

from plastic import protocols, routes, rules
from plastic.errors import Misfit, UnknownName
from plastic.parameters import ParameterError, Parametrised
from plastic.protocols import Protocol
from plastic.quantities import refusal, unknown
from plastic.routes import Mixture, Route
from plastic.rules._interface import Rule
from plastic.units import INTERNAL, QuantityError, number_in

_DIMENSION = {unit or "1": dimension for dimension, unit in INTERNAL.items()}


@dataclass(frozen=True)
class RuleChoice:
    """A rule with its parameters, and the label under which results carry it."""

    label: str
    name: str
    rule: Rule


def read_rule(value: Any) -> RuleChoice:
    """Return the rule that an entry of ``compare.rules`` chooses."""
    if isinstance(value, RuleChoice):
        return value
    table = _table(value, "a rule such as 'pair_timing', or { use = 'pair_timing', a_plus = 0.01 }")
    name = _used(table, value)
    path = ("use",) if isinstance(value, Mapping) else ()
    try:
        cls = rules.find(name)
    except UnknownName as error:
        raise unknown(error.kind, name, error.known, path=path) from None
    label = _label(table, name)
    kept = {k: v for k, v in table.items() if k not in ("use", "label", "set")}
    chosen = dict(kept)
    if "set" in table:
        if not isinstance(table["set"], str):
            raise refusal("must be a name in quotes", path=("set",), value=table["set"])
        if table["set"] not in cls.sets:
            raise unknown("parameter set", table["set"], cls.sets, path=("set",))
        chosen = {**cls.sets[table["set"]], **kept}
    return RuleChoice(label, name, _parametrised(cls, chosen, ("use", "label", "set")))


def read_route(value: Any) -> Mixture:
    """Return the route that an entry of ``compare.routes`` chooses.

    A name; ``{ use = NAME, label = ..., PARAMETER = ... }``; or a mixture of shares,
    ``{ NAME = 0.5, OTHER = { share = 0.5, PARAMETER = ... } }``.
    """
    if isinstance(value, Mixture):
        return value
    table = _table(value, "a route such as 'quantal_size', or a mixture of shares")
    if "use" in table:
        name = _used(table, value)
        cls = _route(name, ("use",) if isinstance(value, Mapping) else ())
        label = _label(table, name)
        given = {k: v for k, v in table.items() if k not in ("use", "label")}
        return Mixture(label, {name: 1.0}, {name: _parametrised(cls, given, ("use", "label"))})
    shares: dict[str, float] = {}
    channels: dict[str, Route] = {}
    for name, entry in table.items():
        if name == "label":
            continue
        inside = dict(entry) if isinstance(entry, Mapping) else {"share": entry}
        cls = _route(name, ())
        shares[name] = _share(inside.pop("share", None), name)
        channels[name] = _parametrised(cls, inside, ("share",), (name,))
    try:
        return Mixture(_label(table, "+".join(shares)), shares, channels)
    except Misfit as error:
        raise refusal(f"{error.got}; must be {error.expected}", value=None) from None


def read_protocol(value: Any, info: ValidationInfo) -> Protocol:
    """Return the protocol of a table ``[protocol.NAME]``; ``use`` is "pairing" by default."""
    if isinstance(value, Protocol):
        return value
    table = _table(value, "a table of keys", bare=False)
    name = _used({"use": "pairing", **table}, value)
    try:
        cls = protocols.find(name)
    except UnknownName as error:
        raise unknown(error.kind, name, error.known, path=("use",)) from None
    rest = {key: entry for key, entry in table.items() if key != "use"}
    return cls.model_validate(rest, context=info.context)


def _table(value: Any, wanted: str, *, bare: bool = True) -> dict[str, Any]:
    if bare and isinstance(value, str):
        return {"use": value}
    if not isinstance(value, Mapping) or not value:
        raise refusal(f"must be {wanted}")
    return dict(value)


def _used(table: Mapping[str, Any], value: Any) -> str:
    if "use" not in table:
        raise refusal("missing; the name of what is used", path=("use",), value=None)
    if not isinstance(table["use"], str):
        raise refusal("must be a name in quotes", path=("use",), value=table["use"])
    return table["use"]


def _label(table: Mapping[str, Any], default: str) -> str:
    label = table.get("label", default)
    if not isinstance(label, str) or not label.strip():
        raise refusal("must be text in quotes", path=("label",), value=label)
    return label


def _route(name: str, path: tuple[str, ...]) -> type[Route]:
    try:
        return routes.find(name)
    except UnknownName as error:
        raise unknown(error.kind, name, error.known, path=path) from None


def _share(value: Any, name: str) -> float:
    if isinstance(value, bool) or not isinstance(value, int | float) or not 0 <= value <= 1:
        raise refusal("must be a share from 0 to 1", path=(name,), value=value)
    return float(value)


def _parametrised(
    cls: type[Any], given: Mapping[str, Any], keys: tuple[str, ...], path: tuple[str, ...] = ()
) -> Any:
    """Return ``cls(**given)``, with texts read in the unit of each parameter."""
    part: type[Parametrised] = cls
    numbers: dict[str, float] = {}
    for name, value in given.items():
        if name not in part.parameters:
            raise unknown("parameter", name, {*part.parameters, *keys}, path=path)
        here = (*path, name)
        dimension = _DIMENSION[part.parameters[name].unit]
        if isinstance(value, bool) or not isinstance(value, str | int | float):
            raise refusal("must be a number, or text with a unit", path=here, value=value)
        try:
            numbers[name] = number_in(value, dimension) if isinstance(value, str) else value
        except QuantityError as error:
            reason = str(error).removeprefix(f"{value!r} is ")
            raise refusal(reason, path=here, value=value) from None
    try:
        return part(**numbers)
    except ParameterError as error:
        here = (*path, error.name)
        raise refusal(f"must be {error.allowed}", path=here, value=given[error.name]) from None
