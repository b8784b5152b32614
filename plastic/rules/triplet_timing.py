"""The triplet rule of spike-timing-dependent plasticity, all spikes interacting."""

from __future__ import annotations

from plastic.parameters import parameter
from plastic.rules._interface import Changes, Claim, Rule, trace, weight

PG = "Pfister & Gerstner 2006, J Neurosci 26:9673, from memory, corroborated by the published error"


class TripletTiming(Rule):
    """Triplet rule: pairs, plus a term for two spikes of one side around one of the other.

    At a presynaptic spike ``dw = -o1 (a2_minus + a3_minus r2)``; at a postsynaptic spike
    ``dw = r1 (a2_plus + a3_plus o2)``. r1 and r2 follow the presynaptic, o1 and o2 the
    postsynaptic spikes, each spike adding 1 (all-to-all). The slow trace of the side that fires is
    read before its own jump, as in the paper. The default is the minimal model fitted to visual
    cortex with 60 *continuous* pairs (the schedule of the fit, not of the slice experiment).
    """

    a2_plus: float = parameter(0.0, "1", low=0, high=1, source=PG)
    a3_plus: float = parameter(6.5e-3, "1", low=0, high=1, source=PG)
    a2_minus: float = parameter(7.1e-3, "1", low=0, high=1, source=PG)
    a3_minus: float = parameter(0.0, "1", low=0, high=1, source=PG)
    tau_plus: float = parameter(16.8, "ms", low=1e-3, high=1e4, source=PG)
    tau_minus: float = parameter(33.7, "ms", low=1e-3, high=1e4, source=PG)
    tau_x: float = parameter(
        101.0, "ms", low=1e-3, high=1e4, source=PG + "; unused when a3_minus = 0"
    )
    tau_y: float = parameter(114.0, "ms", low=1e-3, high=1e4, source=PG)
    w_max: float = parameter(
        10.0, "1", low=1, high=1e6, source="ours: far above any measured change, stops a runaway"
    )

    sets = {
        "visual_minimal": {},
        "visual_full": {
            "a2_plus": 5e-10,
            "a3_plus": 6.2e-3,
            "a2_minus": 7.0e-3,
            "a3_minus": 2.3e-4,
            "tau_x": 101,
            "tau_y": 125,
        },
        "hippocampal_minimal": {
            "a2_plus": 5.3e-3,
            "a3_plus": 8.0e-3,
            "a2_minus": 3.5e-3,
            "a3_minus": 0,
            "tau_x": 946,
            "tau_y": 40,
        },
        "hippocampal_full": {
            "a2_plus": 6.1e-3,
            "a3_plus": 6.7e-3,
            "a2_minus": 1.6e-3,
            "a3_minus": 1.4e-3,
            "tau_x": 946,
            "tau_y": 27,
        },
    }
    equation = "pre: dw = -o1 (a2_minus + a3_minus r2);  post: dw = r1 (a2_plus + a3_plus o2)"
    references = ("Pfister JP, Gerstner W (2006) J Neurosci 26:9673",)
    dose = 60
    amplitudes = ("a2_plus", "a3_plus", "a2_minus", "a3_minus")
    claims = (
        Claim("slow pairings, presynaptic first, do nothing", -0.01, 0.01),
        Claim("slow pairings the other way round depress by a third", -0.35, -0.28, lag=-10),
        Claim("at 20 Hz, presynaptic first, they potentiate by a quarter", 0.2, 0.26, rate=20),
        Claim("at 50 Hz they potentiate by three quarters", 0.7, 0.8, rate=50),
        Claim("at 50 Hz they do so in either order", 0.7, 0.8, lag=-10, rate=50),
        Claim(
            "pre post post: two pairs and a triplet",
            0.006620,
            0.006630,
            lag=10,
            post=2,
            times=1,
            chosen="hippocampal_full",
        ),
        Claim(
            "pre post post post: earlier post add",
            0.008954,
            0.008964,
            lag=10,
            post=3,
            times=1,
            chosen="hippocampal_full",
        ),
        Claim(
            "post pre pre: two pairs and a triplet",
            -0.007544,
            -0.007534,
            lag=-10,
            pre=2,
            times=1,
            chosen="hippocampal_full",
            given={"a3_minus": 0.01},
        ),
        Claim(
            "post pre pre pre: earlier pre add",
            -0.016283,
            -0.016273,
            lag=-10,
            pre=3,
            times=1,
            chosen="hippocampal_full",
            given={"a3_minus": 0.01},
        ),
        Claim(
            "pre pre post: both count",
            0.005214,
            0.005224,
            lag=20,
            pre=2,
            times=1,
            chosen="hippocampal_full",
        ),
        Claim(
            "post post pre: both count",
            -0.002078,
            -0.002068,
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
    r1 = trace("pre", tau="tau_plus")
    r2 = trace("pre", tau="tau_x")
    o1 = trace("post", tau="tau_minus")
    o2 = trace("post", tau="tau_y")

    def at_pre(self, o1: float, r2: float) -> Changes:
        """Depress by earlier postsynaptic spikes, more after another presynaptic one."""
        return {"w": -o1 * (self.a2_minus + self.a3_minus * r2)}

    def at_post(self, r1: float, o2: float) -> Changes:
        """Potentiate by earlier presynaptic spikes, more after another postsynaptic one."""
        return {"w": r1 * (self.a2_plus + self.a3_plus * o2)}
