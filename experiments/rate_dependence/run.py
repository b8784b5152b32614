"""Does a learning rule reproduce how plasticity depends on the rate of pairing?

Imposes every rule on the spike trains of the published fits, compares the change of the weight
with the data of `data.csv` and writes a table and two figures. Uses the public door of plastic
only. Run it from anywhere:

    python experiments/rate_dependence/run.py --out rate_dependence-results
"""

from __future__ import annotations

import argparse
import csv
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from pathlib import Path

import matplotlib as mpl
import numpy as np
from matplotlib.axes import Axes
from matplotlib.figure import Figure
from numpy.typing import NDArray

import plastic

Array = NDArray[np.float64]
Rules = Mapping[str, plastic.Rule]
HERE = Path(__file__).parent

CONTINUOUS = "60 continuous pairs"
BURSTS = "15 bursts of 5 pairs"
#: E that Pfister & Gerstner 2006 print for their fits to these data (from memory, high)
PUBLISHED = {"triplet_timing visual_minimal": 0.34, "triplet_timing visual_full": 0.33}
BEST_PAIR = "pair_timing best amplitudes"


@dataclass(frozen=True)
class Point:
    """One measured point: lag (ms) and rate (Hz) of the pairs, change (fraction) and its SEM."""

    lag: float
    rate: float
    mean: float
    sem: float


def read_points(path: Path = HERE / "data.csv") -> list[Point]:
    """Return the measured points in the order of the file."""
    with path.open(newline="", encoding="utf-8") as file:
        return [
            Point(float(r["lag_ms"]), float(r["rate_hz"]), float(r["mean"]), float(r["sem"]))
            for r in csv.DictReader(file)
        ]


def trains(lag: float, rate: float, schedule: str = CONTINUOUS) -> tuple[Array, Array]:
    """Return pre- and postsynaptic spike times in ms.

    Continuous: 60 pairs at the rate. Bursts: 15 bursts of 5 pairs, one burst every 10 s, but 50
    single pairs at rates below one burst's worth (0.1 Hz), as in the slice.
    """
    period = 1000.0 / rate
    if schedule == CONTINUOUS:
        pre = period * np.arange(60)
    elif 5 * period > 10_000:
        pre = period * np.arange(50)
    else:
        pre = (10_000.0 * np.arange(15)[:, None] + period * np.arange(5)).ravel()
    pre = pre + max(0.0, -lag)
    return pre, pre + lag


def change(rule: plastic.Rule, lag: float, rate: float, schedule: str = CONTINUOUS) -> float:
    """Return the change of the factor by one protocol, as a fraction of the baseline."""
    pre, post = trains(lag, rate, schedule)
    return float(plastic.impose(rule, pre, post, compiled=False).factor[0, -1]) - 1.0


def changes(rule: plastic.Rule, points: Sequence[Point], schedule: str = CONTINUOUS) -> Array:
    """Return the change at every point."""
    return np.array([change(rule, p.lag, p.rate, schedule) for p in points])


def misfits(model: Array, points: Sequence[Point]) -> Array:
    """Return (model - data) / SEM at every point."""
    return np.array([(m - p.mean) / p.sem for m, p in zip(model, points, strict=True)])


def error(model: Array, points: Sequence[Point]) -> float:
    """Return E, the mean of the squared misfits (Pfister & Gerstner 2006)."""
    return float(np.mean(misfits(model, points) ** 2))


def best_pair(points: Sequence[Point]) -> plastic.Rule:
    """Return the pair rule whose amplitudes fit the points best.

    The rule is linear in its amplitudes, so weighted least squares finds the best of all.
    """
    pair, unit = plastic.rules.find("pair_timing"), 1e-6
    alone = ({"a_plus": unit, "a_minus": 0.0}, {"a_plus": 0.0, "a_minus": unit})
    sem = np.array([p.sem for p in points])
    basis = np.array([changes(pair(**one), points) / unit / sem for one in alone]).T
    goal = np.array([p.mean for p in points]) / sem
    (a_plus, a_minus), *_ = np.linalg.lstsq(basis, goal, rcond=None)
    return pair(a_plus=a_plus, a_minus=a_minus)


def all_rules(points: Sequence[Point]) -> dict[str, plastic.Rule]:
    """Return the pair rule as it is and at its best, and every set of the triplet rule."""
    pair, triplet = map(plastic.rules.find, ("pair_timing", "triplet_timing"))
    chosen = {"pair_timing defaults": pair(), BEST_PAIR: best_pair(points)}
    return chosen | {f"triplet_timing {name}": triplet.from_set(name) for name in triplet.sets}


