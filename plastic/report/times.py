"""Protocols as tables: one repeat for people, every event as CSV."""

from __future__ import annotations

import csv
from collections.abc import Mapping, Sequence
from pathlib import Path

from plastic.protocols import Schedule
from plastic.report.figures.picture import file_name
from plastic.report.grid import Grid

#: most rows of a printed protocol; a recording has thousands
SHOWN = 16


def protocol_grid(schedule: Schedule, notes: Sequence[str] = ()) -> Grid:
    """Return one repeat of a protocol, with its set lags; the title tells the epochs.

    Of a long repeat, the first and last events; `write_times` writes all.

    Parameters
    ----------
    schedule : Schedule
    notes : sequence of str
        Sentences to put under it.
    """
    baseline, _, follow_up = schedule.epochs
    repeats = len(schedule.repeat_starts)
    title = (
        f"{schedule.name}: baseline {_span(baseline.end)}; {repeats} repeats, one every "
        f"{_span(schedule.every)}; follow-up {_span(follow_up.end - follow_up.start)}"
    )
    lags: dict[tuple[str, float], list[str]] = {}
    references: list[str] = []
    for row in schedule.table():
        if row["repeat"] == 1:
            at = float(row["time_ms"]) - float(schedule.repeat_starts[0])
            told = [
                f"{partner} {', '.join(f'{lag:+g}' for lag in values)}"
                for partner, values in row["set_lags_ms"].items()
                if values
            ]
            lags[row["input"], round(at, 6)] = told
            references += [row["reference"]] if row["reference"] else []
    rows = [[f"{at:g}", name, "; ".join(told) or "-"] for (name, at), told in lags.items()]
    rows.sort(key=lambda row: float(row[0]))
    meant = "; ".join(dict.fromkeys(references))
    told = (
        [f"set lag: t_post - t_pre, {meant}; the realised lag is the cell's own"] if meant else []
    )
    tests = [f"{name} {len(times)}" for name, times in schedule.test_times.items() if len(times)]
    told += [f"test pulses: {', '.join(tests)}"] if tests else []
    columns = ["time in the repeat (ms)", "event of", "set lags (ms)"]
    kept = f"{len(rows)} events in a repeat; the protocol's CSV file has them all"
    return Grid(title, columns, rows, [*told, *notes]).shortened(SHOWN, kept)


def write_times(schedules: Mapping[str, Schedule], folder: Path) -> list[Path]:
    """Write the exact time of every event of every protocol, one CSV each; return the paths."""
    folder.mkdir(parents=True, exist_ok=True)
    paths = []
    for name, schedule in schedules.items():
        path = folder / f"{file_name(name)}.csv"
        rows = [{**row, "set_lags_ms": _lag_text(row["set_lags_ms"])} for row in schedule.table()]
        keys = ["time_ms", "input", "kind", "epoch", "repeat", "set_lags_ms", "reference"]
        with path.open("w", newline="", encoding="utf-8") as file:
            writer = csv.DictWriter(file, keys, lineterminator="\n")
            writer.writeheader()
            writer.writerows(rows)
        paths.append(path)
    return paths


def _lag_text(lags: Mapping[str, Sequence[float]]) -> str:
    return "; ".join(f"{name} {' '.join(f'{lag:g}' for lag in v)}" for name, v in lags.items() if v)


def _span(ms: float) -> str:
    """Return a duration in the unit people would use."""
    for unit, size in (("min", 60_000.0), ("s", 1000.0)):
        if ms >= size:
            return f"{ms / size:g} {unit}"
    return f"{ms:g} ms"
