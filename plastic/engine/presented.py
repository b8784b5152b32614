"""`plastic.present`: a rate rule alone on patterns, with a linear rate cell."""

from __future__ import annotations

import numpy as np
import xarray as xr
from numpy.typing import ArrayLike

from plastic.engine.learning import Array, Learner
from plastic.errors import Misfit
from plastic.rules._interface import Rule


def present(
    rule: Rule,
    patterns: ArrayLike,
    *,
    probabilities: ArrayLike | None = None,
    presentations: int = 1000,
    start: ArrayLike | None = None,
    order: str = "mean",
    seed: int = 0,
    every: int = 1,
) -> xr.Dataset:
    """Return the weights while patterns of rates are presented to a linear rate cell.

    The cell's rate is y = w . x, with weights as they are (no factor). With ``order="mean"`` each
    presentation is the average over the patterns, weighted by their probabilities: the averaged
    equations, whose fixed points are exact. With ``order="random"`` one pattern is drawn each time.

    Parameters
    ----------
    rule : Rule
        A rule that reads rates.
    patterns : array, shape (pattern, input), Hz
    probabilities : array, shape (pattern,), optional
        Sum to 1; equal when not given.
    presentations : int
    start : array, shape (input,), optional
        Weights at the start; the rule's own when not given.
    order : {"mean", "random"}
    seed : int
        For ``order="random"``.
    every : int
        Keep the weights after every so many presentations.

    Returns
    -------
    Dataset
        ``weight (reading, input)``, ``response (reading, pattern)`` in Hz and the rule's states of
        cell scope ``(reading)``.

    Raises
    ------
    Misfit
        A rule that reads spikes; shapes or probabilities that do not fit.
    """
    rates = np.asarray(patterns, dtype=float)
    _check(rule, rates, order, every)
    chance = _chance(len(rates), probabilities)
    learner = Learner(rule, rates.shape[1])
    name = next(iter(rule.weights))
    if start is not None:
        learner.per_input[name][:] = _start(start, rates.shape[1])
    draw = np.random.default_rng(seed)
    window = float(getattr(rule, "window", 1.0))
    kept = [_snapshot(learner, name, rates)]
    for k in range(presentations):
        chosen = (
            chance if order == "mean" else np.eye(len(rates))[draw.choice(len(rates), p=chance)]
        )
        learner.t += window
        _present_mix(learner, name, rates, chosen)
        if (k + 1) % every == 0:
            kept.append(_snapshot(learner, name, rates))
    rows = {key: np.array([row[key] for row in kept]) for key in kept[0]}
    dims = {"weight": ("reading", "input"), "response": ("reading", "pattern")}
    units = {"weight": "1", "response": "Hz"}
    return xr.Dataset(
        {
            key: (
                dims.get(key, ("reading",)),
                value,
                {"units": units.get(key, "1"), "long_name": key},
            )
            for key, value in rows.items()
        },
        attrs={"rule": repr(rule), "order": order},
    )


def _present_mix(learner: Learner, name: str, rates: Array, chosen: Array) -> None:
    """Add the changes of every pattern, weighted by `chosen`, all read from the same state."""
    weights = {key: row.copy() for key, row in learner.per_input.items()}
    states = dict(learner.per_cell)
    total = {key: np.zeros_like(row) for key, row in weights.items()}
    moved = dict.fromkeys(states, 0.0)
    for x, share in zip(rates, chosen, strict=True):
        if share == 0:
            continue
        learner.present(x, float(weights[name] @ x))
        for key, row in learner.per_input.items():
            total[key] += share * (row - weights[key])
            row[:] = weights[key]
        for key in states:
            moved[key] += share * (learner.per_cell[key] - states[key])
            learner.per_cell[key] = states[key]
    for key, row in learner.per_input.items():
        row += total[key]
    for key in states:
        learner.per_cell[key] += moved[key]


def _snapshot(learner: Learner, name: str, rates: Array) -> dict[str, Array | float]:
    weights = learner.per_input[name].copy()
    return {"weight": weights, "response": rates @ weights, **learner.per_cell}


def _chance(patterns: int, probabilities: ArrayLike | None) -> Array:
    if probabilities is None:
        return np.full(patterns, 1 / patterns)
    chance = np.asarray(probabilities, dtype=float)
    if chance.shape != (patterns,) or not (chance >= 0).all() or abs(chance.sum() - 1) > 1e-9:
        raise Misfit(
            "probabilities", got=str(chance), expected=f"{patterns} numbers >= 0 that sum to 1"
        )
    return chance


def _start(start: ArrayLike, inputs: int) -> Array:
    weights = np.asarray(start, dtype=float)
    if weights.shape != (inputs,) or not np.isfinite(weights).all():
        raise Misfit("start", got=str(weights), expected=f"{inputs} finite weights, one per input")
    return weights


def _check(rule: Rule, rates: Array, order: str, every: int) -> None:
    who = type(rule).__name__
    if rule.reads != "rates":
        raise Misfit(
            f"{who} on patterns", got="a rule that reads spikes", expected="one that reads rates"
        )
    if rates.ndim != 2 or not rates.size or not np.isfinite(rates).all():
        raise Misfit(
            "patterns", got=f"an array of shape {rates.shape}", expected="finite (pattern, input)"
        )
    if order not in ("mean", "random"):
        raise Misfit("order", got=repr(order), expected="'mean' or 'random'")
    if every < 1:
        raise Misfit("every", got=str(every), expected="1 or more presentations")
