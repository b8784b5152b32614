"""Catalogues: a folder of parts whose file names are the public names.

Listing a catalogue imports nothing. A file whose name starts with an underscore is machinery, not
a member. Another package joins by an entry point in the group ``plastic.<room>`` whose name is the
public name and whose value is the class; one that is broken warns when it is used, not before.
"""

from __future__ import annotations

import importlib
import pkgutil
from importlib.metadata import EntryPoint, entry_points
from typing import Generic, TypeVar, cast

from plastic.errors import PlasticError, UnknownName

T = TypeVar("T")


def class_name(name: str) -> str:
    """Return the CamelCase class name of a member called `name`."""
    return "".join(word.capitalize() for word in name.split("_"))


class Catalogue(Generic[T]):
    """The members of one room of the house.

    Parameters
    ----------
    package : str
        The package that holds one file per member, such as ``"plastic.rules"``.
    kind : str
        What a member is called in a message: "rule", "route", ...
    """

    def __init__(self, package: str, kind: str) -> None:
        self.package, self.kind = package, kind

    def _own(self) -> list[str]:
        paths = list(importlib.import_module(self.package).__path__)
        return [m.name for m in pkgutil.iter_modules(paths) if not m.name.startswith("_")]

    def _joined(self) -> dict[str, EntryPoint]:
        return {point.name: point for point in entry_points(group=self.package)}

    def names(self) -> list[str]:
        """Return the public names, sorted; imports no member."""
        return sorted({*self._own(), *self._joined()})

    def find(self, name: str) -> type[T]:
        """Return the class of the member called `name`.

        Raises
        ------
        UnknownName
            When no member has that name; the message offers the nearest one.
        """
        if name in self._own():
            module = importlib.import_module(f"{self.package}.{name}")
            return cast(type[T], getattr(module, class_name(name)))
        joined = self._joined()
        if name not in joined:
            raise UnknownName(self.kind, name, self.names())
        try:
            return cast(type[T], joined[name].load())
        except Exception as error:
            point = joined[name]
            raise PlasticError(
                f"the {self.kind} {name!r} of {point.value} cannot be loaded: {error}"
            ) from error
