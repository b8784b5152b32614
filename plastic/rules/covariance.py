"""The covariance rule of Sejnowski."""

from __future__ import annotations

import math

from plastic.parameters import parameter
from plastic.rules._interface import Changes, Claim, Rule, state, weight

OURS = "ours: no published spiking constants exist"
FORM = "Sejnowski 1977, from memory (high): 1 subtracts the average, 0 does not"


class Covariance(Rule):
    """Covariance rule: two rates that leave their averages together strengthen the input.

    Per presentation of length ``window``: ``dw = eta (x - centre_x x_mean)(y - centre_y y_mean)``
    with x and y the pre- and postsynaptic rates. The averages follow
    ``tau_mean dx_mean/dt = x_rest + x - x_mean``, y_mean likewise, and are read as they were before
    the presentation. w is kept in [w_min, w_max] after every change.

    The three published forms have the same mean, eta Cov(x, y), once averages are exact, and differ
    on silent inputs: with ``centre_x = 0`` only active inputs change (set ``active_inputs``), with
    ``centre_y = 0`` every input below its average is depressed while the cell fires (set
    ``active_cell``), and by default, with both, also an active input of a silent cell is. A running
    average of n independent presentations (n = 2 tau_mean/window - 1 or so) makes the default
    larger by 1/n, since both averages carry the noise of the same presentations.

    On patterns x and y are the rates themselves, averages start from and rest at 0 (set
    ``patterns``: signed, practically unbounded). A linear cell then has dw = eta C w: no limit.

    On a spiking cell the rates are spikes counted over ``window``, opened by the first spike after
    the last window closed. There it is an illustration: no published spiking constants, blind to
    the order of spikes, and without a spike no window opens, so that the joint silence which the
    equation counts as correlation teaches nothing. ``x_rest`` and ``y_rest`` are ours: they keep
    the averages through a silent baseline. The default ``eta`` was set so that one presynaptic
    spike with three postsynaptic ones in a window, 60 times, about doubles the weight.
    """

    eta: float = parameter(6.5e-5, "1", low=0, high=1, source=OURS + "; see above")
    centre_x: float = parameter(1.0, "1", low=0, high=1, source=FORM)
    centre_y: float = parameter(1.0, "1", low=0, high=1, source=FORM)
    x_rest: float = parameter(1.0, "Hz", low=-1e4, high=1e4, source=OURS)
    y_rest: float = parameter(1.0, "Hz", low=-1e4, high=1e4, source=OURS)
    tau_mean: float = parameter(60_000.0, "ms", low=1e-3, high=1e9, source=OURS)
    window: float = parameter(100.0, "ms", low=1e-3, high=1e5, source=OURS)
    w_min: float = parameter(0.0, "1", low=-1e6, high=1, source="ours: no change of sign in a cell")
    w_max: float = parameter(
        10.0, "1", low=1, high=1e6, source="ours: far above any measured change, stops a runaway"
    )

    sets = {
        "active_inputs": {"centre_x": 0},
        "active_cell": {"centre_y": 0},
        "patterns": {
            "eta": 0.01,
            "x_rest": 0,
            "y_rest": 0,
            "tau_mean": 100,
            "window": 1,
            "w_min": -1e3,
            "w_max": 1e3,
        },
    }
    equation = "dw = eta (x - centre_x x_mean)(y - centre_y y_mean)"
    references = (
        "Sejnowski TJ (1977) J Math Biol 4:303",
        "Sejnowski TJ (1977) Biophys J 18:123",
    )
    reads = "rates"
    illustrative = (
        "no published spiking constants, blind to the order of spikes and to joint silence; rates "
        "are counted over a declared window"
    )
    amplitudes = ("eta",)
    claims = (
        Claim(
            "one spike of the input with three of the cell, 60 times, doubles",
            0.9,
            1.1,
            rate=0.1,
            post=3,
        ),
        Claim("pairings at 1 Hz potentiate by 29 %, whatever the order", 0.28, 0.3, lag=-10),
        Claim("an active input of a silent cell is depressed", -0.04, -0.03, post=0),
        Claim("so is a silent input of an active cell", -0.04, -0.03, pre=0),
        Claim(
            "one window of 10 and 30 Hz: eta (x - x_mean)(y - y_mean)",
            0.0169600,
            0.0169700,
            times=1,
            post=3,
        ),
        Claim(
            "with half of each average",
            0.0183965,
            0.0184065,
            times=1,
            post=3,
            given={"centre_x": 0.5, "centre_y": 0.2},
        ),
        Claim(
            "two windows, 2 s apart: the averages have risen and come back by 1.9 s",
            0.0334109,
            0.0334209,
            times=2,
            rate=0.5,
            post=3,
            given={"tau_mean": 1000},
        ),
        Claim(
            "and so with other averages in silence",
            0.0214134,
            0.0214234,
            times=2,
            rate=0.5,
            post=3,
            given={"tau_mean": 1000, "x_rest": 4, "y_rest": 2},
        ),
        Claim("strong potentiation ends at w_max", 9.0, 9.0, given={"eta": 1}),
        Claim("strong depression ends at w_min", -1.0, -1.0, pre=0, given={"eta": 1}),
    )
    rate_powers = {"eta": -2}

    w = weight(1.0, low="w_min", high="w_max")
    x_mean = state("x_rest")
    y_mean = state("y_rest", scope="cell")

    def at_presentation(
        self, pre_rate: float, post_rate: float, x_mean: float, y_mean: float
    ) -> Changes:
        """Change by the product of the two departures; move the input's average (exact)."""
        x = pre_rate - self.centre_x * x_mean
        y = post_rate - self.centre_y * y_mean
        moved = -math.expm1(-self.window / self.tau_mean)
        return {"w": self.eta * x * y, "x_mean": (self.x_rest + pre_rate - x_mean) * moved}

    def cell_at_presentation(self, post_rate: float, y_mean: float) -> Changes:
        """Move the cell's average over the window at the rate held in it (exact)."""
        moved = -math.expm1(-self.window / self.tau_mean)
        return {"y_mean": (self.y_rest + post_rate - y_mean) * moved}

    def flow(self, dt: float, x_mean: float) -> Changes:
        """Relax the input's average towards its rest in silence (exact)."""
        return {"x_mean": (self.x_rest - x_mean) * -math.expm1(-dt / self.tau_mean)}

    def cell_flow(self, dt: float, y_mean: float) -> Changes:
        """Relax the cell's average towards its rest in silence (exact)."""
        return {"y_mean": (self.y_rest - y_mean) * -math.expm1(-dt / self.tau_mean)}
