"""How every figure looks: sizes on paper, fonts, and lines that are told apart in grey."""

from __future__ import annotations

import functools
from collections.abc import Iterator, Sequence
from contextlib import contextmanager
from dataclasses import dataclass
from typing import Any

import matplotlib as mpl
import numpy as np
from matplotlib.figure import Figure
from matplotlib.font_manager import FontProperties
from matplotlib.textpath import text_to_path

MM = 1 / 25.4
MM_PER_PT = 25.4 / 72
#: mm of height of one line of text per pt of its size
LINE_HEIGHT = 1.22 * MM_PER_PT
#: mm; one and two columns of a journal
WIDTHS = (85, 180)
DPI = 300
#: pt, at final size
SMALLEST = 6.0

_RC: dict[Any, Any] = {
    "font.family": "DejaVu Sans",
    "font.size": 7,
    "axes.titlesize": 7,
    "axes.labelsize": 7,
    "figure.titlesize": 7,
    "figure.labelsize": 7,
    "xtick.labelsize": SMALLEST,
    "ytick.labelsize": SMALLEST,
    "legend.fontsize": SMALLEST,
    "legend.frameon": False,
    "legend.handlelength": 3.2,
    "axes.linewidth": 0.6,
    "axes.formatter.useoffset": False,
    "axes.formatter.limits": (-4, 6),
    "axes.spines.top": False,
    "axes.spines.right": False,
    "axes.titlepad": 3,
    "xtick.major.width": 0.6,
    "ytick.major.width": 0.6,
    "xtick.major.size": 2.5,
    "ytick.major.size": 2.5,
    "lines.linewidth": 1.1,
    "lines.markersize": 3.2,
    "hatch.linewidth": 0.4,
    "svg.fonttype": "none",
    "svg.hashsalt": "plastic",
}


@dataclass(frozen=True)
class Line:
    """How one series is drawn: colour for the screen, pattern and marker for print in grey."""

    color: str
    linestyle: str | tuple[int, tuple[float, ...]]
    marker: str


#: colours of Okabe & Ito's set for the colour-blind, in an order of alternating lightness
LINES = (
    Line("#000000", "-", "o"),
    Line("#D55E00", "--", "s"),
    Line("#56B4E9", "-.", "^"),
    Line("#009E73", (0, (1, 1.2)), "D"),
    Line("#CC79A7", (0, (6, 1.5, 1, 1.5, 1, 1.5)), "v"),
    Line("#0072B2", (0, (8, 2)), "P"),
    Line("#E69F00", (0, (3, 1, 1, 1)), "X"),
)
SHADE = "0.90"
THRESHOLD: dict[str, Any] = {"color": "0.35", "linewidth": 0.8, "linestyle": (0, (4, 2))}


def line(k: int) -> Line:
    """Return the style of series `k`; after seven they start again."""
    return LINES[k % len(LINES)]


@contextmanager
def style() -> Iterator[None]:
    """Hold our settings while a figure is built and saved."""
    with mpl.rc_context(_RC):
        yield


def canvas(width: float, height: float) -> Figure:
    """Return an empty figure.

    Parameters
    ----------
    width, height : float, mm
    """
    return Figure(figsize=(width * MM, height * MM), dpi=DPI)


def size_of(figure: Figure) -> tuple[float, float]:
    """Return width and height of a figure, mm."""
    width, height = figure.get_size_inches()
    return float(width) / MM, float(height) / MM


def on_paper(figure: Figure, box: Sequence[float]) -> tuple[float, float, float, float]:
    """Return left, bottom, width, height given in mm as fractions of the figure."""
    width, height = size_of(figure)
    return box[0] / width, box[1] / height, box[2] / width, box[3] / height


def words(label: str) -> str:
    """Return a label as people write it."""
    return label.replace("_", " ").replace("+", " + ")


@functools.cache
def text_width(text: str, size: float) -> float:
    """Return how wide `text` is on paper, mm, at `size` pt."""
    font = FontProperties(family="DejaVu Sans", size=size)
    width, _, _ = text_to_path.get_text_width_height_descent(text, font, False)
    return float(width) * MM_PER_PT


def wrapped(text: str, width: float, size: float = 7.0) -> str:
    """Return `text` in lines of at most `width` mm at `size` pt, broken at blanks only."""
    lines = [""]
    for word in text.split(" "):
        longer = f"{lines[-1]} {word}".strip()
        if lines[-1] and text_width(longer, size) > width:
            lines.append(word)
        else:
            lines[-1] = longer
    return "\n".join(lines)


def height_of(text: str, size: float = 7.0) -> float:
    """Return how high `text` is on paper, mm."""
    return (text.count("\n") + 1) * LINE_HEIGHT * size if text else 0.0


def marks(x: Sequence[float], k: int, count: int = 6) -> list[int]:
    """Return where series `k` carries its marks: evenly along the axis, each series elsewhere."""
    values = np.asarray(x, dtype=float)
    step = (values[-1] - values[0]) / count
    at = values[0] + step * (np.arange(count) + 0.15 + 0.23 * (k % 4))
    return sorted({int(np.argmin(np.abs(values - place))) for place in at})
