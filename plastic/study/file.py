"""Read a study file: everything that is wrong with it becomes one short message."""

from __future__ import annotations

import re
import tomllib
import warnings
from collections.abc import Mapping, Sequence
from pathlib import Path
from typing import Any

from pydantic import ValidationError

from plastic.errors import PlasticError, StudyError, UnknownName, UnusualValue
from plastic.quantities import Key, key_text
from plastic.study.checks import check_study
from plastic.study.model import Study
from plastic.study.unusual import unusual

#: bytes; a study is a page of text, not a data file
LARGEST = 1_000_000

_TABLE = "must be a table of keys"
#: what pydantic's own complaints mean to a user, by the start of their type
_MEANT = {
    "model_type": _TABLE,
    "model_attributes_type": _TABLE,
    "dataclass_type": _TABLE,
    "dict_type": _TABLE,
    "tuple_type": "must be a list in square brackets",
    "string_type": "must be text in quotes",
    "string_too_short": "must not be empty",
    "too_short": "must not be empty",
    "bool_type": "must be true or false",
}


def load_study(path: str | Path, *, seed: int | None = None, cells: int | None = None) -> Study:
    """Return the study in a TOML file.

    Parameters
    ----------
    path : str or Path
    seed, cells : int, optional
        Take the place of what the file says.

    Raises
    ------
    StudyError, UnknownName
        With the file, the path of the key, the value and what is allowed. One at a time. What is
        wrong with a data file that the study names is said at the key that names it.

    Warns
    -----
    UnusualValue
        Once for every value that is possible and outside common practice.
    """
    path = Path(path)
    file = str(path)
    try:
        if path.stat().st_size > LARGEST:
            raise _unreadable(file, f"must be at most {LARGEST:,} bytes of text")
        raw = path.read_bytes()
    except FileNotFoundError:
        raise _unreadable(file, "there is no such file") from None
    except OSError as error:
        raise _unreadable(file, f"cannot be read: {error.strerror}") from None
    try:
        text = raw.decode("utf-8-sig")
    except UnicodeDecodeError:
        text = "\0"
    if "\0" in text:
        raise _unreadable(file, "must be a TOML text in UTF-8; this is binary")
    study = parse_study(text, file=file, base=path.parent, seed=seed, cells=cells)
    for line in unusual(study):
        warnings.warn(f"{file}: {line}", UnusualValue, stacklevel=2)
    return study


def parse_study(
    text: str,
    *,
    file: str = "study.toml",
    base: str | Path = ".",
    seed: int | None = None,
    cells: int | None = None,
) -> Study:
    """Return the study in a TOML text.

    Parameters
    ----------
    text : str
    file : str
        What messages call it.
    base : str or Path
        Where data files that the study names are looked for.
    seed, cells : int, optional
        Take the place of what the text says.

    Raises
    ------
    StudyError, UnknownName
        As for `load_study`.
    """
    if not text.strip():
        raise _unreadable(file, "is empty; `plastic new NAME` writes a starter study")
    try:
        raw = tomllib.loads(text.replace("\r\n", "\n"))
    except tomllib.TOMLDecodeError as error:
        raise _syntax(file, text, str(error)) from None
    except RecursionError:
        raise _unreadable(file, "is nested too deeply to be a study") from None
    given = {"seed": seed, "cells": cells}
    raw |= {key: value for key, value in given.items() if value is not None}
    try:
        study = Study.model_validate(raw, context={"file": file, "text": text, "base": base})
    except ValidationError as errors:
        raise _translated(file, raw, errors) from None
    check_study(study)
    return study


def _unreadable(file: str, allowed: str) -> StudyError:
    return StudyError(file=file, key="file", allowed=allowed)


def _syntax(file: str, text: str, message: str) -> StudyError:
    """Return the error of a text that is no TOML, with its line."""
    lines = text.splitlines()
    found = re.search(r"\(at line (\d+), column (\d+)\)", message)
    number = int(found[1]) if found else len(lines)
    reason = re.sub(r"\s*\(at .*\)$", "", message)
    if "overwrite" in reason or "twice" in reason or "immutable" in reason:
        reason = "the key or table stands there twice"
    shown = lines[number - 1].split(" #")[0].strip() if 0 < number <= len(lines) else ""
    return StudyError(
        file=file, key=f"line {number}", value=shown, allowed=f"is not TOML: {reason}"
    )


def _translated(file: str, raw: Mapping[str, Any], errors: ValidationError) -> PlasticError:
    """Return the first of pydantic's errors in our words."""
    first: Any = errors.errors(include_url=False)[0]
    path: tuple[Key, ...] = tuple(first["loc"])
    ctx = first.get("ctx", {})
    while isinstance(ctx.get("error"), ValidationError):  # a part checked inside another one
        first = ctx["error"].errors(include_url=False)[0]
        path, ctx = (*path, *first["loc"]), first.get("ctx", {})
    inner = tuple(ctx.get("path", ()))
    key = key_text(_as_written(raw, (*path, *inner)))
    if first["type"] == "unknown_name":
        where = f"{file}: {key}" if key else file
        return UnknownName(ctx["kind"], ctx["name"], ctx["known"], where=where)
    if path and path[-1] == "[key]":  # where pydantic puts what is wrong with a key itself
        return StudyError(file=file, key=key_text(path[:-1]), allowed="must have a name")
    value = ctx["value"] if "value" in ctx else None if inner else first["input"]
    if "value" not in ctx and first["type"] == "refused" and isinstance(value, Mapping | list):
        value = None  # a whole table says nothing that the key does not say
    allowed = _allowed(first, ctx)
    if allowed == _TABLE and _are_tables(first["input"]):
        value, allowed = None, f"must be one table; write [{key}], in single brackets"
    return StudyError(file=file, key=key or "study", value=value, allowed=allowed)


def _are_tables(value: Any) -> bool:
    """Return whether a value is what double brackets give."""
    return isinstance(value, list) and all(isinstance(entry, Mapping) for entry in value)


def _allowed(error: Mapping[str, Any], ctx: Mapping[str, Any]) -> str:
    kind = str(error["type"])
    if kind == "refused":
        return str(ctx["allowed"])
    if kind == "literal_error":
        return f"must be {ctx['expected']}"
    return _MEANT.get(kind, str(error["msg"]))


def _as_written(raw: Any, path: Sequence[Key]) -> tuple[Key, ...]:
    """Return the part of a path that the text has: a bare value stands for a table of one."""
    kept: list[Key] = []
    here = raw
    for key in path:
        if isinstance(here, Mapping):
            here = here.get(str(key))
        elif isinstance(here, list) and isinstance(key, int) and key < len(here):
            here = here[key]
        else:
            break
        kept.append(key)
    return tuple(kept)
