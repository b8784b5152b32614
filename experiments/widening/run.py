"""When does a wider dendrite strengthen an input at its tip, and when does it weaken it?

Asks the cell sheet of plastic for one dendrite on one soma, over diameters, loads and strengths of
the synapse, compares with the closed forms of the cable, and writes a table and a figure. Uses the
public door of plastic only. Run it from anywhere:

    python experiments/widening/run.py --out widening-results
"""

from __future__ import annotations

import argparse
from collections.abc import Sequence
from pathlib import Path

import matplotlib as mpl
import numpy as np
from matplotlib.axes import Axes
from matplotlib.figure import Figure
from matplotlib.lines import Line2D
from points import (
    BRIEF,
    CELL,
    LENGTH,
    LONE,
    STEADY,
    STRENGTHS,
    Point,
    best_diameter,
    curve_points,
    map_points,
    parts,
    read_points,
    steady_sensitivity,
    write_points,
)

#: one colour and pattern per strength, told apart in grey too (Okabe & Ito's colours)
LOOKS = {1e-3: ("#0072B2", "-", "o"), 1.0: ("#D55E00", "--", "s"), 5.0: ("#009E73", "-.", "^")}
NAMES = {1e-3: "weak: like a current", 1.0: "1 nS", 5.0: "5 nS"}
STYLE = {
    "font.size": 7, "axes.labelsize": 7, "axes.titlesize": 7, "xtick.labelsize": 6,
    "ytick.labelsize": 6, "legend.fontsize": 6, "axes.linewidth": 0.6, "lines.linewidth": 1.1,
    "xtick.major.width": 0.6, "ytick.major.width": 0.6, "axes.spines.top": False,
    "axes.spines.right": False, "legend.frameon": False, "svg.fonttype": "none",
    "svg.hashsalt": "plastic",
}  # fmt: skip
MM = 1 / 25.4
HELPS, HURTS = "#0072B2", "#D55E00"


def figure_of(points: Sequence[Point]) -> Figure:
    """Return sensitivities above (theory as lines over the points), maps of signs below."""
    figure = Figure(figsize=(85 * MM, 118 * MM), dpi=300)
    above, below = figure.subplots(2, 2, sharey="row", sharex="row")
    for axes, load in zip(above, (CELL, LONE), strict=True):
        draw_curves(axes, [p for p in points if p.panel == "sensitivity"], load)
    for axes, g in zip(below, STRENGTHS[:2], strict=True):
        draw_map(axes, [p for p in points if p.panel == "map"], g)
    above[0].set_title(f"cell of {CELL:g} nS")
    above[1].set_title(f"lone small soma, {LONE:g} nS")
    above[0].set_ylabel("d ln EPSP / d ln diameter")
    below[0].set_title("steady, like a current")
    below[1].set_title("steady, 1 nS")
    below[0].set_ylabel("load at the soma (nS)")
    for axes in (*above, *below):
        axes.set_xscale("log")
        axes.set_xticks([0.5, 1, 2, 5], ["0.5", "1", "2", "5"])
        axes.minorticks_off()
    for axes, letter in zip((*above, *below), "abcd", strict=True):
        axes.text(-0.02, 1.06, letter, transform=axes.transAxes, fontweight="bold", ha="right")
    figure.align_ylabels([above[0], below[0]])
    figure.subplots_adjust(left=0.155, right=0.985, top=0.96, bottom=0.135, wspace=0.1, hspace=0.52)
    figure.text(0.57, 0.575, "diameter (µm)", ha="center")
    figure.text(0.57, 0.079, "diameter (µm)", ha="center")
    add_legends(figure)
    return figure


def draw_curves(axes: Axes, points: Sequence[Point], load: float) -> None:
    """Draw theory over the points of one load."""
    fine = np.geomspace(0.36, 8.8, 120)
    axes.axhline(0, color="0.6", linewidth=0.5)
    for g, (color, pattern, mark) in LOOKS.items():
        for course, face in ((STEADY, color), (BRIEF, "white")):
            mine = [
                p
                for p in points
                if (p.load, p.conductance, p.time_course) == (load, g, course.name)
            ]
            axes.plot(
                [p.diameter for p in mine], [p.measured for p in mine], mark, color=color,
                markerfacecolor=face, markersize=3, markeredgewidth=0.6,
            )  # fmt: skip
        axes.plot(fine, steady_sensitivity(fine, load, g), pattern, color=color, linewidth=0.9)


