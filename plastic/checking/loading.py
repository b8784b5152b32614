"""A part by its name in a catalogue, or by the file and class of a user's own."""

from __future__ import annotations

import hashlib
import importlib.util
import sys
import traceback
from pathlib import Path
from typing import Any

from plastic import routes, rules
from plastic.checking.limits import Endless, limited
from plastic.errors import DataError, PlasticError, UnknownName
from plastic.laws._cells import PassiveCell
from plastic.routes._interface import Route
from plastic.rules._interface import Rule

#: what modules of users' files are called, so that they can be told from others
PREFIX = "plastic_file_"
#: the name under which the laws about cells are checked
CELLS = "cells"
#: s; the longest an import may take
LONGEST = 30.0


def names() -> list[str]:
    """Return everything that can be checked by name: rules, routes and the cells."""
    return [*rules.names(), *routes.names(), CELLS]


def load(text: str) -> type[Any]:
    """Return the class of a part.

    Parameters
    ----------
    text : str
        A name of a catalogue, ``path/to/file.py`` or ``path/to/file.py:ClassName``. A file is run.

    Raises
    ------
    UnknownName
        No part has this name.
    DataError
        The file cannot be imported, or holds no rule or route, or several and none is named.
    """
    path, colon, name = text.partition(".py")
    if colon and (not name or name.startswith(":")):
        return _from_file(Path(path + colon), name.removeprefix(":"))
    if text == CELLS:
        return PassiveCell
    if text in rules.names():
        return rules.find(text)
    if text in routes.names():
        return routes.find(text)
    raise UnknownName("rule or route", text, names())


def _from_file(path: Path, name: str) -> type[Any]:
    module = _imported(path)
    found: dict[str, type[Any]] = {
        k: v
        for k, v in vars(module).items()
        if isinstance(v, type) and issubclass(v, (Rule, Route)) and v.__module__ == module.__name__
    }
    if name:
        if name not in found:
            raise UnknownName("rule or route", name, found, where=str(path))
        return found[name]
    if len(found) != 1:
        told = f"several rules ({', '.join(found)}): write {path}:NAME" if found else "no rule"
        raise DataError(str(path), "", None, told)
    return next(iter(found.values()))


def _imported(path: Path) -> Any:
    """Run a user's file as a module; nothing is written beside it."""
    if not path.is_file():
        raise DataError(str(path), "", None, "no such file")
    label = hashlib.sha256(str(path.resolve()).encode() + path.read_bytes()).hexdigest()[:12]
    name = f"{PREFIX}{path.stem}_{label}"
    if name in sys.modules:
        return sys.modules[name]
    spec = importlib.util.spec_from_file_location(name, path)
    if spec is None or spec.loader is None:
        raise DataError(str(path), "", None, "cannot be imported")
    module = importlib.util.module_from_spec(spec)
    sys.modules[name] = module
    writes, sys.dont_write_bytecode = sys.dont_write_bytecode, True
    try:
        with limited(LONGEST):
            spec.loader.exec_module(module)
    except (Exception, SystemExit, Endless) as error:
        del sys.modules[name]
        told = str(error) if isinstance(error, PlasticError) else f"{type(error).__name__}: {error}"
        raise DataError(str(path), f"line {_line(path, error)}", None, told) from error
    finally:
        sys.dont_write_bytecode = writes
    return module


def _line(path: Path, error: BaseException) -> int:
    """Return the last line of the file that had to do with an error."""
    if isinstance(error, SyntaxError) and error.filename == str(path):
        return error.lineno or 1
    frames = traceback.extract_tb(error.__traceback__)
    return max([f.lineno or 1 for f in frames if f.filename == str(path)][-1:], default=1)
