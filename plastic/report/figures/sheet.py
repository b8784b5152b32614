"""A sheet: panels of equal size laid out in millimetres, with heading, axis names and legend.

Every distance is known before anything is drawn, so nothing overlaps and nothing is measured twice.
"""

from __future__ import annotations

import math
from collections.abc import Collection, Sequence
from dataclasses import dataclass
from typing import Any

from matplotlib.axes import Axes
from matplotlib.figure import Figure

from plastic.report.figures.style import (
    SMALLEST,
    canvas,
    height_of,
    on_paper,
    size_of,
    text_width,
    wrapped,
)

#: mm
TICKS_X, TICKS_Y, NAME, EDGE, RIGHT = 4.0, 7.5, 3.8, 1.2, 4.0


@dataclass(frozen=True)
class Sheet:
    """A figure with its panels.

    Attributes
    ----------
    figure : Figure
    panels : list of Axes
        One for each title, in order.
    """

    figure: Figure
    panels: list[Axes]


@dataclass(frozen=True)
class Plan:
    """What stands around the panels, and how large they are.

    Attributes
    ----------
    heading, x, y : str
        Sentence over the sheet, names of the axes.
    names : sequence of str
        What the legend lists.
    height : float, mm
        Of one panel.
    narrow, wide : int
        Most panels in a row at 85 and at 180 mm.
    same_x, same_y : bool
        Whether all panels share the axis.
    apart : collection of int
        Panels that keep a vertical axis of their own where the others share one.
    left : float, mm
        Room for the tick labels of the vertical axis.
    """

    heading: str
    x: str
    y: str
    names: Sequence[str] = ()
    height: float = 24.0
    narrow: int = 2
    wide: int = 4
    same_x: bool = True
    same_y: bool = True
    apart: Collection[int] = ()
    left: float = TICKS_Y

    def sheet(self, width: float, titles: Sequence[str]) -> Sheet:
        """Return the sheet with one panel for each title, `width` mm wide."""
        columns = min(len(titles), self.narrow if width < 120 else self.wide)
        own_y = bool(self.apart) or not self.same_y
        gap = self.left + 2.0 if own_y else 3.2
        rows = math.ceil(len(titles) / columns)
        named = wrapped(self.y, rows * self.height + (rows - 1) * TICKS_X + 4.0)
        left = EDGE + height_of(named) * 1.2 + self.left
        wide = (width - left - RIGHT - gap * (columns - 1)) / columns
        shown = [wrapped(title, wide) for title in titles]
        over = [
            max(height_of(title) for title in shown[k : k + columns]) + 1.4
            for k in range(0, len(shown), columns)
        ]
        told = wrapped(self.heading, width - 2 * EDGE)
        under = self._legend_height(width) + (NAME if self.x else 0) + EDGE
        body = len(over) * (self.height + TICKS_X) + sum(over)
        figure = canvas(width, under + body + height_of(told) + EDGE + 1.0)
        panels: list[Axes] = []
        for k, title in enumerate(shown):
            row, column = divmod(k, columns)
            above = row * (self.height + TICKS_X) + sum(over[: row + 1])
            box = (left + column * (wide + gap), under + body - above - self.height)
            axes = self._panel(figure, (*box, wide, self.height), panels)
            axes.set_title(title)
            axes.tick_params(
                labelbottom=k + columns >= len(titles) or not self.same_x,
                labelleft=column == 0 or own_y,
            )
            panels.append(axes)
        middle = ((left + width - RIGHT) / 2, under + TICKS_X + (body - TICKS_X - over[0]) / 2)
        self._written(figure, told, named, middle)
        return Sheet(figure, panels)

    def _panel(self, figure: Figure, box: Sequence[float], before: Sequence[Axes]) -> Axes:
        """Return an empty panel at left, bottom, width, height in mm; `before` are those there."""
        alike = [axes for k, axes in enumerate(before) if k not in self.apart]
        shares_y = self.same_y and len(before) not in self.apart
        return figure.add_axes(
            on_paper(figure, box),
            sharex=before[0] if before and self.same_x else None,
            sharey=alike[0] if alike and shares_y else None,
        )

    def _written(self, figure: Figure, told: str, named: str, middle: tuple[float, float]) -> None:
        """Write the heading and the names of the axes; `middle` of the panels in mm."""
        width, height = size_of(figure)
        figure.text(0.5, 1 - EDGE / height, told, ha="center", va="top", fontsize=7)
        place = self._legend_height(width) + EDGE
        figure.text(middle[0] / width, place / height, self.x, ha="center", va="bottom")
        figure.text(
            EDGE / width, middle[1] / height, named,
            ha="left", va="center", ma="center", rotation=90,
        )  # fmt: skip

    def legend(self, sheet: Sheet, width: float) -> None:
        """Put the legend at the foot of the sheet; each name once, from any panel."""
        found: dict[str, Any] = {}
        for axes in sheet.panels:
            for handle, name in zip(*axes.get_legend_handles_labels(), strict=True):
                found.setdefault(name, handle)
        names = [name for name in self.names if name in found]
        if names:
            sheet.figure.legend(
                [found[name] for name in names], names, loc="lower center",
                bbox_to_anchor=(0.5, 0.0), ncols=self._columns(width), borderaxespad=0.3,
                columnspacing=1.2, labelspacing=0.25, borderpad=0.2,
            )  # fmt: skip

    def _columns(self, width: float) -> int:
        longest = max(text_width(name, SMALLEST) for name in self.names)
        return max(1, min(len(self.names), int((width - 2) / (longest + 12.0))))

    def _legend_height(self, width: float) -> float:
        if not self.names:
            return 0.0
        return 2.0 + math.ceil(len(self.names) / self._columns(width)) * 3.1
