"""One cell in plain Python: the reference of the compiled loop.

What `plastic.engine.template` does to a cell, by another road: every step is taken and none is
jumped over; the membrane moves by the matrix exponential (`plastic.engine.plain`); the rule learns
through `plastic.engine.learning`, which calls its methods as they stand; a route is asked for its
multiple. Slow, short, and what the compiled loop is checked against.
"""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

import numpy as np

from plastic import draws
from plastic.engine.assembly import SLOW, TICK, empty_log
from plastic.engine.layout import Cells, Floats, Log, Records, Wiring
from plastic.engine.learning import Learner
from plastic.engine.plain import Membrane, Terminal, kept
from plastic.membrane.spikes import BackPropagation
from plastic.routes._interface import Mixture
from plastic.rules._interface import Rule


def run_reference(
    rule: Rule,
    wiring: Wiring,
    cells: Cells,
    route: Mixture | None,
    *,
    immediate: bool = False,
    spikes: int = 4096,
) -> Log:
    """Run every cell of a block in plain Python.

    Parameters
    ----------
    rule : Rule
        Its class is run; each cell has its own parameters, from ``cells.parameters``.
    wiring : Wiring
    cells : Cells
    route : Mixture or None
        The one that `wiring` was made for.
    immediate : bool
        Ignore the delays and time constants of expression.
    spikes : int
        Room for the spikes of one cell.

    Returns
    -------
    Log
        ``ended["steps"]`` counts every step of the run.
    """
    rows = len(rule.weights) + sum(s.scope == "input" for s in rule.states.values())
    log = empty_log(cells, wiring, rows, spikes)
    for c, parameters in enumerate(cells.parameters):
        own = type(rule)(**dict(zip(rule.parameters, map(float, parameters), strict=True)))
        learner = Learner(
            own,
            len(wiring.learner_site),
            site_of=[int(site) for site in wiring.learner_site],
            highest=cells.high[c],
        )
        expression = Expression(wiring, cells.release[c], route, immediate)
        ReferenceCell(wiring, cells.cells[c], learner, expression).run(log, c)
    return log


class Expression:
    """What is expressed of the factors, and the physical variables that follow from it."""

    def __init__(
        self, wiring: Wiring, base: Records, route: Mixture | None, immediate: bool
    ) -> None:
        shares = {} if route is None else route.shares
        self.channels = [(route.channels[n], s) for n, s in shares.items()] if route else []
        self.times = [(0.0, 0.0) if immediate else (c.delay, c.tau) for c, _ in self.channels]
        slow = any(c.target in SLOW for c, _ in self.channels)
        self.at_once = not slow and not any(delay or tau for delay, tau in self.times)
        self.contacts, self.base, self.beyond = wiring.contacts, base, wiring.beyond
        self.eased = wiring.eased.astype(bool)
        self.expressed = np.ones((len(self.channels), len(wiring.learner_site)))
        self.history: list[Floats] = []
        self.multiple = np.ones(len(wiring.stretches))

    def tick(self, factor: Floats) -> None:
        """Follow the factor of `delay` ago with the time constant of each channel."""
        self.history.append(factor)
        for ch, (delay, tau) in enumerate(self.times):
            late = len(self.history) - 1 - round(delay / TICK)
            goal = self.history[late] if late >= 0 else np.ones_like(factor)
            self.expressed[ch] = goal + (self.expressed[ch] - goal) * kept(TICK, tau)

    def widened(self) -> bool:
        """Set the diameters; return whether any changed by more than 1e-4."""
        moved = False
        for (channel, share), expressed in zip(self.channels, self.expressed, strict=True):
            if channel.target != "diameter":
                continue
            for s, beyond in enumerate(self.beyond):
                who = self.contacts["learner"][(beyond == 1) & (self.contacts["excites"] == 1)]
                if not (who >= 0).any():
                    continue
                mean = np.mean([expressed[i] ** share if i >= 0 else 1.0 for i in who])
                goal = float(channel.multiple(mean))
                if abs(goal - self.multiple[s]) > 1e-4 * self.multiple[s]:
                    self.multiple[s], moved = goal, True
        return moved

    def release_of(self, k: int) -> tuple[float, float, float]:
        """Return sites, probability and quantum (nS, behind its neck) of contact `k`."""
        base, one, i = self.base[k], self.contacts[k], int(self.contacts["learner"][k])
        by = dict.fromkeys(("sites", "probability", "quantum", "neck"), 1.0) | {"added_sites": 0.0}
        if i >= 0:
            for (channel, share), expressed in zip(self.channels, self.expressed, strict=True):
                by[channel.target] = float(channel.multiple(expressed[i], share))
        if self.eased[:, k].any():
            for (channel, share), expressed in zip(self.channels, self.expressed, strict=True):
                if channel.target == "inhibition":
                    mean = expressed[self.eased[:, k]].mean()
                    by["quantum"] *= float(channel.multiple(mean, share))
        quantum = float(base["quantum"]) * by["quantum"]
        neck = float(one["neck"]) * by["neck"] * 1e-3  # Mohm times nS is a thousandth
        return (
            float(base["sites"]) * by["sites"] * (by["added_sites"] if one["added"] else 1.0),
            min(float(base["probability"]) * by["probability"], float(base["highest"])),
            quantum / (1 + quantum * neck),
        )


