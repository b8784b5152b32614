"""Before and after: what a rig would measure at the soma, per route and rule."""

from __future__ import annotations

from collections.abc import Collection, Mapping, Sequence

import numpy as np
import xarray as xr
from matplotlib.axes import Axes
from matplotlib.figure import Figure

from plastic.report.counts import simulated
from plastic.report.figures.curves import (
    is_complete,
    quartiles,
    rule_names,
    told_illustrative,
)
from plastic.report.figures.picture import Picture, Row, Rows, labels, where
from plastic.report.figures.sheet import Plan
from plastic.report.figures.style import SMALLEST, line, words, wrapped
from plastic.report.pathways import criterion_input, last_values

#: least span of an axis; of a rate that is 0 everywhere, not its rounding errors
LEAST, LEAST_RATE = 0.02, 0.1
#: variable -> title of its panel
MEASURES: Mapping[str, str] = {
    "epsp_peak": "mean EPSP (mV)",
    "paired_pulse_ratio": "paired-pulse ratio",
    "inverse_cv2": "CV⁻²",
    "failure_rate": "failure rate",
    "epsp_rise": "rise time, 20-80 % (ms)",
    "epsp_half_width": "half-width (ms)",
}


def before_after(
    dataset: xr.Dataset, protocol: str, *, illustrative: Collection[str] = ()
) -> Picture:
    """Return what a rig measures at the end of baseline and at the last reading."""
    name = criterion_input(dataset)
    rows: list[Row] = []
    for route in map(str, dataset["route"].values):
        for rule in map(str, dataset["rule"].values):
            if is_complete(dataset, rule, route, protocol):
                rows += [_row(dataset, rule, route, protocol, name, key) for key in MEASURES]
    told = (
        f"{words(protocol)}, {words(name)}: end of baseline (open, dotted) and last reading "
        f"(filled); median and quartiles of {simulated(dataset.sizes['cell'])}"
    )

    names = rule_names(labels(rows, "rule"), illustrative)
    told += told_illustrative(labels(rows, "rule"), illustrative)

    def draw(rows: Rows, width: float) -> Figure:
        return _draw(rows, width, told, names)

    return Picture(f"before_after-{protocol}", rows, draw)


def _row(dataset: xr.Dataset, rule: str, route: str, protocol: str, name: str, key: str) -> Row:
    arm = dataset[key].sel(rule=rule, route=route, protocol=protocol, input=name)
    time = np.asarray(dataset["time"].sel(protocol=protocol).values, dtype=float)
    before = arm.isel(reading=np.flatnonzero(time <= 0))
    found: dict[str, float | str] = {
        "protocol": protocol, "route": route, "rule": rule, "measure": MEASURES[key],
    }  # fmt: skip
    for when, part in (("before", before), ("after", arm)):
        low, median, high = quartiles(last_values(part))
        found[f"{when}_lower_quartile"] = float(low)
        found[f"{when}_median"] = float(median)
        found[f"{when}_upper_quartile"] = float(high)
    return found


def _draw(rows: Rows, width: float, told: str, names: Sequence[str]) -> Figure:
    routes, rules = labels(rows, "route"), labels(rows, "rule")
    room = 21.0 if width < 120 else 27.0
    places = [wrapped(words(route), room, SMALLEST) for route in routes]
    step = max(1.6 * len(rules) + 1.6, 2.7 * max(name.count("\n") + 1 for name in places))
    plan = Plan(told, "", "", names, height=step * len(routes), wide=3, left=room + 1, same_x=False)
    sheet = plan.sheet(width, list(MEASURES.values()))
    for axes, measure in zip(sheet.panels, MEASURES.values(), strict=True):
        for y, route in enumerate(routes):
            for k, rule in enumerate(rules):
                offset = (k - (len(rules) - 1) / 2) * 0.76 / max(len(rules), 2)
                for row in where(rows, route=route, rule=rule, measure=measure):
                    _dumbbell(axes, row, y + offset, k, names[k])
            if y:
                axes.axhline(y - 0.5, color="0.85", linewidth=0.5)
        axes.tick_params(axis="y", length=0)
        _spread_out(axes, LEAST_RATE if measure == MEASURES["failure_rate"] else LEAST)
        axes.locator_params(axis="x", nbins=3 if width < 120 else 4)
    sheet.panels[0].set_yticks(range(len(routes)), places)
    sheet.panels[0].set_ylim(len(routes) - 0.5, -0.5)
    plan.legend(sheet, width)
    return sheet.figure


def _spread_out(axes: Axes, least: float) -> None:
    """Widen an axis on which nothing differs, lest rounding errors look like findings."""
    low, high = axes.dataLim.intervalx  # not the view, which is never narrow around 0
    middle = (low + high) / 2
    least = max(least, LEAST * abs(middle))
    if high - low < least:
        start = middle - least / 2
        if low >= 0:  # a rate or a size has no negative side
            start = max(start, -0.05 * least)
        axes.set_xlim(start, start + least)


def _dumbbell(axes: Axes, row: Row, y: float, k: int, label: str) -> None:
    look = line(k)
    for when, filled in (("before", False), ("after", True)):
        low, median, high = (
            float(row[f"{when}_{part}"]) for part in ("lower_quartile", "median", "upper_quartile")
        )
        axes.plot([low, high], [y, y], "-" if filled else ":", color=look.color, linewidth=0.8)
        axes.plot(
            [median], [y], color=look.color, marker=look.marker, linestyle="",
            markersize=3.4, markerfacecolor=look.color if filled else "white",
            markeredgewidth=0.8, label=label if filled else None,
        )  # fmt: skip