def table(rules: Rules, points: Sequence[Point], schedule: str) -> str:
    """Return rule x point as text: model and z for every point, then E beside the published one."""
    models = {name: changes(rule, points, schedule) for name, rule in rules.items()}
    heads = [name.split(" ", 1) for name in rules]
    lines = [
        f"{schedule}: change of the weight as a fraction, and z = (model - data) / SEM",
        " " * 27 + "".join(f"{head[0]:>21}" for head in heads),
        "lag ms  rate Hz        data" + "".join(f"{head[1]:>21}" for head in heads),
    ]
    for k, p in enumerate(points):
        cells = [(m[k], misfits(m, points)[k]) for m in models.values()]
        lines.append(
            f"{p.lag:+6g}  {p.rate:7g}  {p.mean:+.2f}+-{p.sem:.2f}"
            + "".join(f"{value:+12.3f} {z:+8.2f}" for value, z in cells)
        )
    lines.append(f"{'E':27}" + "".join(f"{error(m, points):21.3f}" for m in models.values()))
    if schedule == CONTINUOUS:
        told = (f"{PUBLISHED[n]:.2f}" if n in PUBLISHED else "none" for n in rules)
        lines.append(f"{'E as published':27}" + "".join(f"{text:>21}" for text in told))
    return "\n".join(lines)


COLUMNS = (
    "schedule",
    "rule",
    "parameters",
    "lag_ms",
    "rate_hz",
    "data_mean",
    "data_sem",
    "model",
    "z",
    "E_of_rule",
    "E_published",
)


def write_results(path: Path, rules: Rules, points: Sequence[Point]) -> None:
    """Write one row per schedule, rule and point."""
    with path.open("w", newline="", encoding="utf-8") as file:
        rows = csv.writer(file)
        rows.writerow(COLUMNS)
        for schedule in (CONTINUOUS, BURSTS):
            for name, rule in rules.items():
                model = changes(rule, points, schedule)
                e, z = error(model, points), misfits(model, points)
                printed = PUBLISHED.get(name, "") if schedule == CONTINUOUS else ""
                for k, p in enumerate(points):
                    given = (schedule, name, repr(rule), p.lag, p.rate, p.mean, p.sem)
                    found = (f"{model[k]:.8f}", f"{z[k]:.6f}", f"{e:.6f}", printed)
                    rows.writerow((*given, *found))


#: one colour and pattern per rule, told apart in grey too (Okabe & Ito's colours)
LOOKS = {
    "pair_timing defaults": ("#0072B2", (0, (8, 2))),
    BEST_PAIR: ("#D55E00", "--"),
    "triplet_timing visual_minimal": ("#009E73", "-"),
    "triplet_timing visual_full": ("#000000", (0, (1, 1.2))),
    "triplet_timing hippocampal_minimal": ("#CC79A7", "-."),
    "triplet_timing hippocampal_full": ("#56B4E9", (0, (6, 1.5, 1, 1.5, 1, 1.5))),
}
STYLE = {
    "font.size": 7, "axes.labelsize": 7, "axes.titlesize": 7, "xtick.labelsize": 6,
    "ytick.labelsize": 6, "legend.fontsize": 6, "axes.linewidth": 0.6, "lines.linewidth": 1.1,
    "xtick.major.width": 0.6, "ytick.major.width": 0.6, "axes.spines.top": False,
    "axes.spines.right": False, "legend.frameon": False, "legend.handlelength": 3.2,
    "svg.fonttype": "none", "svg.hashsalt": "plastic",
}  # fmt: skip
MM = 1 / 25.4
CURVE = (0.1, *np.arange(2.5, 50.1, 2.5))


def draw_data(axes: Axes, points: Sequence[Point], lag: float) -> None:
    """Draw the measured points of one lag, in % of baseline."""
    mine = [p for p in points if p.lag == lag]
    axes.errorbar(
        [p.rate for p in mine], [100 * p.mean for p in mine], [100 * p.sem for p in mine],
        fmt="o", color="0.35", markersize=3, capsize=1.5, linewidth=0.8, label="data, mean ± SEM",
        zorder=5,
    )  # fmt: skip
    axes.axhline(0, color="0.6", linewidth=0.5)


def draw_rules(axes: Axes, rules: Rules, lag: float) -> None:
    """Draw the change against the rate for every rule, in % of baseline."""
    for name, rule in rules.items():
        color, pattern = LOOKS[name]
        values = [100 * change(rule, lag, rate) for rate in CURVE]
        label = name.replace("_timing", ",").replace("_", " ")
        axes.plot(CURVE, values, color=color, linestyle=pattern, label=label)


