"""What is possible in a study and outside common practice: told, never refused."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from dataclasses import is_dataclass
from typing import Any, get_args

from pydantic.fields import FieldInfo

from plastic.quantities import Key, Part, Quantity, key_text
from plastic.study.model import Study

#: what reading a unit may add to a value at the edge of its range; usual values are positive
SLACK = 1e-9


def unusual(study: Study) -> list[str]:
    """Return one line for everything in a study that is possible and unusual.

    The usual range of a value stands beside its limits, in the table that declares it.
    """
    lines = [
        f"{key_text(path)} = {quantity.shown(value)}: possible but unusual; {quantity.practice}"
        for path, quantity, value in _outside((), study)
    ]
    return [*lines, *_weak_reversals(study)]


def _outside(path: tuple[Key, ...], value: Any) -> Iterator[tuple[tuple[Key, ...], Quantity, Any]]:
    """Yield key, quantity and value of every number outside its usual range."""
    if isinstance(value, Part) or is_dataclass(value):
        fields: Mapping[str, FieldInfo] = getattr(type(value), "__pydantic_fields__", {})
        for name, field in fields.items():
            here, inner = (*path, str(field.validation_alias or name)), getattr(value, name)
            for quantity in _quantities(field):
                if (
                    inner is not None
                    and quantity.usual is not None
                    and _beyond(inner, quantity.usual)
                ):
                    yield here, quantity, inner
            yield from _outside(here, inner)
    elif isinstance(value, Mapping):
        for key, inner in value.items():
            yield from _outside((*path, key), inner)
    elif isinstance(value, tuple):
        for k, inner in enumerate(value):
            yield from _outside((*path, k), inner)


def _beyond(value: float, usual: tuple[float, float]) -> bool:
    low, high = usual
    return not low * (1 - SLACK) <= value <= high * (1 + SLACK)


def _quantities(field: FieldInfo) -> list[Quantity]:
    """Return the quantity that a field holds, if it holds one; it may be optional."""
    optional = [getattr(option, "__metadata__", ()) for option in get_args(field.annotation)]
    known = [*field.metadata, *(entry for metadata in optional for entry in metadata)]
    return [entry for entry in known if isinstance(entry, Quantity)]


def _weak_reversals(study: Study) -> Iterator[str]:
    """Yield what is called excitatory and cannot fire the cell."""
    cell = study.cell
    for name, it in study.inputs.items():
        reversal = it.receptor.reversal_at(cell.rest)
        if it.kind == "excitatory" and reversal <= cell.threshold.mean:
            yield (
                f"input.{name}.receptor: called excitatory, reverses at {reversal:.4g} mV, not "
                f"above the threshold ({cell.threshold.mean:g} mV): it cannot fire the cell by "
                "itself"
            )