class ReferenceCell:
    """One cell on its way from the first step to the last."""

    def __init__(self, wiring: Wiring, cell: Any, learner: Learner, expression: Expression) -> None:
        self.wiring, self.plan, self.cell = wiring, wiring.plan[0], cell
        self.learner, self.expression = learner, expression
        self.membrane = Membrane(wiring, float(cell["load"]))
        self.dt = float(self.plan["dt"])
        if learner.window is not None:
            learner.window = int(self.plan["window"]) * self.dt
        self.terminals = [
            Terminal(
                draws.key(int(self.plan["seed"]), int(cell["number"]), k),
                float(one["cv"]),
                float(one["recovery"]),
                float(one["facilitation"]),
                bool(self.plan["deterministic"]),
            )
            for k, one in enumerate(wiring.contacts)
        ]
        self.spread = BackPropagation(
            length_constant=float(self.plan["bap_length"]),
            train_loss=float(self.plan["bap_loss"]),
            recovery=float(self.plan["bap_recovery"]),
            floor=float(self.plan["bap_floor"]),
        )
        self.events: dict[int, list[Any]] = {}
        for event in wiring.events:
            self.events.setdefault(int(event["step"]), []).append(event)
        self.injected = {
            step
            for step, found in self.events.items()
            if any(e["contact"] < 0 and e["learner"] < 0 for e in found)
        }
        self.spikes: list[int] = []
        self.under_way: dict[int, dict[int, float]] = {}

    def run(self, log: Log, c: int) -> None:
        """Take every step and fill row `c` of the log."""
        n_steps, refractory = int(self.plan["n_steps"]), int(self.plan["refractory"])
        tick = 0 if self.expression.at_once else round(TICK / self.dt)
        readings = set(self.wiring.reading_step.tolist())
        free, threshold = 0, float(self.cell["threshold"])
        for step in range(n_steps + 1):
            if step >= free and (step in self.injected or self.membrane.v[0] >= threshold):
                self._spike(step)
                free = step + refractory
            ticks, reads = step > 0 and tick > 0 and step % tick == 0, step in readings
            arrived, events = self.under_way.pop(step, {}), self.events.get(step, [])
            if ticks or reads or arrived or events:
                self.learner.finish(self._time(step))
                if ticks:
                    self._tick()
                if reads:
                    self._read(log, c, step)
                self._instant(step, events, arrived)
            self.membrane.step()
            if step < free:
                self.membrane.v[0] = self.plan["reset"]
        room = log.spike_step.shape[1]
        log.spike_step[c, : min(len(self.spikes), room)] = self.spikes[:room]
        log.ended[c] = (len(self.spikes), 0, n_steps)

    def _time(self, step: int) -> float:
        """Return the time of a step; a window that closes on it closes, whatever the rounding."""
        t, closes = step * self.dt, self.learner.closes
        return closes if abs(closes - t) < self.dt / 4 else t

    def _spike(self, step: int) -> None:
        """Reset the soma and send the spike to every place where it is still large enough."""
        self.spikes.append(step)
        self.membrane.v[0] = self.plan["reset"]
        sites, times = self.wiring.sites, self.dt * np.array(self.spikes)
        local = self.spread.amplitudes(sites["distance"], times)[:, -1]
        for site in np.flatnonzero(local >= self.spread.floor):
            at = step + int(sites["delay"][site])
            self.under_way.setdefault(at, {})[int(site)] = float(local[site])

    def _tick(self) -> None:
        self.expression.tick(self.learner.factor())
        if self.expression.widened():
            self.membrane.widen(self.expression.multiple)

    def _read(self, log: Log, c: int, step: int) -> None:
        learner, factor = self.learner, self.learner.factor()
        for r in np.flatnonzero(self.wiring.reading_step == step):
            log.variables[c, r] = list(learner.per_input.values())
            log.factor[c, r] = factor
            log.expressed[c, r] = factor if self.expression.at_once else self.expression.expressed
            log.diameter[c, r] = self.expression.multiple
            log.cell_states[c, r] = list(learner.per_cell.values())

    def _instant(self, step: int, events: list[Any], arrived: Mapping[int, float]) -> None:
        """Release with the strength of just before the instant, then learn."""
        if self.expression.at_once:
            self.expression.expressed[:] = self.learner.factor()
        for event in events:
            k = int(event["contact"])
            if k >= 0:
                amount = self.terminals[k].release(step * self.dt, *self.expression.release_of(k))
                self.membrane.open(int(self.wiring.contacts["group"][k]), amount)
        fired = [int(e["learner"]) for e in events if e["learner"] >= 0]
        if fired or arrived:
            self.learner.instant(self._time(step), fired, arrived)
