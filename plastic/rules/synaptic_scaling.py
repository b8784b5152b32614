"""Homeostatic synaptic scaling: all inputs are multiplied until the cell fires at its goal."""

from __future__ import annotations

import math

from plastic.parameters import parameter
from plastic.rules._interface import Changes, Claim, Rule, state, weight

VAN_ROSSUM = "van Rossum et al. 2000, from memory (mid)"


class SynapticScaling(Rule):
    """All inputs grow in proportion while the cell fires below its goal, and shrink above it.

    ``tau da/dt = -a + spikes`` measures the activity (each spike adds 1/tau),
    ``d missed/dt = a_goal - a`` sums what is missing, ``dw/dt = w (beta (a_goal - a) + gamma
    missed)``. Ratios of weights stay as they are. Between spikes all three are solved exactly
    (``flow``); a spike moves only a. w is kept in [0, w_max] whenever it is brought up to date,
    while ``missed`` goes on counting. The loop is stable for beta > gamma tau.

    A silent cell is below its goal and scales up: that is the published effect of blocking
    activity, and what the rule says of a silent baseline. By default it takes two days of silence
    to double, as in culture (about twofold after 48 h: Turrigiano et al. 1998, from memory, mid),
    and ``gamma = 0``, since in a cell that is silent between the events of a protocol the sum only
    winds up. The set ``van_rossum`` has the published control loop (form and numbers from memory,
    mid), about 100 times faster.

    Each input has its own copy of a and missed, because a flow sees only the variables of an input;
    it follows the spikes that arrive where the input lands, whatever their local amplitude.
    """

    beta: float = parameter(
        4e-7, "1", low=0, high=1, source="ours: 1/(s Hz), twofold in two days of silence; see above"
    )
    gamma: float = parameter(0.0, "Hz", low=0, high=1, source="ours: 1/(s^2 Hz), off; see above")
    tau: float = parameter(100_000.0, "ms", low=1, high=1e9, source=VAN_ROSSUM)
    a_goal: float = parameter(10.0, "Hz", low=0, high=1e3, source="ours")
    w_max: float = parameter(
        10.0, "1", low=1, high=1e6, source="ours: far above any measured change, stops a runaway"
    )

    sets = {"two_days": {}, "van_rossum": {"beta": 4e-5, "gamma": 1e-7, "tau": 100_000}}
    equation = "dw/dt = w (beta (a_goal - a) + gamma missed);  tau da/dt = -a + spikes"
    references = (
        "Turrigiano GG, Leslie KR, Desai NS, Rutherford LC, Nelson SB (1998) Nature 391:892",
        "van Rossum MCW, Bi GQ, Turrigiano GG (2000) J Neurosci 20:8812",
    )
    in_silence = "a silent cell is below its goal, so every input grows (published: activity block)"
    amplitudes = ("beta", "gamma")
    claims = (
        Claim(
            "two days without a spike of the cell double an input",
            0.95,
            1.05,
            rate=1 / 172_800,
            times=2,
            post=0,
        ),
        Claim("ten minutes of 30 Hz weaken by 0.4 %", -0.0045, -0.0035, rate=30, times=18_000),
        Claim(
            "silence of 1000 s: exp of beta times what is missing and gamma times its sum",
            1.4595981,
            1.4596081,
            times=2,
            rate=0.001,
            post=0,
            chosen="van_rossum",
        ),
        Claim(
            "a spike of the cell is forgotten within 100 s",
            3.4772076,
            3.4772116,
            times=2,
            rate=0.01,
            lag=0,
            given={"beta": 0.001, "gamma": 1e-05, "w_max": 100},
        ),
        Claim(
            "strong activity ends near 0",
            -1.0,
            -0.99,
            rate=30,
            times=300,
            given={"beta": 0.1, "tau": 1000},
        ),
        Claim("long silence ends at w_max", 9.0, 9.0, times=2, rate=1e-6, post=0),
    )
    promises = ("half_weights",)

    w = weight(1.0, low=0.0, high="w_max")
    a = state(0.0)
    missed = state(0.0)

    def at_post(self) -> Changes:
        """Count a spike of the cell."""
        return {"a": 1000.0 / self.tau}

    def flow(self, dt: float, w: float, a: float, missed: float) -> Changes:
        """Scale, forget activity and sum what is missing (exact)."""
        s, tau_s = dt / 1000.0, self.tau / 1000.0
        gone = -math.expm1(-s / tau_s)
        short = self.a_goal * s - a * tau_s * gone
        summed = missed * s + self.a_goal * s * s / 2.0 - a * tau_s * (s - tau_s * gone)
        # w_max is far below e^600, and w e^600 is still a number
        grown = min(self.beta * short + self.gamma * summed, 600.0)
        return {"w": w * math.expm1(grown), "a": -a * gone, "missed": short}