def figure_of_rules(rules: Rules, points: Sequence[Point]) -> Figure:
    """Return pair rules above, triplet rules below; one column per lag."""
    figure = Figure(figsize=(85 * MM, 100 * MM), dpi=300)
    grid = figure.subplots(2, 2, sharex=True, sharey="row")
    for row, kind in zip(grid, ("pair_timing", "triplet_timing"), strict=True):
        mine = {name: rule for name, rule in rules.items() if name.startswith(kind)}
        for axes, lag in zip(row, (10.0, -10.0), strict=True):
            draw_data(axes, points, lag)
            draw_rules(axes, mine, lag)
            axes.set_xticks(range(0, 51, 10))
    for axes, lag in zip(grid[0], ("+10", "−10"), strict=True):
        axes.set_title(f"lag {lag} ms")
    for axes in grid[:, 0]:
        axes.set_ylabel("change (% of baseline)")
    figure.align_ylabels(grid[:, 0])
    figure.text(0.57, 0.178, "rate of 60 continuous pairs (Hz)", ha="center")
    figure.subplots_adjust(
        left=0.165, right=0.985, top=0.955, bottom=0.25, wspace=0.12, hspace=0.14
    )
    legend_of(figure, grid[:, 0])
    return figure


def legend_of(figure: Figure, panels: Sequence[Axes]) -> None:
    """Put one legend below the panels: the data first, then every rule once."""
    shown = {}
    for axes in panels:
        shown |= dict(zip(*reversed(axes.get_legend_handles_labels()), strict=True))
    names = sorted(shown, key=lambda name: not name.startswith("data"))
    figure.legend([shown[n] for n in names], names, loc="lower center", ncols=2,
                  bbox_to_anchor=(0.5, 0.0), columnspacing=1.5)  # fmt: skip


def figure_of_schedules(rule: plastic.Rule, points: Sequence[Point]) -> Figure:
    """Return the visual minimal triplet model on the schedule of the fit and on the slice's."""
    figure = Figure(figsize=(85 * MM, 58 * MM), dpi=300)
    columns = figure.subplots(1, 2, sharex=True, sharey=True)
    for axes, lag, title in zip(columns, (10.0, -10.0), ("+10", "−10"), strict=True):
        draw_data(axes, points, lag)
        rates = [p.rate for p in points if p.lag == lag]
        for schedule, mark, look in ((CONTINUOUS, "s", "-"), (BURSTS, "^", "--")):
            values = [100 * change(rule, lag, rate, schedule) for rate in rates]
            axes.plot(rates, values, mark + look, markersize=3, label=f"model, {schedule}",
                      color="#009E73" if schedule == CONTINUOUS else "#D55E00")  # fmt: skip
        axes.set_title(f"lag {title} ms")
        axes.set_xticks(range(0, 51, 10))
    columns[0].set_ylabel("change (% of baseline)")
    figure.text(0.565, 0.185, "rate of pairs (Hz)", ha="center")
    figure.subplots_adjust(left=0.15, right=0.985, top=0.92, bottom=0.31, wspace=0.12)
    legend_of(figure, columns[:1])
    return figure


def save(figure: Figure, folder: Path, name: str) -> None:
    """Write one figure as SVG and PNG, the same bytes each time."""
    figure.savefig(folder / f"{name}.svg", metadata={"Date": None})
    figure.savefig(folder / f"{name}.png")


def main(arguments: Sequence[str] | None = None) -> None:
    """Print the tables and write results and figures."""
    parser = argparse.ArgumentParser(description="Rate dependence of plasticity, rule by rule.")
    parser.add_argument(
        "--out", type=Path, default=Path("rate_dependence-results"),
        help="folder for results.csv and the figures; files of the same names are replaced",
    )  # fmt: skip
    out: Path = parser.parse_args(arguments).out
    points = read_points()
    rules = all_rules(points)
    for schedule in (CONTINUOUS, BURSTS):
        print(table(rules, points, schedule), end="\n\n")
    best = rules[BEST_PAIR]
    print(f"best amplitudes of the pair rule: {best}")
    out.mkdir(parents=True, exist_ok=True)
    write_results(out / "results.csv", rules, points)
    with mpl.rc_context(STYLE):
        save(figure_of_rules(rules, points), out, "rate_dependence")
        save(figure_of_schedules(rules["triplet_timing visual_minimal"], points), out, "schedules")
    print(f"written: {out}")


if __name__ == "__main__":
    main()
