"""The rule x route matrix: repeats to criterion, or why not."""

from __future__ import annotations

import math

from matplotlib.axes import Axes
from matplotlib.colors import to_hex
from matplotlib.figure import Figure
from matplotlib.patches import Rectangle

from plastic.report.arms import ALREADY, Arm
from plastic.report.comparison import Comparison
from plastic.report.counts import simulated
from plastic.report.figures.picture import Picture, Row, Rows, labels, where
from plastic.report.figures.style import (
    SMALLEST,
    canvas,
    height_of,
    on_paper,
    size_of,
    text_width,
    words,
    wrapped,
)
from plastic.report.grid import EXTRAPOLATED, ILLUSTRATIVE
from plastic.report.matrices import COMMONEST, cause_letters, percent

#: lightness of a cell at one repeat and at the protocol's end, so that it reads in grey too
EARLY, LATE = 0.62, 0.95
#: keeps a phrase of a cell on one line
UNBROKEN = "\u00a0"
#: mm; from line to line within a cell
LINE = 2.8


def matrix(comparison: Comparison, protocol: str) -> Picture:
    """Return the matrix of one protocol: routes down, rules across.

    Parameters
    ----------
    comparison : Comparison
    protocol : str
    """
    arms = [arm for arm in comparison.arms if arm.protocol == protocol]
    letters = cause_letters(arms)
    rows = [_row(comparison, arm, letters) for arm in arms]
    causes = "; ".join(f"({letter}){UNBROKEN}{cause}" for cause, letter in letters.items())
    notes = [f"never, {COMMONEST} {causes}"] if causes else []
    if any(arm.extrapolated > 0 for arm in arms):
        notes.append(f"{EXTRAPOLATED} beyond the dose at which the rule was measured")
    if any(float(row["share_already_expressed"]) > 0 for row in rows):
        notes.append("already: alone fired the cell at baseline; left out of the counts")
    notes += [
        f"{ILLUSTRATIVE} {words(rule)} is illustrative here: {comparison.illustrative[rule]}"
        for rule in comparison.rules
        if rule in comparison.illustrative
    ]
    told = (
        f"{words(protocol)}: repeats until {words(comparison.input)} alone fires the cell, by the "
        f"change expressed then; median, quartiles and share of {simulated(comparison.cells)}"
    )

    def draw(rows: Rows, width: float) -> Figure:
        return _draw(rows, width, told, notes)

    return Picture(f"matrix-{protocol}", rows, draw)


def _row(comparison: Comparison, arm: Arm, letters: dict[str, str]) -> Row:
    row: dict[str, float | str] = {
        "protocol": arm.protocol, "route": arm.route, "rule": arm.rule,
        "shown": arm.headline(),
        "illustrative": ILLUSTRATIVE if arm.rule in comparison.illustrative else "",
        "cause": arm.cause, "letter": letters.get(arm.cause, ""),
        "extrapolated_share": arm.extrapolated, "share_late_expressed": arm.late,
    }  # fmt: skip
    outcomes = {"expressed": arm.expressed, "induced": arm.induced}
    for kind, outcome in outcomes.items():
        counts = outcome.repeats if outcome else None
        row[f"median_repeats_{kind}"] = counts.median if counts else math.nan
        row[f"lower_quartile_{kind}"] = counts.low if counts else math.nan
        row[f"upper_quartile_{kind}"] = counts.high if counts else math.nan
        row[f"share_reached_{kind}"] = outcome.reached if outcome else math.nan
        row[f"share_never_{kind}"] = outcome.verdicts.get("never", 0.0) if outcome else math.nan
        row[f"share_already_{kind}"] = outcome.verdicts.get(ALREADY, 0.0) if outcome else math.nan
        row[f"shown_{kind}"] = arm.headline(kind)
    row["repeats_of_protocol"] = arm.expressed.repeats.limit if arm.expressed else math.nan
    return row


