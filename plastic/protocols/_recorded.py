"""Read recorded spike times from a table of text, and refuse what is no list of spike times."""

from __future__ import annotations

import csv
import math
from pathlib import Path

from plastic.errors import DataError, UnknownName
from plastic.protocols._schedule import NEAREST
from plastic.units import number_in


def read_times(path: Path, *, unit: str, column: str | None = None) -> tuple[float, ...]:
    """Return the spike times of a file, in ms.

    The file is a table of text, one spike a line, columns separated by comma, semicolon or tab,
    with or without one header line; empty lines and lines that start with # are skipped. Decimals
    have a point.

    Parameters
    ----------
    path : Path
    unit : str
        Unit of the times in the file; it is never guessed.
    column : str, optional
        Name of the column in the header; needed when there are several.

    Returns
    -------
    tuple of float, ms, strictly increasing

    Raises
    ------
    DataError
        A file that cannot be read, is empty, or holds a time that is no number, not finite,
        negative, out of order, or within 0.1 ms of the one before.
    UnknownName
        A column that is not in the header.
    """
    file = path.name
    rows = _rows(path)
    where, rows = _column(file, rows, column)
    scale = number_in(f"1 {unit}", "time")
    times: list[float] = []
    for line, cells in rows:
        place, text = f"line {line}", cells[where] if where < len(cells) else ""
        value = _number(file, place, text) * scale
        if value < 0:
            raise DataError(file, place, text, "a spike time must be 0 or later")
        if times and value < times[-1]:
            raise DataError(file, place, text, f"must be later than the one before ({unit})")
        if times and value - times[-1] < NEAREST - 1e-6:
            raise DataError(
                file, place, text, f"must be {NEAREST:g} ms or more after the one before"
            )
        times.append(value)
    if not times:
        raise DataError(file, "", None, "holds no spike times; one number a line is needed")
    return tuple(times)


def _rows(path: Path) -> list[tuple[int, list[str]]]:
    """Return the lines that hold something, with their numbers, cut into cells."""
    try:
        text = path.read_bytes().decode("utf-8-sig")
    except OSError as error:
        reason = "no such file" if isinstance(error, FileNotFoundError) else error.strerror
        raise DataError(str(path), "", None, f"cannot be read: {reason}") from None
    except UnicodeDecodeError:
        text = "\0"
    if "\0" in text:
        raise DataError(path.name, "", None, "is not text; a table of numbers is needed")
    lines = [
        (number, line)
        for number, line in enumerate(text.splitlines(), start=1)
        if line.strip() and not line.lstrip().startswith("#")
    ]
    first = lines[0][1] if lines else ""
    separator = next((sign for sign in ("\t", ";", ",") if sign in first), ",")
    return [
        (number, [cell.strip() for cell in next(csv.reader([line], delimiter=separator))])
        for number, line in lines
    ]


def _column(
    file: str, rows: list[tuple[int, list[str]]], column: str | None
) -> tuple[int, list[tuple[int, list[str]]]]:
    """Return which column holds the times, and the rows below the header."""
    if not rows:
        return 0, []
    number, first = rows[0]
    if column is not None:
        if column not in first:
            raise UnknownName("column", column, first, where=f"{file}: line {number}")
        return first.index(column), rows[1:]
    if len(first) > 1:
        raise DataError(
            file,
            f"line {number}",
            ", ".join(first),
            f"has {len(first)} columns; name one with column = '...' (decimals need a point)",
        )
    return 0, rows if _is_number(first[0]) else rows[1:]


def _is_number(text: str) -> bool:
    try:
        float(text)
    except ValueError:
        return False
    return True


def _number(file: str, place: str, text: str) -> float:
    if not _is_number(text) or not math.isfinite(float(text)):
        raise DataError(file, place, text, "a spike time must be a finite number")
    return float(text)
