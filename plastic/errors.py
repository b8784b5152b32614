"""Every error that plastic raises on purpose, and how it speaks.

    PlasticError
    ├── StudyError       a value in a study file: file, key path, value, what is allowed
    ├── UnknownName      a name that no catalogue holds: the nearest one, then all
    ├── Misfit           parts that do not fit together: what was needed, what is provided
    ├── DataError        a file of the user's: file, place, value, what is allowed
    ├── RuleError        a rule that cannot be assembled, or that returned NaN
    └── StoreError       an output folder or results file that must not be touched

Each keeps its numbers as attributes, so that a program can act on them. The command line prints
the message alone and leaves with status 2; no traceback reaches a user. What is possible but
unusual is no error: it is the one warning, `UnusualValue`.
"""

from __future__ import annotations

import difflib
from collections.abc import Iterable
from typing import Any


class PlasticError(Exception):
    """Base of every error that plastic raises on purpose."""


class StudyError(PlasticError):
    """A value in a study that cannot be used.

    Attributes
    ----------
    file, key : str
        The study file and the path of the key in it, such as ``input.far.release.probability``.
    value : object
        What stands there.
    allowed : str
        What may stand there.
    """

    def __init__(self, *, file: str, key: str, value: Any = None, allowed: str = "") -> None:
        self.file, self.key, self.value, self.allowed = file, key, value, allowed
        shown = "" if value is None else f" = {value!r}"
        super().__init__(f"{file}: {key}{shown}: {allowed}")


class UnknownName(PlasticError):  # noqa: N818 - the name is the sentence
    """A name that is not in the catalogue or table it was looked up in."""

    def __init__(self, kind: str, name: str, known: Iterable[str], *, where: str = "") -> None:
        self.kind, self.name, self.known = kind, name, sorted(known)
        near = difflib.get_close_matches(name, self.known, n=1, cutoff=0.5)
        hint = f"; did you mean {near[0]!r}?" if near else ""
        prefix = f"{where}: " if where else ""
        known_text = ", ".join(self.known) if self.known else "none"
        super().__init__(f"{prefix}no {kind} is called {name!r}{hint} (known: {known_text})")


class Misfit(PlasticError):  # noqa: N818
    """Two parts that do not fit together."""

    def __init__(self, what: str, *, got: str, expected: str) -> None:
        self.what, self.got, self.expected = what, got, expected
        super().__init__(f"{what}: got {got} but expected {expected}")


class DataError(PlasticError):
    """A file of the user's that cannot be used as it is."""

    def __init__(self, file: str, place: str, value: Any = None, allowed: str = "") -> None:
        self.file, self.place, self.value, self.allowed = file, place, value, allowed
        shown = "" if value is None else f" = {value!r}"
        where = f"{file}: {place}" if place else file
        super().__init__(f"{where}{shown}: {allowed}")


class RuleError(PlasticError):
    """A rule that cannot be assembled, or that returned something that is no number."""


class StoreError(PlasticError):
    """An output folder or a results file that must not be touched, or cannot be read."""


class UnusualValue(UserWarning):
    """A value that is possible and outside common practice; the command line prints one line."""