def _draw(rows: Rows, width: float, told: str, notes: list[str]) -> Figure:
    routes, rules = labels(rows, "route"), labels(rows, "rule")
    left = 24.0 if width < 120 else 34.0
    wide = (width - left - 1.5) / len(rules)
    by_place = {
        (x, y): where(rows, route=route, rule=rule)[0]
        for y, route in enumerate(routes)
        for x, rule in enumerate(rules)
    }
    texts = {at: _lines(row, wide - 2.2, width > 120) for at, row in by_place.items()}
    tall = LINE * max(map(len, texts.values())) + 2.0
    signs = {str(row["rule"]): str(row["illustrative"]) for row in rows}
    names = [wrapped(f"{words(rule)} {signs[rule]}".strip(), wide - 1) for rule in rules]
    head = wrapped(told, width - 3)
    foot = "\n".join(wrapped(note, width - 3, SMALLEST) for note in notes)
    under = height_of(foot, SMALLEST) * 1.1 + 3.0
    size = (wide * len(rules), tall * len(routes))
    figure = canvas(width, under + size[1] + max(map(height_of, names)) + height_of(head) + 4.5)
    height = size_of(figure)[1]
    figure.text(0.5, 1 - 1.2 / height, head, ha="center", va="top", fontsize=7)
    figure.text(1.5 / width, 1.2 / height, foot, ha="left", va="bottom", fontsize=SMALLEST)
    axes = figure.add_axes(on_paper(figure, (left, under, *size)))
    axes.set(xlim=(0, size[0]), ylim=(size[1], 0))
    for (x, y), lines in texts.items():
        _cell(axes, (x * wide, y * tall, wide, tall), by_place[x, y], lines)
    places = [wrapped(words(route), left - 2.5) for route in routes]
    axes.set_xticks([wide * (x + 0.5) for x in range(len(rules))], names, fontsize=7)
    axes.set_yticks([tall * (y + 0.5) for y in range(len(routes))], places, fontsize=7)
    axes.xaxis.tick_top()
    axes.tick_params(length=0, pad=2)
    axes.spines[:].set_visible(False)
    return figure


def _is_count(shown: str) -> bool:
    return shown[:1].isdigit() or shown.startswith(">")


def _cell(axes: Axes, box: tuple[float, float, float, float], row: Row, lines: list[str]) -> None:
    x, y, wide, tall = box
    shown = str(row["shown"])
    median, limit = float(row["median_repeats_expressed"]), float(row["repeats_of_protocol"])
    face, hatch = "1.0", "//////" if shown == "never" else None
    if math.isfinite(median) and limit > 0:
        shade = EARLY + (LATE - EARLY) * min(median / limit, 1.0)
        face = to_hex((shade * 0.86, shade * 0.96, min(shade * 1.08, 1.0)))
    axes.add_patch(
        Rectangle((x + 0.3, y + 0.3), wide - 0.6, tall - 0.6, facecolor=face, hatch=hatch,
                  edgecolor="0.72" if hatch else "0.5", linewidth=0.5)
    )  # fmt: skip
    back = {"facecolor": "white", "edgecolor": "none", "pad": 0.5} if hatch else None
    for k, text in enumerate(lines):
        place = y + tall / 2 + LINE * (k - (len(lines) - 1) / 2)
        first = k == 0
        axes.text(
            x + wide / 2, place, text, ha="center", va="center_baseline",
            size=7 if first and _is_count(shown) else SMALLEST,
            weight="bold" if first and _is_count(shown) else "normal", bbox=back,
        )  # fmt: skip


def _lines(row: Row, room: float, wide: bool) -> list[str]:
    """Return the lines of text of a cell that is `room` mm wide."""
    shown, share = str(row["shown"]), float(row["share_reached_expressed"])
    if math.isnan(share):
        return wrapped(shown, room).split("\n")
    sign = f" {EXTRAPOLATED}" if float(row["extrapolated_share"]) > 0 else ""
    low, high = float(row["lower_quartile_expressed"]), float(row["upper_quartile_expressed"])
    never = f"never {percent(float(row['share_never_expressed']))}"
    never += f" ({row['letter']})" if row["letter"] else ""
    found = [f"{shown}{sign}"] if _is_count(shown) else [never] if shown == "never" else [shown]
    if _is_count(shown) and math.isfinite(low):
        found.append(f"{_count(low, row)} to {_count(high, row)}")
    found.append(f"{percent(share)} reached")
    late = float(row["share_late_expressed"])
    found += [f"({percent(late)} later)"] if late > 0 else []
    if shown != "never" and float(row["share_never_expressed"]) > 0:
        found.append(never)
    already = float(row["share_already_expressed"])
    if already > 0 and shown != ALREADY:
        found.append(f"already {percent(already)}")
    first, *rest = found
    if wide:
        told = ", ".join(text.replace(" ", UNBROKEN) for text in rest).replace(", (", " (")
        return [*_unbroken(first, room), *wrapped(told, room, SMALLEST).split("\n")]
    return [line for text in found for line in _unbroken(text, room)]


def _unbroken(text: str, room: float) -> list[str]:
    """Return a phrase on one line; on several, a number with its %, where there is no room."""
    whole = text.replace(" ", UNBROKEN)
    if text_width(whole, _size(text)) <= room:
        return [whole]
    return wrapped(text.replace(" %", f"{UNBROKEN}%"), room, _size(text)).split("\n")


def _size(text: str) -> float:
    return 7.0 if _is_count(text) and "%" not in text else SMALLEST


def _count(value: float, row: Row) -> str:
    limit = float(row["repeats_of_protocol"])
    return f"{value:.0f}" if math.isfinite(value) else f"> {limit:.0f}"
