"""The EPSP as percent of baseline over time: per route, and beside its controls."""

from __future__ import annotations

from collections.abc import Collection, Sequence

import numpy as np
import xarray as xr
from matplotlib.axes import Axes
from matplotlib.figure import Figure

from plastic.report.counts import simulated
from plastic.report.figures.curves import (
    is_complete,
    quartiles,
    rule_names,
    scales,
    told_illustrative,
)
from plastic.report.figures.picture import Picture, Row, Rows, labels, numbers, where
from plastic.report.figures.sheet import Plan
from plastic.report.figures.style import SHADE, THRESHOLD, line, marks, words
from plastic.report.pathways import criterion_input, parent_of

TIME = "time from the start of the induction (min)"
AXIS = "EPSP of {input} (% of baseline)"
AXIS_OF_ALL = "EPSP (% of baseline)"


def time_course(
    dataset: xr.Dataset, protocol: str, *, illustrative: Collection[str] = ()
) -> Picture:
    """Return the EPSP of every learning input over time: a panel per route, a line per rule."""
    name = criterion_input(dataset)
    rows: list[Row] = []
    for route in map(str, dataset["route"].values):
        for rule in map(str, dataset["rule"].values):
            for other in map(str, dataset["input"].values):
                rows += _course(dataset, rule, route, protocol, other)
    rules = labels(rows, "rule")
    told = (
        f"{words(protocol)}: median and quartiles of {simulated(dataset.sizes['cell'])}; "
        f"the induction is shaded{_others_told(dataset, name)}{scales(False)}"
        f"{told_illustrative(rules, illustrative)}"
    )
    names = rule_names(rules, illustrative)
    axis = AXIS_OF_ALL if len(labels(rows, "input")) > 1 else AXIS.format(input=words(name))
    plan = Plan(told, TIME, axis, names, same_y=False)

    def draw(rows: Rows, width: float) -> Figure:
        routes = labels(rows, "route")
        sheet = plan.sheet(width, [words(route) for route in routes])
        for axes, route in zip(sheet.panels, routes, strict=True):
            _frame(axes, rows)
            for k, rule in enumerate(rules):
                mine = where(rows, route=route, rule=rule)
                _line(axes, where(mine, input=name), k, names[k])
                for other in labels(mine, "input"):
                    if other != name:
                        _faint(axes, where(mine, input=other), k)
        plan.legend(sheet, width)
        return sheet.figure

    return Picture(f"time_course-{protocol}", rows, draw)


def controls(dataset: xr.Dataset, protocol: str, *, illustrative: Collection[str] = ()) -> Picture:
    """Return the EPSP over time beside the controls: a panel per rule, on the controls' route."""
    name, family = criterion_input(dataset), family_of(dataset, protocol)
    route = _controls_route(dataset, family[1:])
    rows: list[Row] = []
    for rule in map(str, dataset["rule"].values):
        for member in family:
            rows += _course(dataset, rule, route, member, name)
    rules = labels(rows, "rule")
    told = (
        f"{words(protocol)} and its controls, by {words(route)}: median and quartiles of "
        f"{simulated(dataset.sizes['cell'])}; the induction is shaded{scales(False)}"
        f"{told_illustrative(rules, illustrative)}"
    )
    names = [words(member.removeprefix(f"{protocol}, ")) for member in labels(rows, "protocol")]
    plan = Plan(told, TIME, AXIS.format(input=words(name)), names, height=28, wide=3, same_y=False)

    def draw(rows: Rows, width: float) -> Figure:
        sheet = plan.sheet(width, rule_names(rules, illustrative))
        for axes, rule in zip(sheet.panels, rules, strict=True):
            _frame(axes, rows)
            for k, member in enumerate(labels(rows, "protocol")):
                _line(axes, where(rows, rule=rule, protocol=member), k, names[k])
        plan.legend(sheet, width)
        return sheet.figure

    return Picture(f"controls-{protocol}", rows, draw)


def family_of(dataset: xr.Dataset, protocol: str) -> list[str]:
    """Return a protocol and its controls."""
    names = [str(label) for label in dataset["protocol"].values]
    kinds = [str(kind) for kind in dataset["control"].values]
    return [n for n, kind in zip(names, kinds, strict=True) if parent_of(n, kind) == protocol]


def _controls_route(dataset: xr.Dataset, controls: Sequence[str]) -> str:
    """Return the route on which the controls were run."""
    routes = [str(label) for label in dataset["route"].values]
    rules = [str(label) for label in dataset["rule"].values]
    run = [
        route for route in routes for rule in rules for member in controls
        if is_complete(dataset, rule, route, member)
    ]  # fmt: skip
    return (run or routes)[0]


def _course(dataset: xr.Dataset, rule: str, route: str, protocol: str, name: str) -> list[Row]:
    if not is_complete(dataset, rule, route, protocol):
        return []
    arm = dataset["epsp_percent_of_baseline"].sel(
        rule=rule, route=route, protocol=protocol, input=name
    )
    values = np.asarray(arm.transpose("cell", "reading").values, dtype=float)
    time = np.asarray(dataset["time"].sel(protocol=protocol).values, dtype=float)
    edges = {
        key: float(dataset[key].sel(protocol=protocol, epoch="induction"))
        for key in ("epoch_start", "epoch_end")
    }
    return [
        {
            "protocol": protocol, "route": route, "rule": rule, "input": name,
            "time_min": float(t), "lower_quartile_percent": float(low),
            "median_percent": float(median), "upper_quartile_percent": float(high),
            "induction_start_min": edges["epoch_start"], "induction_end_min": edges["epoch_end"],
        }
        for t, low, median, high in zip(time, *quartiles(values), strict=True)
        if np.isfinite(t)
    ]  # fmt: skip


def _others_told(dataset: xr.Dataset, name: str) -> str:
    others = [words(str(label)) for label in dataset["input"].values if str(label) != name]
    if not others:
        return ""
    return f"; lines with marks: {words(name)}; thin lines without marks: {', '.join(others)}"


def _frame(axes: Axes, rows: Rows) -> None:
    start, end = (float(rows[0][f"induction_{edge}_min"]) for edge in ("start", "end"))
    axes.axvspan(start, end, color=SHADE, linewidth=0)
    axes.axhline(100, **{**THRESHOLD, "linewidth": 0.5})
    axes.locator_params(axis="y", nbins=5)


def _line(axes: Axes, rows: Rows, k: int, label: str) -> None:
    if not rows:
        return
    x, look = numbers(rows, "time_min"), line(k)
    axes.fill_between(
        x, numbers(rows, "lower_quartile_percent"), numbers(rows, "upper_quartile_percent"),
        color=look.color, alpha=0.16, linewidth=0,
    )  # fmt: skip
    axes.plot(
        x, numbers(rows, "median_percent"), color=look.color, linestyle=look.linestyle,
        marker=look.marker, markevery=marks(x, k), label=label,
    )  # fmt: skip


def _faint(axes: Axes, rows: Rows, k: int) -> None:
    look = line(k)
    axes.plot(
        numbers(rows, "time_min"), numbers(rows, "median_percent"), color=look.color,
        linestyle=look.linestyle, linewidth=0.6,
    )  # fmt: skip
