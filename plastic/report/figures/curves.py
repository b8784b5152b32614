"""Learning curves: firing probability or EPSP against repeats, one panel per route."""

from __future__ import annotations

from collections.abc import Collection, Mapping, Sequence

import numpy as np
import xarray as xr
from matplotlib.axes import Axes
from matplotlib.figure import Figure
from numpy.typing import NDArray

from plastic.report.arms import COMPLETE
from plastic.report.counts import simulated
from plastic.report.figures.picture import Picture, Row, Rows, labels, numbers, where
from plastic.report.figures.sheet import Plan
from plastic.report.figures.style import THRESHOLD, line, marks, words
from plastic.report.flags import integers, meanings
from plastic.report.grid import ILLUSTRATIVE
from plastic.report.pathways import criterion_input

Floats = NDArray[np.float64]

#: variable -> (word in the file name, what the y axis says, what the heading says)
CURVES: Mapping[str, tuple[str, str, str]] = {
    "fires_alone_induced": (
        "induced", "share of cells at criterion",
        "by the change induced so far, once it will all be expressed",
    ),
    "fires_alone": (
        "expressed", "share of cells at criterion",
        "by the change expressed at that time",
    ),
    "epsp_peak": (
        "epsp", "EPSP of {input} at the soma (mV)", "by the change expressed at that time",
    ),
}  # fmt: skip


def learning_curve(
    dataset: xr.Dataset, protocol: str, variable: str, *, illustrative: Collection[str] = ()
) -> Picture:
    """Return the learning curves of one protocol.

    Firing probabilities lie near 0 or near 1, so that their median says little: drawn is the share
    of cells in which they are at the criterion.

    Parameters
    ----------
    dataset : Dataset
        In the schema of results.
    protocol : str
    variable : str
        A key of `CURVES`.
    illustrative : collection of str
        Rules to mark as illustrative.
    """
    name = criterion_input(dataset)
    word, axis, meaning = CURVES[variable]
    rows = _rows(dataset, protocol, variable, name)
    probability = variable != "epsp_peak"
    cells = simulated(dataset.sizes["cell"])
    drawn = (
        f"share of {cells} at criterion ({words(name)} alone fires the cell with probability ≥ "
        f"{float(dataset.attrs['alone_fires']):g})"
        if probability
        else f"median and quartiles of {cells}"
    )
    told = f"{words(protocol)}: {drawn}, {meaning}"
    names = [*rule_names(labels(rows, "rule"), illustrative), level(dataset, variable)[1]]
    plan = Plan(
        told + scales(probability) + told_illustrative(labels(rows, "rule"), illustrative),
        "repeats of the protocol", axis.format(input=words(name)), names, same_y=probability,
    )  # fmt: skip

    def draw(rows: Rows, width: float) -> Figure:
        return _draw(rows, width, plan)

    return Picture(f"learning_curve_{word}-{protocol}", rows, draw)


def rule_names(rules: Sequence[str], illustrative: Collection[str]) -> list[str]:
    """Return the rules as the legend says them, the illustrative ones with their sign."""
    return [f"{words(r)} {ILLUSTRATIVE}" if r in illustrative else words(r) for r in rules]


def told_illustrative(rules: Sequence[str], illustrative: Collection[str]) -> str:
    """Return what the sign means, for a heading; nothing when no rule carries it."""
    return f"; {ILLUSTRATIVE}\u00a0illustrative" if set(rules) & set(illustrative) else ""


def scales(same: bool) -> str:
    """Return the warning that panels differ in scale; nothing when they do not."""
    return "" if same else "; vertical scales differ"


def level(dataset: xr.Dataset, variable: str) -> tuple[float, str]:
    """Return where the threshold line of a variable stands, and what it is."""
    if variable == "epsp_peak":
        above = np.asarray(dataset["threshold"].values, dtype=float) - float(dataset.attrs["rest"])
        return float(np.median(above)), "spike threshold above rest, median cell"
    return 0.5, "half of the cells"


