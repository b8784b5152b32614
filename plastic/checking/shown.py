"""A failing case as text: its spike times, the numbers that disagree, and lines that repeat it."""

from __future__ import annotations

import inspect
from collections.abc import Sequence
from typing import Any

from plastic.catalogue import class_name
from plastic.checking.check import name_of
from plastic.checking.loading import PREFIX
from plastic.checking.verdicts import Report, Verdict
from plastic.laws._interface import Broken, Case

#: instants of a printed table; those in the middle of more are left out
SHOWN = 16
MARKS = {
    "holds": "holds",
    "fails": "FAILS",
    "exempt": "exempt",
    "needless": "NEEDLESS",
    "idle": "-",
}


def report_lines(report: Report) -> list[str]:
    """Return a report as lines: one per law, then every failing case."""
    rows = [
        [v.law, MARKS[v.status], str(v.examples or ""), v.reason or v.words]
        for v in report.verdicts
    ]
    held = sum(v.status == "holds" for v in report.verdicts)
    head = f"{report.name}: {held} laws hold, {len(report.failures)} to mend (seed {report.seed})"
    lines = [head, *aligned(["law", "", "examples", "in words"], rows)]
    told: dict[str, str] = {}
    for verdict in report.failures:
        lines += ["", *verdict_lines(verdict, told)]
    return lines


def verdict_lines(verdict: Verdict, told: dict[str, str] | None = None) -> list[str]:
    """Return what is wrong according to one law.

    Parameters
    ----------
    verdict : Verdict
    told : dict, optional
        What was said before, and by which law; what stands there is not shown twice.
    """
    if verdict.status == "needless":
        return [
            f"{verdict.law}: the exemption is not needed ({verdict.reason})",
            f"  the law: {verdict.words}",
        ]
    if verdict.case is None or verdict.broken is None:
        return []
    broken = verdict.broken
    told = {} if told is None else told
    if broken.says in told:
        return [f"{verdict.law} fails as {told[broken.says]} does"]
    told[broken.says] = verdict.law
    lines = [f"{verdict.law} fails: {broken.says}", f"  the law: {verdict.words}"]
    lines += [f"  {line}" for line in _case_lines(broken.case or verdict.case)]
    if broken.rows:
        lines += ["", *(f"  {line}" for line in _number_lines(broken))]
    lines += ["", "  to see it again:"]
    return lines + [f"    {line}" for line in repeat_lines(verdict.law, verdict.case)]


def _case_lines(case: Case) -> list[str]:
    lines = [f"with {case.part!r}"]
    instants = case.instants
    if instants:
        sides = [("cell", case.post), *((f"input {k}", t) for k, t in enumerate(case.pre))]
        sides = [*sides[1:], sides[0]]
        rows = [
            [f"{t:.10g}", *("|" if t in set(times) else "" for _, times in sides)] for t in instants
        ]
        if len(rows) > SHOWN:
            gap = [f"... {len(rows) - SHOWN} more", *[""] * len(sides)]
            rows = [*rows[: SHOWN // 2], gap, *rows[-SHOWN // 2 :]]
        lines += aligned(["time (ms)", *(name for name, _ in sides)], rows)
    if case.end:
        lines.append(f"end at {case.end:.10g} ms{'' if instants else ', no spikes'}")
    if case.numbers:
        lines.append(", ".join(f"{name} = {value}" for name, value in case.numbers.items()))
    return lines


def _number_lines(broken: Broken) -> list[str]:
    if broken.one == broken.other:
        return [f"- {row.what}" for row in broken.rows]
    rows = [
        [r.what, f"{r.one:.12g}", f"{r.other:.12g}", f"{r.other - r.one:.3g}"] for r in broken.rows
    ]
    return aligned(["numbers that disagree", broken.one, broken.other, "difference"], rows)


def repeat_lines(law: str, case: Case) -> list[str]:
    """Return lines of Python that show again how a case breaks a law."""
    part = case.part
    inputs = "".join(f"{_times(train)}, " for train in case.pre)
    words = [f"rule, pre=({inputs.strip()})", f"post={_times(case.post)}", f"end={case.end!r}"]
    if not case.pre and not case.post and not case.end:
        words = ["rule"]
    if case.numbers:
        words.append(f"numbers={dict(case.numbers)}")
    return [
        "import plastic",
        *_made(part),
        f"case = plastic.laws.Case({', '.join(words)})",
        f'print(plastic.laws.find("{law}")().broken(case))',
    ]


def _made(part: Any) -> list[str]:
    """Return the lines that make a part again."""
    cls = type(part)
    if not hasattr(part, "values"):  # a cell is plain data
        names = "from plastic.checking.strategies import Dendrite, PassiveCell"
        return [names, f"rule = {part!r}"]
    values = {n: v for n, v in part.values.items() if v != cls.parameters[n].default}
    given = ", ".join(f"{name}={value!r}" for name, value in values.items())
    room, file = [*cls.__module__.split("."), "", ""][1:3]
    if cls.__module__.startswith("plastic.") and class_name(file) == cls.__name__:
        return [f'rule = plastic.{room}.find("{file}")({given})']
    if cls.__module__.startswith(PREFIX):
        where = f"{inspect.getsourcefile(cls)}:{cls.__name__}"
        return ["from plastic.checking.loading import load", f'rule = load("{where}")({given})']
    if "." in cls.__qualname__:
        return [f"rule = ...  # {name_of(cls)}({given})"]
    return [f"from {cls.__module__} import {cls.__name__}", f"rule = {cls.__name__}({given})"]


def _times(train: Sequence[float]) -> str:
    inside = ", ".join(f"{t!r}" for t in train)
    return f"({inside},)" if len(train) == 1 else f"({inside})"


def aligned(columns: Sequence[str], rows: Sequence[Sequence[str]]) -> list[str]:
    """Return a table as lines."""
    table = [list(columns), *map(list, rows)]
    widths = [max(len(row[k]) for row in table) for k in range(len(columns))]
    return [
        "  ".join(cell.ljust(width) for cell, width in zip(row, widths, strict=True)).rstrip()
        for row in table
    ]
