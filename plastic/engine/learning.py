"""Learning in plain Python: variables of one cell and the one law of time.

This is the oracle. It calls a rule's methods as they stand, decays every trace exactly, and is
what the compiled engine is checked against.
"""

from __future__ import annotations

import math
from collections.abc import Iterable, Mapping, Sequence

import numpy as np
from numpy.typing import NDArray

from plastic.errors import RuleError
from plastic.rules._interface import Changes, Rule

Array = NDArray[np.float64]


class Learner:
    """The variables of one rule on the learning inputs of one cell.

    Parameters
    ----------
    rule : Rule
    inputs : int
        Number of learning inputs.
    site_of : sequence of int, shape (inputs,), optional
        The place (0 = soma) at which each input sees the spikes of the cell.
    highest : array, shape (weights, inputs), optional
        Upper bounds that replace the rule's own where lower (a route at its ceiling).
    """

    def __init__(
        self,
        rule: Rule,
        inputs: int,
        *,
        site_of: Sequence[int] | None = None,
        highest: Array | None = None,
    ) -> None:
        self.rule, self.inputs, self.t = rule, inputs, 0.0
        self.site_of = [0] * inputs if site_of is None else list(site_of)
        sites = max([0, *self.site_of]) + 1
        self.hooks = rule.hooks()
        number = rule.number
        starts = {name: w.start for name, w in rule.weights.items()}
        starts |= {name: s.start for name, s in rule.states.items() if s.scope == "input"}
        self.per_input: dict[str, Array] = {
            name: np.full(inputs, number(start)) for name, start in starts.items()
        }
        self.per_cell = {n: number(s.start) for n, s in rule.states.items() if s.scope == "cell"}
        self.traces: dict[str, Array] = {
            name: np.zeros(inputs if tr.source == "pre" else sites)
            for name, tr in rule.traces.items()
        }
        self.low = {n: np.full(inputs, number(w.low)) for n, w in rule.weights.items()}
        self.high = {n: np.full(inputs, number(w.high)) for n, w in rule.weights.items()}
        if highest is not None:
            for row, name in enumerate(rule.weights):
                self.high[name] = np.minimum(self.high[name], highest[row])
        self.window = float(getattr(rule, "window", math.nan)) if rule.reads == "rates" else None
        self.closes = math.inf
        self._pre_count, self._post_count = np.zeros(inputs), 0

    def factor(self) -> Array:
        """Return the factor of every input, dimensionless, 1 at the start."""
        rows = {name: self.per_input[name] for name in self.rule.weights}
        return np.array(
            [
                self.rule.factor(**{n: float(v[i]) for n, v in rows.items()})
                for i in range(self.inputs)
            ]
        )

    def advance(self, t: float) -> None:
        """Bring everything from the current time to `t` (ms); nothing happens in between."""
        dt = t - self.t
        if dt <= 0:
            return
        for name, tr in self.rule.traces.items():
            self.traces[name] *= math.exp(-dt / self.rule.number(tr.tau))
        self.t = t
        if not math.isinf(self.closes):
            return  # an open window: its presentation carries the state over it
        if "flow" in self.hooks:
            for i in range(self.inputs):
                changes = self._call("flow", {"dt": dt, **self._of_input(i)})
                self._add(i, changes)
            self._bound()
        if "cell_flow" in self.hooks:
            self._add_cell(self._call("cell_flow", {"dt": dt, **self.per_cell}))

    def instant(
        self,
        t: float,
        pre: Iterable[int] = (),
        post: Mapping[int, float] | None = None,
    ) -> None:
        """Let presynaptic spikes of `pre` and local spikes at the sites `post` happen at `t`.

        Parameters
        ----------
        t : float
            ms, not before the current time.
        pre : iterable of int
            Learning inputs with a presynaptic event.
        post : mapping of int to float
            Sites reached by a spike of the cell, with its local amplitude (1 at the soma).
        """
        fired, arrived = list(pre), dict(post or {})
        while self.closes <= t:
            self._close()
        self.advance(t)
        if self.window is not None:
            self._count(fired, arrived)
            return
        before = self._copy()
        if "at_pre" in self.hooks:
            for i in fired:
                self._add(i, self._call("at_pre", {"t": t, **before[i]}))
        if "at_post" in self.hooks:
            for i in range(self.inputs):
                if self.site_of[i] in arrived:
                    givens = {"t": t, "amplitude": arrived[self.site_of[i]], **before[i]}
                    self._add(i, self._call("at_post", givens))
        if "cell_at_post" in self.hooks and 0 in arrived:
            self._add_cell(self._call("cell_at_post", {"t": t, **self._of_cell()}))
        self._bound()
        self._jump(fired, list(arrived))

    def present(self, pre_rates: Array, post_rate: float) -> None:
        """Let rates have been held for the rule's window, ending now; reads the state before it."""
        before = self._copy()
        rates = {"t": self.t, "post_rate": post_rate}
        cell = (
            self._call("cell_at_presentation", {**rates, **self._of_cell()})
            if "cell_at_presentation" in self.hooks
            else {}
        )
        if "at_presentation" in self.hooks:
            for i in range(self.inputs):
                givens = {**rates, "pre_rate": float(pre_rates[i]), **before[i]}
                self._add(i, self._call("at_presentation", givens))
        self._add_cell(cell)
        self._bound()

    def _count(self, fired: list[int], arrived: dict[int, float]) -> None:
        if math.isinf(self.closes) and (fired or 0 in arrived):
            self.closes = self.t + float(self.window or 0.0)
        for i in fired:
            self._pre_count[i] += 1
        self._post_count += 0 in arrived

    def _close(self) -> None:
        """End the open window: its counts become rates (Hz) and are presented."""
        self.advance(self.closes)
        self.closes, window = math.inf, float(self.window or 0.0)
        self.present(self._pre_count * 1000.0 / window, self._post_count * 1000.0 / window)
        self._pre_count[:], self._post_count = 0, 0

    def finish(self, t: float) -> None:
        """Close what is due and bring everything to `t`."""
        while self.closes <= t:
            self._close()
        self.advance(t)

    def _of_input(self, i: int) -> dict[str, float]:
        return {name: float(row[i]) for name, row in self.per_input.items()}

    def _of_cell(self) -> dict[str, float]:
        post = {
            n: float(v[0]) for n, v in self.traces.items() if self.rule.traces[n].source == "post"
        }
        return {**self.per_cell, **post}

    def _copy(self) -> list[dict[str, float]]:
        """Return, per input, every number that its hooks may read, as it is now."""
        seen = []
        for i in range(self.inputs):
            place = {"pre": i, "post": self.site_of[i]}
            local = {n: float(v[place[self.rule.traces[n].source]]) for n, v in self.traces.items()}
            seen.append({**self._of_input(i), **self.per_cell, **local})
        return seen

    def _call(self, hook: str, known: Mapping[str, float]) -> Changes:
        owner, given = f"{type(self.rule).__name__}.{hook}", {n: known[n] for n in self.hooks[hook]}
        try:
            changes: Changes = getattr(self.rule, hook)(**given) or {}
        except (ArithmeticError, ValueError) as error:
            raise RuleError(f"{owner}: {error} at {self.t:g} ms with {dict(known)}") from error
        for name, value in changes.items():
            if not math.isfinite(value):
                raise RuleError(
                    f"{owner} changed {name} by {value} at {self.t:g} ms with {dict(known)}"
                )
        return changes

    def _add(self, i: int, changes: Changes) -> None:
        for name, change in changes.items():
            self.per_input[name][i] += change

    def _add_cell(self, changes: Changes) -> None:
        for name, change in changes.items():
            self.per_cell[name] += change

    def _bound(self) -> None:
        for name in self.rule.weights:
            np.clip(self.per_input[name], self.low[name], self.high[name], out=self.per_input[name])

    def _jump(self, fired: list[int], arrived: list[int]) -> None:
        for name, tr in self.rule.traces.items():
            for place in fired if tr.source == "pre" else arrived:
                self.traces[name][place] = 1.0 + (
                    self.traces[name][place] if tr.jump == "add" else 0.0
                )
