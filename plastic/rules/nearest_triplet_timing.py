"""The triplet rule of spike-timing-dependent plasticity, nearest spikes interacting."""

from __future__ import annotations

from plastic.parameters import parameter
from plastic.rules._interface import Changes, Claim, Rule, trace, weight

PG = "Pfister & Gerstner 2006, J Neurosci 26:9673, from memory, corroborated by the published error"


class NearestTripletTiming(Rule):
    """Triplet rule in which only the last spike of each side is remembered.

    At a presynaptic spike ``dw = -o1 (a2_minus + a3_minus r2)``; at a postsynaptic spike
    ``dw = r1 (a2_plus + a3_plus o2)``. r1 and r2 follow the presynaptic, o1 and o2 the
    postsynaptic spikes, each spike setting them to 1 (nearest spike; ``triplet_timing`` adds 1).
    The slow trace of the side that fires is read before its own jump, as in the paper, and spikes
    of one instant do not see each other. Hard bounds at 0 and w_max. The default is the minimal
    model fitted to visual cortex with 60 *continuous* pairs (the schedule of the fit, not of the
    slice experiment). Values from memory (high confidence); those of hippocampal_full looked up
    second hand, in a table that quotes them.
    """

    a2_plus: float = parameter(0.0, "1", low=0, high=1, source=PG)
    a3_plus: float = parameter(5.0e-2, "1", low=0, high=1, source=PG)
    a2_minus: float = parameter(8.0e-3, "1", low=0, high=1, source=PG)
    a3_minus: float = parameter(0.0, "1", low=0, high=1, source=PG)
    tau_plus: float = parameter(16.8, "ms", low=1e-3, high=1e4, source=PG)
    tau_minus: float = parameter(33.7, "ms", low=1e-3, high=1e4, source=PG)
    tau_x: float = parameter(
        714.0, "ms", low=1e-3, high=1e4, source=PG + "; unused when a3_minus = 0"
    )
    tau_y: float = parameter(40.0, "ms", low=1e-3, high=1e4, source=PG)
    w_max: float = parameter(
        10.0, "1", low=1, high=1e6, source="ours: far above any measured change, stops a runaway"
    )

    sets = {
        "visual_minimal": {},
        "visual_full": {
            "a2_plus": 8.8e-11,
            "a3_plus": 5.3e-2,
            "a2_minus": 6.6e-3,
            "a3_minus": 3.1e-3,
            "tau_x": 714,
            "tau_y": 40,
        },
        "hippocampal_minimal": {
            "a2_plus": 4.6e-3,
            "a3_plus": 9.1e-3,
            "a2_minus": 3.0e-3,
            "a3_minus": 0,
            "tau_x": 575,
            "tau_y": 48,
        },
        "hippocampal_full": {
            "a2_plus": 4.6e-3,
            "a3_plus": 9.1e-3,
            "a2_minus": 3.0e-3,
            "a3_minus": 7.5e-9,
            "tau_x": 575,
            "tau_y": 47,
        },
    }
    equation = "pre: dw = -o1 (a2_minus + a3_minus r2);  post: dw = r1 (a2_plus + a3_plus o2)"
    references = ("Pfister JP, Gerstner W (2006) J Neurosci 26:9673",)
    dose = 60
    amplitudes = ("a2_plus", "a3_plus", "a2_minus", "a3_minus")
    claims = (
        Claim("slow pairings, presynaptic first, do nothing", -0.01, 0.01),
        Claim("slow pairings the other way round depress by a third", -0.37, -0.34, lag=-10),
        Claim("at 50 Hz they potentiate by two thirds", 0.6, 0.67, rate=50),
        Claim("at 50 Hz they do so in either order", 0.6, 0.67, lag=-10, rate=50),
        Claim(
            "pre post post: two pairs and a triplet",
            0.006167,
            0.006177,
            lag=10,
            post=2,
            times=1,
            chosen="hippocampal_full",
        ),
        Claim(
            "pre post post post: earlier post do not add",
            0.008172,
            0.008182,
            lag=10,
            post=3,
            times=1,
            chosen="hippocampal_full",
        ),
        Claim(
            "post pre pre: two pairs and a triplet",
            -0.009321,
            -0.009311,
            lag=-10,
            pre=2,
            times=1,
            chosen="hippocampal_full",
            given={"a3_minus": 0.01},
        ),
        Claim(
            "post pre pre pre: earlier pre do not add",
            -0.014587,
            -0.014577,
            lag=-10,
            pre=3,
            times=1,
            chosen="hippocampal_full",
            given={"a3_minus": 0.01},
        ),
        Claim(
            "pre pre post: the last counts",
            0.002532,
            0.002542,
            lag=20,
            pre=2,
            times=1,
            chosen="hippocampal_full",
        ),
        Claim(
            "post post pre: the last counts",
            -0.002235,
            -0.002225,
            lag=-20,
            post=2,
            times=1,
            chosen="hippocampal_full",
        ),
        Claim("strong potentiation ends at w_max", 9.0, 9.0, given={"a2_plus": 1}),
        Claim("strong depression ends at 0", -1.0, -1.0, lag=-10, given={"a2_minus": 1}),
    )
    promises = ("both_sides",)

    w = weight(1.0, low=0.0, high="w_max")
    r1 = trace("pre", tau="tau_plus", jump="set")
    r2 = trace("pre", tau="tau_x", jump="set")
    o1 = trace("post", tau="tau_minus", jump="set")
    o2 = trace("post", tau="tau_y", jump="set")

    def at_pre(self, o1: float, r2: float) -> Changes:
        """Depress by the last postsynaptic spike, more after another presynaptic one."""
        return {"w": -o1 * (self.a2_minus + self.a3_minus * r2)}

    def at_post(self, r1: float, o2: float) -> Changes:
        """Potentiate by the last presynaptic spike, more after another postsynaptic one."""
        return {"w": r1 * (self.a2_plus + self.a3_plus * o2)}
