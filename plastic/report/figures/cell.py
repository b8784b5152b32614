"""The figures of a cell sheet: EPSPs along the cell, what widening does, time courses, sums."""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence
from os import PathLike
from pathlib import Path
from typing import Any

from matplotlib.axes import Axes
from matplotlib.figure import Figure

from plastic.analysis.cell_sheet import CellSheet
from plastic.analysis.contacts import ContactSheet
from plastic.analysis.widening import WIDER
from plastic.report.figures.picture import Picture, Row, Rows, labels, numbers, where
from plastic.report.figures.sheet import Plan
from plastic.report.figures.style import SMALLEST, THRESHOLD, line, words, wrapped

#: most lines of the figure of sums; beyond it pairs are left out
MOST_LINES = 30
#: what is marked in a panel -> (number of its style, whether the mark is filled)
MARKS: Mapping[str, tuple[int, bool]] = {
    "where it lands": (0, False),
    "at the soma": (0, True),
    "ceiling at the soma": (4, False),
    "whole dendrite": (3, True),
    "only on the path": (2, True),
    "only beyond the contact": (1, False),
    "linear sum": (6, True),
    "inhibition blocked": (0, False),
    "with inhibition": (0, True),
}
POTENTIAL = "peak of the EPSP or IPSP (mV)"
WIDENED = f"{100 * (WIDER - 1):+.0f} % diameter: change at the soma (%)"


def cell_pictures(sheet: CellSheet) -> list[Picture]:
    """Return every figure of a cell sheet, not yet drawn; one with nothing in it is left out."""
    made = [inputs_picture(sheet), courses_picture(sheet), sums_picture(sheet)]
    return [picture for picture in made if picture.rows]


def write_cell_figures(sheet: CellSheet, folder: str | PathLike[str]) -> list[Path]:
    """Write every figure at 85 and 180 mm, as SVG and PNG (300 dpi), with its numbers as CSV.

    Parameters
    ----------
    sheet : CellSheet
    folder : path
        Made when it is not there.
    """
    there = Path(folder)
    there.mkdir(parents=True, exist_ok=True)
    return [path for picture in cell_pictures(sheet) for path in picture.save(there)]


def inputs_picture(sheet: CellSheet) -> Picture:
    """Return the peaks of every contact and what a wider dendrite does to them."""
    rows: list[Row] = []
    for c in sheet.contacts:
        peaks = (("where it lands", c.local.peak), ("at the soma", c.soma.peak),
                 ("ceiling at the soma", c.ceiling))  # fmt: skip
        w = c.widening
        changes = (("whole dendrite", w.whole), ("only on the path", w.on_path),
                   ("only beyond the contact", w.beyond))  # fmt: skip
        for panel, found in ((POTENTIAL, peaks), (WIDENED, changes)):
            rows += [_row(panel, c.label, mark, v) for mark, v in found if not math.isnan(v)]
    rows = [_with_threshold(row, sheet) if row["panel"] == POTENTIAL else row for row in rows]
    told = "each contact alone, at its mean release, inhibition blocked; from rest"
    return _lined("cell_inputs", rows, f"{sheet.title}, nominal cell: {told}", narrow=1)


def sums_picture(sheet: CellSheet) -> Picture:
    """Return the peak of every combination of inputs beside the threshold."""
    rows: list[Row] = []
    panel = "peak at the soma, from rest (mV)"
    few = len(sheet.combinations) <= MOST_LINES
    for c in sheet.combinations:
        if not few and len(c.inputs) == 2:
            continue
        values = [("linear sum", c.linear)] if len(c.inputs) > 1 else []
        values += [("inhibition blocked", c.excited)]
        values += [("with inhibition", c.inhibited)] if sheet.inhibition else []
        rows += [_with_threshold(_row(panel, c.label, *value), sheet) for value in values]
    told = "one volley of each at the same time, at the mean of its release, without spikes"
    told += "" if few else "; pairs are in the table"
    return _lined("cell_summation", rows, f"{sheet.title}, nominal cell: {told}", narrow=1)


def _row(panel: str, label: str, mark: str, value: float) -> Row:
    return {"panel": panel, "line": label, "mark": mark, "value": value}


def _with_threshold(row: Row, sheet: CellSheet) -> Row:
    return {**row, "threshold": sheet.threshold - sheet.rest}