def is_complete(dataset: xr.Dataset, rule: str, route: str, protocol: str) -> bool:
    """Return whether an arm was run to its end."""
    flag = dataset["status"].sel(rule=rule, route=route, protocol=protocol)
    return meanings(dataset["status"]).get(int(integers(flag))) == COMPLETE


def quartiles(values: Floats) -> Floats:
    """Return lower quartile, median and upper quartile over the first axis; NaN of none."""
    known = np.isfinite(values).any(axis=0)
    out = np.full((3, *values.shape[1:]), np.nan)
    out[:, known] = np.nanquantile(values[:, known], [0.25, 0.5, 0.75], axis=0)
    return out


def _rows(dataset: xr.Dataset, protocol: str, variable: str, name: str) -> list[Row]:
    at, repeats = _during(dataset, protocol)
    threshold, meaning = level(dataset, variable)
    found: list[Row] = []
    for route in map(str, dataset["route"].values):
        for rule in map(str, dataset["rule"].values):
            if not is_complete(dataset, rule, route, protocol):
                continue
            arm = dataset[variable].sel(rule=rule, route=route, protocol=protocol, input=name)
            values = np.asarray(arm.transpose("cell", "reading").values, dtype=float)[:, at]
            low, median, high = quartiles(values)
            found += [
                {
                    "protocol": protocol, "route": route, "rule": rule, "repeats": float(r),
                    "lower_quartile": float(a), "median": float(m), "upper_quartile": float(b),
                    "threshold_line": threshold, "threshold_is": meaning, **share,
                }
                for r, a, m, b, share in zip(
                    repeats, low, median, high, _shares(dataset, variable, values), strict=True
                )
            ]  # fmt: skip
    return found


def _shares(dataset: xr.Dataset, variable: str, values: Floats) -> list[Row]:
    """Return at each reading which share of the cells is at the criterion; nothing of an EPSP."""
    if variable == "epsp_peak":
        return [{}] * values.shape[1]
    criterion = float(dataset.attrs["alone_fires"])
    shares = np.mean(values >= criterion, axis=0)
    return [{"criterion": criterion, "share_at_criterion": float(share)} for share in shares]


def _during(dataset: xr.Dataset, protocol: str) -> tuple[slice, Floats]:
    """Return the readings from the end of baseline to the last repeat, and their repeats."""
    repeats = np.asarray(dataset["repeats"].sel(protocol=protocol).values, dtype=float)
    silent = np.flatnonzero(repeats == 0)
    first = int(silent[-1]) if len(silent) else 0
    last = int(np.argmax(repeats == np.nanmax(repeats)))
    at = slice(first, max(first, last) + 1)
    return at, repeats[at]


def _draw(rows: Rows, width: float, plan: Plan) -> Figure:
    routes, rules = labels(rows, "route"), labels(rows, "rule")
    sheet = plan.sheet(width, [words(route) for route in routes])
    for axes, route in zip(sheet.panels, routes, strict=True):
        for k, rule in enumerate(rules):
            _curve(axes, where(rows, route=route, rule=rule), k, plan.names[k])
        axes.axhline(float(rows[0]["threshold_line"]), label=plan.names[-1], **THRESHOLD)
        if plan.same_y:
            axes.set_ylim(-0.04, 1.04)
    plan.legend(sheet, width)
    return sheet.figure


def _curve(axes: Axes, rows: Rows, k: int, label: str) -> None:
    if not rows:
        return
    x, look = numbers(rows, "repeats"), line(k)
    drawn = "share_at_criterion" if "share_at_criterion" in rows[0] else "median"
    if drawn == "median":
        axes.fill_between(
            x, numbers(rows, "lower_quartile"), numbers(rows, "upper_quartile"),
            color=look.color, alpha=0.18, linewidth=0,
        )  # fmt: skip
    axes.plot(
        x, numbers(rows, drawn), color=look.color, linestyle=look.linestyle,
        marker=look.marker, markevery=marks(x, k), label=label,
    )  # fmt: skip
