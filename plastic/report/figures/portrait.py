"""A rule's portrait on imposed spikes, without a cell: its lag window and its rate dependence."""

from __future__ import annotations

from collections.abc import Mapping, Sequence

import numpy as np
from matplotlib.figure import Figure

from plastic.engine.imposed import impose
from plastic.report.figures.curves import rule_names, told_illustrative
from plastic.report.figures.picture import Picture, Row, Rows, labels, numbers, where
from plastic.report.figures.sheet import Plan, Sheet
from plastic.report.figures.style import THRESHOLD, line
from plastic.rules._interface import Rule

PAIRS = 60
#: ms; lags of the window, 0 left out because spikes at one instant do not see each other
LAGS = tuple(float(lag) for lag in [*range(-100, 0, 4), *range(4, 101, 4)])
EVERY = 1000.0
#: Hz; the rates of the published rate dependence and some between them
RATES = (0.1, 0.3, 1.0, 3.0, 5.0, 10.0, 15.0, 20.0, 25.0, 30.0, 35.0, 40.0, 45.0, 50.0)
#: ms
NEAR_LAG = 10.0
AXIS = "change (% of baseline)"


def change(rule: Rule, lag: float, every: float, pairs: int = PAIRS) -> float:
    """Return the change after evenly spaced pairs, as a fraction of the baseline.

    Parameters
    ----------
    rule : Rule
    lag : float, ms
        t_post - t_pre.
    every : float, ms
        From pair to pair, continuously.
    pairs : int
    """
    # so few spikes take less time in plain Python than compiling the rule would
    start = max(-lag, 0.0) + every * np.arange(pairs)
    result = impose(rule, pre=start, post=start + lag, compiled=False)
    return float(result["factor"][0, -1]) - 1.0


def lag_window(rules: Mapping[str, Rule]) -> Picture:
    """Return the change against the lag, 60 pairs at 1 Hz, a panel per rule."""
    rows: list[Row] = [
        {
            "rule": label, "lag_ms": lag, "pairs": PAIRS, "pairs_per_s": 1000 / EVERY,
            "change_percent": 100 * change(rule, lag, EVERY),
        }
        for label, rule in rules.items()
        for lag in LAGS
    ]  # fmt: skip
    told = f"Change by {PAIRS} imposed pairs at {1000 / EVERY:g} Hz, without a cell{_told(rules)}"

    plan = Plan(
        told, "lag, t_post − t_pre (ms)", AXIS, height=28, wide=3, apart=_illustrative(rules)
    )
    titles = rule_names(list(rules), _signed(rules))

    def draw(rows: Rows, width: float) -> Figure:
        sheet = _frames(titles, width, plan)
        for axes, rule in zip(sheet.panels, labels(rows, "rule"), strict=True):
            mine = where(rows, rule=rule)
            axes.axvline(0, color="0.6", linewidth=0.5)
            for side in (-1, 1):
                branch = [row for row in mine if float(row["lag_ms"]) * side > 0]
                axes.plot(numbers(branch, "lag_ms"), numbers(branch, "change_percent"), "k-",
                          marker=".", markersize=2.5)  # fmt: skip
        return sheet.figure

    return Picture("lag_window", rows, draw)


def rate_dependence(rules: Mapping[str, Rule]) -> Picture:
    """Return the change against the rate of 60 continuous pairs, at +10 and -10 ms."""
    rows: list[Row] = [
        {
            "rule": label, "lag_ms": lag, "pairs": PAIRS, "rate_hz": rate,
            "change_percent": 100 * change(rule, lag, 1000 / rate),
        }
        for label, rule in rules.items()
        for lag in (NEAR_LAG, -NEAR_LAG)
        for rate in RATES
    ]  # fmt: skip
    told = (
        f"Change by {PAIRS} imposed continuous pairs, without a cell; lag is t_post − t_pre"
        f"{_told(rules)}"
    )

    names = [f"lag {lag:+g} ms".replace("-", "−") for lag in (NEAR_LAG, -NEAR_LAG)]
    plan = Plan(
        told, "rate of pairs (Hz)", AXIS, names, height=28, wide=3, apart=_illustrative(rules)
    )
    titles = rule_names(list(rules), _signed(rules))

    def draw(rows: Rows, width: float) -> Figure:
        sheet = _frames(titles, width, plan)
        for axes, rule in zip(sheet.panels, labels(rows, "rule"), strict=True):
            for k, lag in enumerate((NEAR_LAG, -NEAR_LAG)):
                mine = [row for row in where(rows, rule=rule) if float(row["lag_ms"]) == lag]
                look = line(k)
                axes.plot(numbers(mine, "rate_hz"), numbers(mine, "change_percent"),
                          color=look.color, linestyle=look.linestyle, marker=look.marker,
                          markersize=2.6, label=names[k])  # fmt: skip
        plan.legend(sheet, width)
        return sheet.figure

    return Picture("rate_dependence", rows, draw)


def _signed(rules: Mapping[str, Rule]) -> list[str]:
    return [label for label, rule in rules.items() if rule.illustrative]


def _illustrative(rules: Mapping[str, Rule]) -> list[int]:
    """Return the places of rules whose size is not to be read beside the others."""
    found = [k for k, rule in enumerate(rules.values()) if rule.illustrative]
    return found if len(found) < len(rules) else []


def _told(rules: Mapping[str, Rule]) -> str:
    sign = told_illustrative(list(rules), _signed(rules))
    return f"{sign}, on a vertical axis of its own" if _illustrative(rules) else sign


def _frames(titles: Sequence[str], width: float, plan: Plan) -> Sheet:
    sheet = plan.sheet(width, titles)
    for axes in sheet.panels:
        axes.axhline(0, **{**THRESHOLD, "linewidth": 0.5})
    return sheet
