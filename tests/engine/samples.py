"""Invented rules: small ones for the plain loop, then four that are compiled.

The four together use all that a rule may do; they are few, since each costs seconds at first.
"""

from __future__ import annotations

import math

from plastic.parameters import parameter
from plastic.rules._interface import Changes, Rule, state, trace, weight


class Mirror(Rule):
    """Adds what it sees of the other side, so that a weight tells what was seen."""

    tau: float = parameter(20.0, "ms", low=1e-3, source="invented")

    w = weight(1.0, low=-100.0, high=100.0)
    heard = state(0.0, scope="cell")
    r = trace("pre", tau="tau")
    o = trace("post", tau=40.0)
    last = trace("pre", tau="tau", jump="set")

    def at_pre(self, o: float) -> Changes:
        return {"w": -o}

    def at_post(self, r: float, amplitude: float) -> Changes:
        return {"w": amplitude * r}

    def cell_at_post(self, o: float) -> Changes:
        return {"heard": 1.0 + o}


class Compound(Rule):
    """Its changes are shares of what it reads, so that order would show."""

    up: float = parameter(0.5, "1", source="invented")
    down: float = parameter(-0.25, "1", source="invented")

    w = weight(1.0, low=0.0, high=1.2)
    mood = state(2.0, scope="cell")

    def at_pre(self, w: float, mood: float) -> Changes:
        return {"w": self.down * w * mood}

    def at_post(self, w: float) -> Changes:
        return {"w": self.up * w}

    def cell_at_post(self, mood: float) -> Changes:
        return {"mood": mood}


class Leaky(Rule):
    """Weights and the cell's mood relax to rest in silence, exactly."""

    tau: float = parameter(300.0, "ms", low=1e-3, source="invented")

    w = weight(0.2, low=0.0, high=0.9)
    mood = state(0.0, scope="cell")
    seen = state(0.0)

    def at_pre(self, w: float) -> Changes:
        return {"seen": w}

    def flow(self, dt: float, w: float) -> Changes:
        return {"w": (1.0 - w) * -math.expm1(-dt / self.tau)}

    def cell_flow(self, dt: float, mood: float) -> Changes:
        return {"mood": (5.0 - mood) * -math.expm1(-dt / self.tau)}


class Stepped(Leaky):
    """The same with a forward step of the differential equation: no semigroup."""

    tau: float = parameter(300.0, "ms", low=1e-3, source="invented")

    w = weight(0.2, low=0.0, high=0.9)
    mood = state(0.0, scope="cell")
    seen = state(0.0)

    def flow(self, dt: float, w: float) -> Changes:
        return {"w": (1.0 - w) * dt / self.tau}


class Counting(Rule):
    """Sums the rates of its windows, and the silence between them in ms."""

    window: float = parameter(50.0, "ms", low=1e-3, source="invented")

    reads = "rates"
    w = weight(0.0, low=-1e9, high=1e9)
    both = state(0.0)
    level = state(0.0, scope="cell")
    silence = state(0.0)

    def at_presentation(self, pre_rate: float, post_rate: float, level: float) -> Changes:
        return {"w": pre_rate, "both": pre_rate * post_rate + level}

    def cell_at_presentation(self, post_rate: float) -> Changes:
        return {"level": post_rate}

    def flow(self, dt: float) -> Changes:
        return {"silence": dt}


# ---- compiled


class Everything(Rule):
    """Two weights, states of both scopes, four traces, flows, branches and its own factor."""

    up: float = parameter(0.02, "1", low=0, high=1, source="invented")
    down: float = parameter(0.015, "1", low=0, high=1, source="invented")
    tau: float = parameter(18.0, "ms", low=1e-3, source="invented")
    slow: float = parameter(900.0, "ms", low=1e-3, source="invented")
    start: float = parameter(2.0, "1", low=0.1, high=5, source="invented")
    highest: float = parameter(2.025, "1", low=0.1, high=50, source="invented")

    w = weight(1.0, low=0.98, high=1.1)
    u = weight("start", low=0.0, high="highest")
    seen = state(0.0)
    theta = state("start", scope="cell")
    r = trace("pre", tau="tau")
    r_last = trace("pre", tau="slow", jump="set")
    o = trace("post", tau=31.0)
    o_last = trace("post", tau="slow", jump="set")

    def at_pre(self, o: float, r_last: float, w: float, theta: float, t: float) -> Changes:
        shift = self.down * o * min(theta, 4.0)
        if r_last > 0.9:
            return {"w": -shift * w, "seen": 1}
        elif t > 400.0:
            return {"u": math.sin(t) * self.down}
        return {"w": -0.5 * shift, "u": self.down * r_last}

    def at_post(self, r: float, o_last: float, amplitude: float, seen: float) -> Changes:
        change = 0.0
        for _ in range(2):
            change += self.up * r * amplitude / (1.0 + 0.01 * seen)
        return {"u": change * (1.0 - o_last), "w": change}

    def cell_at_post(self, o: float, o_last: float, theta: float) -> Changes:
        if o_last == 0.0:
            return {}
        return {"theta": self.up * (theta + o)}

    def flow(self, dt: float, w: float, u: float) -> Changes:
        kept = -math.expm1(-dt / self.slow)
        return {"w": (1.0 - w) * kept, "u": (self.start - u) * kept, "seen": dt * 1e-4}

    def cell_flow(self, dt: float, theta: float) -> Changes:
        return {"theta": (self.start - theta) * -math.expm1(-dt / self.slow)}

    def factor(self, w: float, u: float) -> float:
        if w > 1.0:
            return w * u / self.start
        return w + u / self.start - 1.0


class OnlyPost(Rule):
    """Sees nothing of the inputs but where they are; a fall-through changes nothing."""

    gain: float = parameter(0.1, "1", source="invented")

    w = weight(1, low=0.0, high=3.0)
    o = trace("post", tau=25.0)

    def at_post(self, o: float, t: float) -> Changes:
        if t > 30.0:
            return {"w": self.gain * (0.5 - o)}
        if o > 0.9:
            return {"w": -1}


class OnlyPre(Rule):
    """Sees nothing of the cell; its start is a parameter."""

    gain: float = parameter(0.1, "1", source="invented")
    start: float = parameter(0.5, "1", low=0.1, high=5, source="invented")

    w = weight("start", low=0.0, high=3.0)
    r = trace("pre", tau=25.0)

    def at_pre(self, *, r: float) -> Changes:
        return {"w": self.gain * (1.0 - r)}


class Rated(Rule):
    """Reads rates over a window, flows in between."""

    eta: float = parameter(1e-4, "1", source="invented")
    window: float = parameter(40.0, "ms", low=1e-3, source="invented")
    tau: float = parameter(500.0, "ms", low=1e-3, source="invented")

    reads = "rates"
    w = weight(1.0, low=0.5, high=2.0)
    idle = state(0.0)
    theta = state(10.0, scope="cell")

    def at_presentation(
        self, pre_rate: float, post_rate: float, theta: float, w: float, t: float
    ) -> Changes:
        return {"w": self.eta * w * pre_rate * (post_rate - theta), "idle": 1e-6 * t}

    def cell_at_presentation(self, post_rate: float, theta: float) -> Changes:
        return {"theta": (post_rate - theta) * -math.expm1(-self.window / self.tau)}

    def flow(self, dt: float, w: float) -> Changes:
        return {"idle": dt, "w": (1.0 - w) * -math.expm1(-dt / self.tau)}

    def cell_flow(self, dt: float, theta: float) -> Changes:
        return {"theta": (10.0 - theta) * -math.expm1(-dt / self.tau)}
