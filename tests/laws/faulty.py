"""Rules with one design fault each, as people make them, and the sound rule they were made from."""

from __future__ import annotations

import math
import random
from typing import Any

import numpy as np

from plastic.parameters import parameter
from plastic.rules._interface import Changes, Rule, state, trace, weight

#: what the rules that remember write into
SLATE: dict[str, Any] = {}


class Sound(Rule):
    """A pair rule without a fault, with all that the faulty ones have."""

    up: float = parameter(0.02, "1", low=0, high=1, source="invented")
    down: float = parameter(0.01, "1", low=0, high=1, source="invented")
    tau: float = parameter(20.0, "ms", low=1, high=1e3, source="invented")
    amplitudes = ("up", "down")
    promises = ("both_sides",)

    w = weight(1.0, low=0.0, high=4.0)
    r = trace("pre", tau="tau")
    o = trace("post", tau="tau")

    def at_pre(self, o: float) -> Changes:
        return {"w": -self.down * o}

    def at_post(self, r: float) -> Changes:
        return {"w": self.up * r}


def variant(fault: str, **body: Any) -> type[Rule]:
    """Return the sound rule with some lines replaced; None takes one away."""
    own = {
        "up": parameter(0.02, "1", low=0, high=1, source="invented"),
        "down": parameter(0.01, "1", low=0, high=1, source="invented"),
        "tau": parameter(20.0, "ms", low=1, high=1e3, source="invented"),
        "amplitudes": ("up", "down"),
        "promises": ("both_sides",),
        "w": weight(1.0, low=0.0, high=4.0),
        "r": trace("pre", tau="tau"),
        "o": trace("post", tau="tau"),
        "at_pre": Sound.at_pre,
        "at_post": Sound.at_post,
    }
    whole = {"__module__": __name__, "__doc__": f"A rule: {fault}.", **own, **body}
    return type(fault, (Rule,), {k: v for k, v in whole.items() if v is not None})


def euler_flow(self: Any, dt: float, m: float) -> Changes:
    return {"m": -m * dt / self.tau}


def count_spike(self: Any, m: float) -> Changes:
    return {"w": self.up * m, "m": 1.0}


def drifting_flow(self: Any, dt: float) -> Changes:
    return {"w": 1e-6 * dt / self.tau}


def clocked(self: Any, r: float, t: float) -> Changes:
    return {"w": self.up * r * (1 + 1e-3 * math.sin(t))}


def in_milliseconds(self: Any, r: float, o: float) -> Changes:
    return {"w": self.up * r * math.exp(-self.tau / 10.0)}


def own_jump(self: Any, r: float) -> Changes:
    return {"w": self.up * (1.0 + r) - self.up * r * 0.5}


def through_zero(self: Any, o: float, w: float) -> Changes:
    return {"w": -100 * self.down * o}


def overflowing(self: Any, dt: float, m: float) -> Changes:
    return {"m": m / math.exp(dt / self.tau) - m}


def one_parameter(self: Any, r: float) -> Changes:
    return {"w": self.up * r + 0.0 * self.tau}


def remembering(self: Any, r: float) -> Changes:
    SLATE["n"] = SLATE.get("n", 0) + 1
    return {"w": self.up * r * SLATE["n"]}


def throwing_dice(self: Any, r: float) -> Changes:
    return {"w": self.up * r * (1 + 0.1 * random.random())}


def changing_itself(self: Any, r: float) -> Changes:
    object.__setattr__(self, "up", self.up * 1.01)
    return {"w": self.up * r}


def talking(self: Any, o: float, t: float) -> Changes:
    """Depress less when any input has just fired."""
    shared = SLATE.get("last", -1e9)
    SLATE["last"] = t
    return {"w": -self.down * o * (0.5 if 0 <= t - shared < 5 else 1.0)}


def by_turns(self: Any, o: float) -> Changes:
    SLATE["turn"] = not SLATE.get("turn", False)
    return {"w": -self.down * o * (1.0 if SLATE["turn"] else 0.9)}


