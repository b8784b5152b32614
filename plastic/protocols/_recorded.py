"""Read recorded spike times from a table of text, and refuse what is no list of spike times."""

from __future__ import annotations

import csv
import math
import re
from pathlib import Path

from plastic.errors import DataError, UnknownName
from plastic.protocols._schedule import NEAREST
from plastic.units import number_in

#: what headers call units of time, in ms
UNITS = {
    **dict.fromkeys(("us", "µs", "usec"), 1e-3),
    **dict.fromkeys(("ms", "msec", "milliseconds"), 1.0),
    **dict.fromkeys(("s", "sec", "seconds"), 1000.0),
    **dict.fromkeys(("min", "minutes"), 60_000.0),
}
#: a unit at the end of a header: time_s, time (ms), time [s], time/s, time s
_ENDS_IN_A_UNIT = re.compile(r".*[\W_](?P<unit>[^\W\d_]+)\W*|(?P<alone>[^\W\d_]+)")


def read_times(path: Path, *, unit: str, column: str | None = None) -> tuple[float, ...]:
    """Return the spike times of a file, in ms.

    The file is a table of text, one spike a line, columns separated by comma, semicolon or tab,
    with or without one header line; empty lines and lines that start with # are skipped. Decimals
    have a point.

    Parameters
    ----------
    path : Path
    unit : str
        Unit of the times in the file; it is never guessed, and a header that ends in another
        one is refused.
    column : str, optional
        Name of the column in the header; needed when there are several.

    Returns
    -------
    tuple of float, ms, strictly increasing

    Raises
    ------
    DataError
        A file that cannot be read, is empty, or holds a time that is no number, not finite,
        negative, out of order, or within 0.1 ms of the one before; a header that ends in
        another unit.
    UnknownName
        A column that is not in the header.
    """
    file = path.name
    lines = _rows(path)
    where, rows = _column(file, lines, column)
    scale = number_in(f"1 {unit}", "time")
    if len(rows) < len(lines):
        number, header = lines[0]
        _agrees(file, f"line {number}", header[where], unit, scale)
    return _rising(file, [(k, c[where] if where < len(c) else "") for k, c in rows], unit, scale)


def _rising(
    file: str, entries: list[tuple[int, str]], unit: str, scale: float
) -> tuple[float, ...]:
    """Return the entries as times in ms, when they rise by 0.1 ms or more."""
    times: list[float] = []
    for line, text in entries:
        place = f"line {line}"
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


def _agrees(file: str, place: str, header: str, unit: str, scale: float) -> None:
    """Refuse a header whose unit is not the declared one."""
    found = _ENDS_IN_A_UNIT.fullmatch(header)
    told = (found["unit"] or found["alone"]) if found else ""
    if told in UNITS and not math.isclose(UNITS[told], scale):
        raise DataError(file, place, header, f"says {told}, but the unit given is {unit!r}")


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
            f"has {len(first)} columns; say which `column` holds the times (decimals need a point)",
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