def _lined(name: str, rows: Rows, told: str, *, narrow: int) -> Picture:
    """Return a picture with one line per label, and a mark per value."""

    def draw(rows: Rows, width: float) -> Figure:
        lines, panels = labels(rows, "line"), labels(rows, "panel")
        room = 24.0 if width < 120 else 34.0
        places = [wrapped(words(label), room, SMALLEST) for label in lines]
        tallest = max(place.count("\n") for place in places) + 1
        marks = labels(rows, "mark")
        names = [*(mark for mark in MARKS if mark in marks), "threshold"]
        plan = Plan(
            told, "", "", names, height=2.0 + max(4.2, 2.7 * tallest) * len(lines),
            narrow=narrow, wide=2, left=room + 1, same_x=False,
        )  # fmt: skip
        sheet = plan.sheet(width, panels)
        for axes, panel in zip(sheet.panels, panels, strict=True):
            mine = where(rows, panel=panel)
            _marked(axes, mine, lines)
            for level in {float(row["threshold"]) for row in mine if "threshold" in row}:
                axes.axvline(level, label="threshold", **THRESHOLD)
        sheet.panels[0].set_yticks(range(len(lines)), places)
        sheet.panels[0].set_ylim(len(lines) - 0.5, -0.5)
        plan.legend(sheet, width)
        return sheet.figure

    return Picture(name, rows, draw)


def _marked(axes: Axes, rows: Sequence[Row], lines: Sequence[str]) -> None:
    axes.axvline(0.0, color="0.6", linewidth=0.6)
    for y in range(1, len(lines)):
        axes.axhline(y - 0.5, color="0.85", linewidth=0.5)
    axes.tick_params(axis="y", length=0)
    marked = {str(row["line"]) for row in rows}
    for y in [k for k, label in enumerate(lines) if label not in marked]:
        axes.text(
            0.99, y, "does not apply", transform=axes.get_yaxis_transform(),
            ha="right", va="center", fontsize=SMALLEST, color="0.4",
        )  # fmt: skip
    for row in rows:
        k, filled = MARKS[str(row["mark"])]
        look, y = line(k), lines.index(str(row["line"]))
        axes.plot(
            [float(row["value"])], [y], linestyle="",
            color=look.color, marker=look.marker, markersize=4.0, label=str(row["mark"]),
            markerfacecolor=look.color if filled else "white", markeredgewidth=0.9,
        )  # fmt: skip


def courses_picture(sheet: CellSheet) -> Picture:
    """Return the time course of every contact's potential where it lands and at the soma."""
    shown = [c for c in sheet.contacts if c.kind == "excitatory"] or sheet.contacts
    shown = [c for c in shown if c.soma.peak != 0]
    rows: list[Row] = [row for c in shown for row in _course(c)]
    told = "each contact alone, at its mean release, inhibition blocked"
    names = ("where it lands", "at the soma", "threshold at the soma")
    above = sheet.threshold - sheet.rest
    plan = Plan(
        f"{sheet.title}, nominal cell: {told}", "time (ms)", "potential from rest (mV)", names,
        height=28.0, wide=3,
    )  # fmt: skip

    def draw(rows: Rows, width: float) -> Figure:
        return _courses(rows, width, plan, above)

    return Picture("cell_time_course", [{**row, "threshold (mV)": above} for row in rows], draw)


def _course(c: ContactSheet) -> list[Row]:
    return [
        {"contact": c.label, "time (ms)": t, "where it lands (mV)": there, "at the soma (mV)": soma}
        for t, there, soma in zip(
            c.time.tolist(), c.there.tolist(), c.at_soma.tolist(), strict=True
        )
    ]


def _courses(rows: Rows, width: float, plan: Plan, above: float) -> Figure:
    titles = labels(rows, "contact")
    sheet = plan.sheet(width, [words(title) for title in titles])
    looks: Sequence[tuple[str, dict[str, Any]]] = (
        ("where it lands", {"color": line(1).color, "linestyle": (0, (1, 1.2))}),
        ("at the soma", {"color": line(0).color, "linestyle": "-"}),
    )
    for axes, title in zip(sheet.panels, titles, strict=True):
        mine = where(rows, contact=title)
        time = numbers(mine, "time (ms)")
        for name, look in looks:
            axes.plot(time, numbers(mine, f"{name} (mV)"), label=name, **look)
        if max(numbers(mine, "at the soma (mV)")) > 0:
            axes.axhline(above, label="threshold at the soma", **THRESHOLD)
        axes.set_xlim(0.0, math.ceil(time[-1]))
        axes.set_xticks([0, 20, 40])
    plan.legend(sheet, width)
    return sheet.figure