def peeking(self: Any, o: float, t: float) -> Changes:
    """Depress only when, as far as is known, a spike follows within 20 ms."""
    known = SLATE.setdefault("times", set())
    known.add(t)
    return {"w": -self.down * o * (0.5 if any(t < s < t + 20 for s in known) else 1.0)}


def seeing_the_other(self: Any, r: float, t: float) -> Changes:
    SLATE["post"] = t
    return {"w": self.up * r}


def seen(self: Any, o: float, t: float) -> Changes:
    return {"w": -self.down * (o + (1.0 if SLATE.get("post") == t else 0.0))}


def rounded(self: Any, r: float) -> Changes:
    return {"w": float(np.float32(self.up * r))}


def lossy(self: Any, r: float, w: float) -> Changes:
    return {"w": float(np.float32(w + self.up * r)) - w if r > 0 else 0.0}


def first_only(self: Any, r: float, m: float) -> Changes:
    return {"w": self.up * r * (1.0 - 0.5 * m)}


def keep_first(self: Any, o: float, m: float) -> Changes:
    return {"w": -self.down * o, "m": (1.0 if o > 0 else -1.0) if m == 0 else 0.0}


def dividing(self: Any, r: float) -> Changes:
    return {"w": self.up * min(1.0 / r, 1.0) * r}


def asking_nothing(self: Any, r: float) -> Changes:
    return {"v": self.up * r}


def by_the_square(self: Any, r: float) -> Changes:
    return {"w": self.up * self.up * r}


MEMORY = {"m": state(0.0)}

#: fault -> (rule, the law that must catch it)
FAULTS: dict[str, tuple[type[Rule], str]] = {
    law_rule[0].__name__: law_rule
    for law_rule in (
        (variant("EulerDecay", at_pre=count_spike, flow=euler_flow, **MEMORY), "quiet_gaps"),
        (variant("DriftInSilence", flow=drifting_flow), "silence"),
        (variant("TimeOfDay", at_post=clocked), "time_origin"),
        (variant("HardCodedMilliseconds", at_post=in_milliseconds), "time_units"),
        (variant("HardCodedTrace", r=trace("pre", tau=20.0)), "time_units"),
        (variant("UnitSlip", tau=parameter(20.0, "1", low=1, high=1e3)), "time_units"),
        (variant("OwnJump", at_pre=own_jump), "both_sides"),
        (variant("ClippedSign", w=weight(1.0, low=-1.0, high=4.0), at_pre=through_zero), "sign"),
        (variant("MissingBound", w=weight(1.0, low=0.0, high=math.inf)), "bounds"),
        (variant("StartBeyondBound", w=weight(5.0, low=0.0, high=4.0)), "bounds"),
        (variant("LongGap", at_pre=count_spike, flow=overflowing, **MEMORY), "finite_numbers"),
        (variant("Division", at_post=dividing), "finite_numbers"),
        (variant("UnknownChange", at_post=asking_nothing), "finite_numbers"),
        (
            variant("ParameterIgnored", r=trace("pre", tau=20.0), o=trace("post", tau=20.0)),
            "everything_counts",
        ),
        (variant("TraceIgnored", x=trace("pre", tau="tau")), "everything_counts"),
        (variant("GlobalState", at_post=remembering), "same_bits"),
        (variant("Dice", at_post=throwing_dice), "same_bits"),
        (variant("ChangedInPlace", at_post=changing_itself), "same_bits"),
        (variant("CrossTalk", at_pre=talking), "locality"),
        (variant("IndexDependence", at_pre=by_turns), "input_order"),
        (variant("FuturePeeking", at_pre=peeking), "cause_first"),
        (variant("OrderOfHooks", at_pre=seen, at_post=seeing_the_other), "coincidence"),
        (variant("RoundedChange", at_post=rounded), "amplitudes"),
        (variant("SinglePrecision", at_post=lossy), "amplitudes"),
        (variant("NoAmplitude", at_post=by_the_square), "amplitudes"),
        (variant("NeverReset", at_pre=keep_first, at_post=first_only, **MEMORY), "half_period"),
        (variant("NotPlainPython", at_post=rounded), "compiled"),
        (
            variant("TooStrong", up=parameter(0.9, "1", low=0, high=1), dose=60),
            "dose_within_bounds",
        ),
    )
}
