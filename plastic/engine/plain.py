"""The membrane and the contacts of one cell in plain Python: the parts of the reference loop.

The membrane moves by the matrix exponential of the formulas in `plastic.membrane.cable`; contacts
draw from `plastic.draws`. What the compiled loop has instead is in `plastic.engine.steps`.
"""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np
from scipy.linalg import expm

from plastic import draws
from plastic.engine.layout import Floats, Wiring
from plastic.engine.steps import CUT
from plastic.membrane.cable import conductances, leaks
from plastic.membrane.tree import Tree


def kept(gap: float, tau: float) -> float:
    """Return what is left after `gap` of something that decays with `tau`; 0: nothing ever is."""
    return math.exp(-gap / tau) if tau > 0 else 0.0


def mean_left(keep: float) -> float:
    """Return the mean over a step of what decays from 1 to `keep`; 0 for what is not there."""
    return (1 - keep) / -math.log(keep) if keep > 0 else 0.0


class Membrane:
    """Voltages relative to rest (mV) and the open conductances (nS) of one cell."""

    def __init__(self, wiring: Wiring, load: float) -> None:
        self.plan, self.load = wiring.plan[0], load
        self.groups = [
            tuple(float(one[n]) for n in ("norm", "keep_decay", "keep_rise", "reversal"))
            for one in wiring.groups
        ]
        self.node = [
            int(slot["node"]) for slot in wiring.slots for _ in range(slot["first"], slot["last"])
        ]
        stretches, nodes = wiring.stretches, int(self.plan["n_nodes"])
        self.tree = Tree(
            n_nodes=nodes,
            node_of={},
            node_distance=np.zeros(nodes),
            node_dendrite=[],
            stretch_parent=stretches["parent"],
            stretch_child=stretches["child"],
            stretch_length=stretches["length"],
            stretch_diameter=stretches["diameter"],
            stretch_dendrite=[],
        )
        self.v = np.zeros(nodes)
        self.slow, self.fast, self.ends = ([0.0] * len(self.groups) for _ in range(3))
        self.widen(np.ones(len(stretches)))

    def widen(self, multiple: Floats) -> None:
        """Give every stretch a multiple of its diameter."""
        rm, ri, dt = (float(self.plan[n]) for n in ("rm", "ri", "dt"))
        capacitance = self.plan["tau_m"] * leaks(self.tree, self.load, rm, ri, multiple)
        matrix = conductances(self.tree, self.load, rm, ri, multiple)
        flow = -matrix / capacitance[:, np.newaxis]
        self.propagator = expm(dt * flow)
        self.integral = np.linalg.solve(flow, self.propagator - np.eye(len(flow))) / capacitance

    def open(self, group: int, amount: float) -> None:
        """Open a conductance with a peak of `amount` nS."""
        norm, _, keep_rise, _ = self.groups[group]
        self.slow[group] += amount * norm
        self.ends[group] = max(self.ends[group], CUT * self.slow[group])
        if keep_rise > 0:
            self.fast[group] += amount * norm

    def step(self) -> None:
        """Let one time step pass."""
        total, drive = np.zeros(len(self.v)), np.zeros(len(self.v))
        for g, (_, keep_decay, keep_rise, reversal) in enumerate(self.groups):
            one = self.slow[g] * mean_left(keep_decay) - self.fast[g] * mean_left(keep_rise)
            total[self.node[g]] += one
            drive[self.node[g]] += one * reversal
            self.slow[g] *= keep_decay
            self.fast[g] *= keep_rise
            if self.slow[g] < self.ends[g]:
                self.slow[g] = self.fast[g] = self.ends[g] = 0.0
        before, self.v = self.v, self.propagator @ self.v
        self.v = self.v + self.integral @ self._currents(total, drive, before)

    def _currents(self, total: Floats, drive: Floats, before: Floats) -> Floats:
        """Return the current (pA) into every node, held over the step.

        I = drive - total (theta v_end + (1 - theta) v_before) with theta = (1 + x) / (2 + x),
        x = total times the node's own integral, and v_end the voltage that these currents give.
        """
        theta = (1 + total * self.integral.diagonal()) / (2 + total * self.integral.diagonal())
        weight = (total * theta)[:, np.newaxis]
        wanted = drive - total * (theta * self.v + (1 - theta) * before)
        return np.asarray(np.linalg.solve(np.eye(len(total)) + weight * self.integral, wanted))


@dataclass
class Terminal:
    """Release at one contact: the utilisation and resources it remembers, or its empty sites."""

    stream: int
    cv: float
    recovery: float
    facilitation: float
    deterministic: bool
    use: float = 0.0
    full: float = 1.0
    empty: int = 0
    last: float = -math.inf
    events: int = 0

    def release(self, t: float, sites: float, p: float, quantum: float) -> float:
        """Return the conductance (nS) of the next event, at `t` ms."""
        self.events += 1
        if sites <= 0:
            return 0.0
        gap, self.last = t - self.last, t
        self.use = p + self.use * (1 - p) * kept(gap, self.facilitation)
        still_empty = kept(gap, self.recovery)
        if self.deterministic:
            found = 1 - (1 - self.full) * still_empty
            self.full = found * (1 - self.use)
            return sites * self.use * found * quantum
        return quantum * self._quanta(self.events - 1, sites, 1 - still_empty)

    def _quanta(self, ordinal: int, sites: float, refilled: float) -> float:
        """Return the sum of the quanta that the full sites release, in quanta."""
        whole = math.floor(sites)
        there = whole + (draws.uniform(self.stream, ordinal, draws.FRACTION) < sites - whole)
        self.empty -= draws.binomial(self.stream, ordinal, self.empty, refilled, draws.REFILL)
        count = draws.binomial(self.stream, ordinal, max(there - self.empty, 0), self.use)
        if self.recovery > 0:
            self.empty += count
        spread = self.cv * math.sqrt(count)
        return max(count + spread * draws.normal(self.stream, ordinal), 0.0)
