"""`plastic.check`: every law on one part."""

from __future__ import annotations

import hashlib
import inspect
import platform
from collections.abc import Iterable
from importlib.metadata import PackageNotFoundError, version
from typing import Any

from plastic import laws
from plastic.catalogue import class_name
from plastic.checking.loading import CELLS, PREFIX, load
from plastic.checking.search import search
from plastic.checking.verdicts import Report, Verdict
from plastic.errors import Misfit, UnknownName
from plastic.laws._cells import PassiveCell
from plastic.laws._interface import Law
from plastic.routes._interface import Route
from plastic.rules._interface import Rule
from plastic.version import VERSION

#: examples of each law, unless asked otherwise
EXAMPLES = 100


def check(
    part: Any,
    *,
    examples: int = EXAMPLES,
    seed: int = 0,
    only: Iterable[str] | None = None,
) -> Report:
    """Return what every law says of a rule, a route or the cells.

    Parameters
    ----------
    part : class, instance or str
        A rule or a route (of an instance, its class), a name of a catalogue, "cells", or
        ``path/to/file.py:ClassName``; a file is run as Python.
    examples : int
        Examples of each law.
    seed : int
        The same seed draws the same examples.
    only : iterable of str, optional
        Names of laws; by default all.

    Examples
    --------
    >>> import plastic
    >>> plastic.check("pair_timing", examples=5, only=["silence", "time_units"]).ok
    True
    """
    cls = load(part) if isinstance(part, str) else part if isinstance(part, type) else type(part)
    about = about_of(cls)
    chosen = laws_about(about) if only is None else _known(only)
    _check_declared(cls)
    found = [check_law(cls, name, examples=examples, seed=seed) for name in chosen]
    return Report(name_of(cls), about, found, examples, seed, _source(cls), versions())


def check_law(part: type[Any], name: str, *, examples: int = EXAMPLES, seed: int = 0) -> Verdict:
    """Return what one law says of one part."""
    law = laws.find(name)()
    exempt = exemptions(part)
    reason = law.idle(part)
    if law.promised and name not in getattr(part, "promises", ()):
        reason = "not promised"
    if law.about != about_of(part):
        reason = f"a law about a {law.about}"
    if reason:
        return Verdict(name, law.summary(), "needless" if name in exempt else "idle", 0, reason)
    found = search(law, part, examples=examples, seed=seed)
    words, tried = law.summary(), found.examples
    if name in exempt:
        needless = found.broken is None
        return Verdict(name, words, "needless" if needless else "exempt", tried, exempt[name])
    if found.broken is None:
        return Verdict(name, words, "holds", tried)
    return Verdict(name, words, "fails", tried, "", found.case, found.broken)


def laws_about(about: str) -> list[str]:
    """Return the names of the laws about a kind of part: those on drawn examples first."""
    found: list[tuple[bool, str]] = []
    for name in laws.names():
        law: type[Law] = laws.find(name)
        if law.about == about:
            found.append((not law.drawn, name))
    return [name for _, name in sorted(found)]


def exemptions(part: type[Any]) -> dict[str, str]:
    """Return the laws from which a part is exempt, with reasons."""
    silent = getattr(part, "in_silence", "")
    return ({"silence": silent} if silent else {}) | dict(getattr(part, "exempt", {}))


def about_of(part: type[Any]) -> str:
    """Return what kind of part a class is."""
    for kind, name in ((Rule, "rule"), (Route, "route"), (PassiveCell, "cell")):
        if issubclass(part, kind):
            return name
    raise Misfit("plastic.check", got=part.__name__, expected="a rule or a route")


def name_of(part: type[Any]) -> str:
    """Return the public name of a part, or its file and class."""
    if part is PassiveCell:
        return CELLS
    file = part.__module__.rpartition(".")[2]
    if part.__module__.startswith("plastic.") and class_name(file) == part.__name__:
        return file
    if part.__module__.startswith(PREFIX):
        return f"{inspect.getsourcefile(part)}:{part.__name__}"
    return f"{part.__module__}.{part.__qualname__}"


def versions() -> dict[str, str]:
    """Return the versions of what a check depends on."""
    found = {"plastic": VERSION, "python": platform.python_version()}
    for library in ("hypothesis", "numpy", "numba"):
        try:
            found[library] = version(library)
        except PackageNotFoundError:
            found[library] = "unknown"
    return found


def _known(only: Iterable[str]) -> list[str]:
    wanted = list(only)
    for name in wanted:
        if name not in laws.names():
            raise UnknownName("law", name, laws.names())
    return wanted


def _check_declared(part: type[Any]) -> None:
    """Refuse exemptions and promises that name no law."""
    for name in (*getattr(part, "exempt", {}), *getattr(part, "promises", ())):
        if name not in laws.names():
            raise UnknownName("law", name, laws.names(), where=part.__name__)


def _source(part: type[Any]) -> str:
    try:
        text = inspect.getsource(part)
    except (OSError, TypeError):
        return "unknown"
    return hashlib.sha256(text.encode()).hexdigest()[:16]
