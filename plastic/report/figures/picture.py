"""A picture is its numbers: drawn from the rows written beside it, and from nothing else."""

from __future__ import annotations

import csv
import re
from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass
from pathlib import Path

from matplotlib.backends.backend_agg import FigureCanvasAgg
from matplotlib.figure import Figure

from plastic.report.figures.style import DPI, WIDTHS, style

Row = Mapping[str, float | str]
Rows = Sequence[Row]


@dataclass(frozen=True)
class Picture:
    """One figure before it is drawn.

    Attributes
    ----------
    name : str
        Start of the file names.
    rows : sequence of mappings
        Every number that is plotted, one observation a row; the keys say quantity and unit.
    draw : function of (rows, width in mm) to Figure
    """

    name: str
    rows: Rows
    draw: Callable[[Rows, float], Figure]

    def figure(self, width: float) -> Figure:
        """Return the figure at `width` mm, in our style."""
        with style():
            figure = self.draw(self.rows, width)
            FigureCanvasAgg(figure)
            return figure

    def save(self, folder: Path) -> list[Path]:
        """Write SVG and PNG at each width, and the CSV; return the paths."""
        stem = folder / file_name(self.name)
        paths = [stem.with_name(f"{stem.name}.csv")]
        write_rows(paths[0], self.rows)
        for width in WIDTHS:
            with style():
                figure = self.figure(width)
                for kind, options in (
                    ("png", {"dpi": DPI}),
                    ("svg", {"metadata": {"Date": None}}),
                ):
                    path = stem.with_name(f"{stem.name}-{width}mm.{kind}")
                    figure.savefig(path, format=kind, **options)
                    paths.append(path)
        return paths


def file_name(name: str) -> str:
    """Return a name without signs that a file system or a shell would mind."""
    return re.sub(r"[^\w.-]+", "_", name).strip("_")


def write_rows(path: Path, rows: Rows) -> None:
    """Write rows as CSV with a header; numbers in full, unknown ones as nan."""
    keys = list(dict.fromkeys(key for row in rows for key in row))
    with path.open("w", newline="", encoding="utf-8") as file:
        writer = csv.DictWriter(file, keys, lineterminator="\n")
        writer.writeheader()
        writer.writerows(rows)


def numbers(rows: Rows, key: str) -> list[float]:
    """Return one column as floats."""
    return [float(row[key]) for row in rows]


def where(rows: Rows, **wanted: str) -> list[Row]:
    """Return the rows whose text columns are as wanted."""
    return [row for row in rows if all(row[key] == value for key, value in wanted.items())]


def labels(rows: Rows, key: str) -> list[str]:
    """Return the different texts of a column, in order of appearance."""
    return list(dict.fromkeys(str(row[key]) for row in rows))