def draw_map(axes: Axes, points: Sequence[Point], g: float) -> None:
    """Draw which cells gain, and where theory has the border."""
    for gains, color, mark in ((True, HELPS, "^"), (False, HURTS, "v")):
        mine = [p for p in points if p.conductance == g and (p.measured > 0) == gains]
        axes.plot(
            [p.diameter for p in mine], [p.load for p in mine], mark, color=color,
            markerfacecolor=color if gains else "white", markersize=3.5, markeredgewidth=0.7,
        )  # fmt: skip
    d, load = np.meshgrid(np.geomspace(0.28, 9.2, 120), np.geomspace(0.28, 57, 120))
    axes.contour(
        d, load, steady_sensitivity(d, load, g), levels=[0.0], colors="black", linewidths=0.9
    )
    axes.set_yscale("log")
    axes.set_yticks([0.5, 1, 2, 5, 10, 20, 50], ["0.5", "1", "2", "5", "10", "20", "50"])


def add_legends(figure: Figure) -> None:
    """Put one legend under each row."""
    line = [
        Line2D([], [], color=color, linestyle=pattern, marker=mark, markersize=3, label=NAMES[g])
        for g, (color, pattern, mark) in LOOKS.items()
    ]
    kinds = [
        Line2D([], [], color="0.3", linestyle="", marker="o", markersize=3, label="steady"),
        Line2D([], [], color="0.3", linestyle="", marker="o", markersize=3, label="brief EPSP",
               markerfacecolor="white"),
    ]  # fmt: skip
    figure.legend(handles=line, loc="center", bbox_to_anchor=(0.55, 0.556), ncols=3,
                  columnspacing=1.2, handlelength=2.6, handletextpad=0.4)  # fmt: skip
    figure.legend(handles=kinds, loc="center", bbox_to_anchor=(0.55, 0.532), ncols=2,
                  columnspacing=1.6, handletextpad=0.4)  # fmt: skip
    signs = [
        Line2D([], [], color=HELPS, linestyle="", marker="^", markersize=3.5, label="+20 % helps"),
        Line2D([], [], color=HURTS, linestyle="", marker="v", markersize=3.5, label="+20 % hurts",
               markerfacecolor="white"),
        Line2D([], [], color="black", linewidth=0.9, label="theory: no change"),
    ]  # fmt: skip
    figure.legend(handles=signs, loc="center", bbox_to_anchor=(0.55, 0.054), ncols=3,
                  columnspacing=1.0, handletextpad=0.4)  # fmt: skip
    figure.text(0.55, 0.018, "lines: closed form of the cable; points: simulated", ha="center",
                fontsize=6)  # fmt: skip


def save(figure: Figure, folder: Path, name: str) -> None:
    """Write the figure as SVG and PNG, without a date."""
    figure.savefig(folder / f"{name}.svg", metadata={"Date": None})
    figure.savefig(folder / f"{name}.png", metadata={"Software": None})


def told(points: Sequence[Point]) -> str:
    """Return in words how far points and theory are apart."""
    steady = [p for p in points if p.panel == "sensitivity" and p.time_course == STEADY.name]
    cells = [p for p in points if p.panel == "map"]
    wrong = [p for p in cells if (p.measured > 0) != (p.theory > 0)]
    off = max(abs(p.measured - p.theory) for p in steady)
    lines = [
        f"steady sensitivities: {len(steady)} points, at most {off:.4f} from the closed form",
        f"signs of +20 %: {len(cells)} cells, {len(wrong)} on the other side of the border",
        f"best diameter for a weak input, {LENGTH:g} um on {CELL:g} nS: {best_diameter(CELL):.3f} "
        f"um; on {LONE:g} nS: {best_diameter(LONE):.3f} um",
    ]
    lines += [
        f"2 um on {CELL:g} nS, {place}, {g:g} nS: whole {whole:+.2f} %, on the path {path:+.2f} %, "
        f"beyond {beyond:+.2f} %"
        for place, g, whole, path, beyond in parts()
    ]
    return "\n".join(lines)


def main(arguments: Sequence[str] | None = None) -> None:
    """Measure, compare and draw."""
    parser = argparse.ArgumentParser(description=__doc__.splitlines()[0])
    parser.add_argument(
        "--out", type=Path, default=Path("widening-results"),
        help="folder for points.csv and the figure; files of the same names are replaced",
    )  # fmt: skip
    parser.add_argument(
        "--points", type=Path, help="draw these points instead of measuring (a points.csv)"
    )
    chosen = parser.parse_args(arguments)
    if chosen.points:
        points = read_points(chosen.points)
    else:
        points = [*curve_points(CELL), *curve_points(LONE), *map_points()]
    print(told(points))
    chosen.out.mkdir(parents=True, exist_ok=True)
    write_points(chosen.out / "points.csv", points)
    with mpl.rc_context(STYLE):
        save(figure_of(points), chosen.out, "widening")
    print(f"written: {chosen.out}")


if __name__ == "__main__":
    main()
