"""The sliding-threshold rule of Bienenstock, Cooper & Munro (BCM)."""

from __future__ import annotations

import math

from plastic.parameters import parameter
from plastic.rules._interface import Changes, Claim, Rule, state, weight

OURS = "ours: no published spiking constants exist"


class SlidingThreshold(Rule):
    """BCM rule: active inputs are depressed below a threshold rate and potentiated above it.

    Per presentation of length ``window``: ``dw = eta x y (y - theta)`` with x and y the pre- and
    postsynaptic rates, while ``tau_theta dtheta/dt = theta_rest + y**2 / y_0 - theta``.

    On patterns x and y are the rates themselves and with ``theta_rest = 0`` this is the published
    rule with theta following the mean of y squared: its stable states respond 1/p_k to one
    pattern k and not at all to the others (the set ``patterns``: signed, practically unbounded).

    On a spiking cell the rates are spikes counted over ``window``, opened by the first spike after
    the last window closed. There the rule is an illustration: there are no published spiking
    constants, and it is blind to the order of spikes. ``theta_rest`` is ours: it keeps the
    threshold through a silent baseline, where the plain average would fall to zero and make the
    first spike after it potentiate without limit. The default ``eta`` was set so that one
    presynaptic spike with three postsynaptic ones in a window, 60 times, about doubles the weight.
    """

    eta: float = parameter(2.7e-6, "1", low=0, high=1, source=OURS + "; see above")
    tau_theta: float = parameter(60_000.0, "ms", low=1e-3, high=1e9, source=OURS)
    y_0: float = parameter(10.0, "Hz", low=1e-9, high=1e6, source=OURS)
    theta_rest: float = parameter(10.0, "Hz", low=0, high=1e4, source=OURS)
    window: float = parameter(100.0, "ms", low=1e-3, high=1e5, source=OURS)
    w_min: float = parameter(0.0, "1", low=-1e6, high=1, source="ours: no change of sign in a cell")
    w_max: float = parameter(
        10.0, "1", low=1, high=1e6, source="ours: far above any measured change, stops a runaway"
    )

    sets = {
        "patterns": {
            "eta": 0.01,
            "tau_theta": 10,
            "y_0": 1,
            "theta_rest": 0,
            "window": 1,
            "w_min": -1e3,
            "w_max": 1e3,
        },
    }
    equation = "dw = eta x y (y - theta);  tau_theta dtheta/dt = theta_rest + y^2/y_0 - theta"
    references = (
        "Bienenstock EL, Cooper LN, Munro PW (1982) J Neurosci 2:32",
        "Intrator N, Cooper LN (1992) Neural Netw 5:3 (theta = E[y^2])",
    )
    reads = "rates"
    illustrative = (
        "no published spiking constants, blind to the order of spikes; rates are counted over "
        "a declared window"
    )
    amplitudes = ("eta",)
    claims = (
        Claim("pairings at 1 Hz hardly depress", -0.02, -0.001),
        Claim("pairings at 20 Hz, two a window, potentiate", 0.25, 0.35, rate=20),
        Claim(
            "one spike of the input with three of the cell, 60 times, doubles",
            0.85,
            1.05,
            rate=0.1,
            post=3,
        ),
        Claim(
            "one window of 10 and 30 Hz: eta x y (y - theta)", 0.0161950, 0.0162050, times=1, post=3
        ),
        Claim(
            "two windows, 2 s apart: the threshold has risen and come back by 1.9 s",
            0.0151574,
            0.0151674,
            times=2,
            rate=0.5,
            post=3,
            given={"tau_theta": 1000, "theta_rest": 20},
        ),
        Claim("strong potentiation ends at w_max", 9.0, 9.0, post=5, given={"eta": 1}),
        Claim(
            "strong depression ends at w_min",
            -1.0,
            -1.0,
            times=3,
            given={"eta": 1, "theta_rest": 100},
        ),
    )
    promises = ("both_sides",)
    rate_powers = {"eta": -3}

    w = weight(1.0, low="w_min", high="w_max")
    theta = state("theta_rest", scope="cell")

    def at_presentation(self, pre_rate: float, post_rate: float, theta: float) -> Changes:
        """Change in proportion to the presynaptic rate, with the sign of y - theta."""
        return {"w": self.eta * pre_rate * post_rate * (post_rate - theta)}

    def cell_at_presentation(self, post_rate: float, theta: float) -> Changes:
        """Move the threshold over the window at the rate held in it (exact)."""
        goal = self.theta_rest + post_rate * post_rate / self.y_0
        return {"theta": (goal - theta) * -math.expm1(-self.window / self.tau_theta)}

    def cell_flow(self, dt: float, theta: float) -> Changes:
        """Relax the threshold towards its rest in silence (exact)."""
        return {"theta": (self.theta_rest - theta) * -math.expm1(-dt / self.tau_theta)}
