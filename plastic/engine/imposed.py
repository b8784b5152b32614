"""`plastic.impose`: a rule alone, on spike times that are given."""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence

import numpy as np
import xarray as xr
from numpy.typing import ArrayLike, NDArray

from plastic.engine.kernel import Rows, module_for, numbers_of
from plastic.engine.learning import Learner
from plastic.errors import Misfit, RuleError
from plastic.rules._interface import Rule


def impose(
    rule: Rule,
    pre: ArrayLike | Mapping[str, ArrayLike],
    post: ArrayLike,
    *,
    end: float | None = None,
    readings: ArrayLike | None = None,
    compiled: bool = True,
) -> xr.Dataset:
    """Return what a rule does to imposed spike times, without a cell.

    Spikes are at exact times (no time step). Everything at one instant reads the state just before
    it; two spikes at exactly the same time therefore do not see each other.

    Parameters
    ----------
    rule : Rule
    pre : array, or mapping of input name to array, ms
        Presynaptic spike times of one input, or of several.
    post : array, ms
        Spike times of the cell.
    end : float, ms, optional
        The run ends here; by default just after the last spike (and the rule's last window), or
        at 0 when nothing spikes.
    readings : array, ms, optional
        Times at which to read; by default 0 and ``end``. A reading sees the state just before the
        spikes of its own instant.
    compiled : bool
        False runs the reference loop in plain Python.

    Returns
    -------
    Dataset
        ``factor (input, reading)``, one variable per weight and state, ``time (reading)`` in ms.

    Raises
    ------
    Misfit
        Times that are negative, unsorted, not finite, or twice the same for one input; a rule
        that is a class or a name instead of an instance.
    RuleError
        A rule that returned something that is no number.

    Examples
    --------
    >>> import plastic
    >>> rule = plastic.rules.find("pair_timing")()
    >>> float(impose(rule, pre=[0.0], post=[10.0]).factor[0, -1].round(6))
    1.007141
    """
    _is_instance(rule)
    trains = (
        {str(k): _times(f"pre[{k!r}]", v) for k, v in pre.items()}
        if isinstance(pre, Mapping)
        else {"input": _times("pre", pre)}
    )
    after = _times("post", post)
    last = max([0.0, *(t[-1] for t in [*trains.values(), after] if len(t))])
    window = float(getattr(rule, "window", 0.0)) if rule.reads == "rates" else 0.0
    silent = not any(map(len, [*trains.values(), after]))
    by_itself = window if silent else math.nextafter(last + window, math.inf)
    finish = by_itself if end is None else _times("end", end)[0]
    at = np.array([0.0, finish]) if readings is None else _times("readings", readings)
    time, who = _merged(list(trains.values()), after, finish)
    run = _compiled if compiled else _plain
    variables, factors, states = run(rule, len(trains), time, who, at)
    return _labelled(rule, list(trains), at, variables, factors, states)


def _is_instance(rule: object) -> None:
    if isinstance(rule, Rule):
        return
    if isinstance(rule, type) and issubclass(rule, Rule):
        got, instance = f"the class {rule.__name__}", f"{rule.__name__}()"
    else:
        got, instance = repr(rule), "plastic.rules.find(name)()"
    raise Misfit("rule", got=got, expected=f"an instance, such as {instance}")


def _times(name: str, values: ArrayLike) -> NDArray[np.float64]:
    times = np.array(values, dtype=float, order="C", ndmin=1)  # one layout: compiled once
    if times.ndim != 1 or not np.isfinite(times).all() or (times < 0).any():
        raise Misfit(name, got=str(values), expected="finite times in ms, 0 or later")
    if (np.diff(times) <= 0).any():
        k = int(np.argmax(np.diff(times) <= 0))
        raise Misfit(
            name, got=f"{times[k]:g} ms followed by {times[k + 1]:g} ms", expected="rising times"
        )
    return times


def _merged(
    trains: Sequence[NDArray[np.float64]], after: NDArray[np.float64], finish: float
) -> tuple[NDArray[np.float64], NDArray[np.int64]]:
    """Return all spike times up to `finish`, sorted, and the learner of each (-1: the cell)."""
    time = np.concatenate([after, *trains])
    who = np.concatenate([np.full(len(t), k - 1) for k, t in enumerate([after, *trains])])
    order = np.argsort(time, kind="stable")
    keep = order[time[order] <= finish]
    return time[keep], who[keep].astype(np.int64)


Filled = tuple[NDArray[np.float64], NDArray[np.float64], NDArray[np.float64]]


def _compiled(
    rule: Rule,
    inputs: int,
    time: NDArray[np.float64],
    who: NDArray[np.int64],
    at: NDArray[np.float64],
) -> Filled:
    n, rows = numbers_of(rule), Rows.of(type(rule))
    variables = np.zeros((len(at), len(rows.inputs), inputs))
    factors, states = np.zeros((len(at), inputs)), np.zeros((len(at), len(rows.cell)))
    high = np.repeat(n.high[:, None], inputs, axis=1)
    module_for(type(rule)).run_imposed(
        n.parameters,
        n.starts,
        n.cell_starts,
        n.low,
        high,
        n.taus_pre,
        n.taus_post,
        n.window,
        time,
        who,
        at,
        variables,
        factors,
        states,
    )
    if not (np.isfinite(variables).all() and np.isfinite(states).all()):
        raise RuleError(f"{type(rule).__name__}: a change is no number; compiled=False says where")
    return variables, factors, states


def _plain(
    rule: Rule,
    inputs: int,
    time: NDArray[np.float64],
    who: NDArray[np.int64],
    at: NDArray[np.float64],
) -> Filled:
    rows, learner = Rows.of(type(rule)), Learner(rule, inputs)
    variables = np.zeros((len(at), len(rows.inputs), inputs))
    factors, states = np.zeros((len(at), inputs)), np.zeros((len(at), len(rows.cell)))
    for t in np.union1d(time, at):
        learner.finish(float(t))
        for r in np.flatnonzero(at == t):
            variables[r] = [learner.per_input[name] for name in rows.inputs]
            factors[r] = learner.factor()
            states[r] = [learner.per_cell[name] for name in rows.cell]
        now = who[time == t]
        if len(now):
            learner.instant(float(t), now[now >= 0].tolist(), {0: 1.0} if (now < 0).any() else None)
    return variables, factors, states


def _labelled(
    rule: Rule,
    inputs: list[str],
    at: NDArray[np.float64],
    variables: NDArray[np.float64],
    factors: NDArray[np.float64],
    states: NDArray[np.float64],
) -> xr.Dataset:
    rows = Rows.of(type(rule))
    data = {"factor": (("input", "reading"), factors.T, {"units": "1", "long_name": "factor"})}
    for k, name in enumerate(rows.inputs):
        kind = "weight" if name in rule.weights else "state"
        data[name] = (
            ("input", "reading"),
            variables[:, k].T,
            {"units": "1", "long_name": f"{kind} {name}"},
        )
    coords = {
        "input": inputs,
        "time": ("reading", at, {"units": "ms", "long_name": "time"}),
    }
    result = xr.Dataset(data, coords=coords, attrs={"rule": repr(rule)})
    for k, name in enumerate(rows.cell):
        result[name] = ("reading", states[:, k], {"units": "1", "long_name": f"state {name}"})
    return result
