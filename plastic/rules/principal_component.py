"""Oja's rule: a Hebbian rule whose weights find the first principal component."""

from __future__ import annotations

from plastic.parameters import parameter
from plastic.rules._interface import Changes, Claim, Rule, weight

OURS = "ours: no published spiking constants exist"


class PrincipalComponent(Rule):
    """Oja's rule: Hebbian growth with a decay that keeps the length of the weight vector.

    Per presentation of length ``window``: ``dw = eta y (x - alpha y w)`` with x and y the pre- and
    postsynaptic rates; x, y and w are all read as they were before the presentation. w is kept in
    [w_min, w_max] after every change. Nothing else moves.

    On patterns of mean zero, with a linear cell y = w . x and ``alpha = 1``, this is the published
    rule (set ``patterns``: signed, practically unbounded): w goes to the first principal component
    of the inputs, with length 1, and the mean of y squared to the largest eigenvalue of their
    covariance. ``alpha`` sets the length, 1/sqrt(alpha). One cell has one output: Sanger's rule for
    several, whose outputs see each other, is not here; its fixed points are reached one after the
    other, by presenting what the components found so far leave of each pattern.

    On a spiking cell the rates are spikes counted over ``window``, opened by the first spike after
    the last window closed. There it is an illustration: no published spiking constants, blind to
    the order of spikes, and the rate of a spiking cell is not w . x, so that nothing holds a
    length: each w goes to <x y> / (alpha <y^2>) by itself. A silent cell does not change. The
    default ``alpha`` is ours: one presynaptic spike with three postsynaptic ones rests at 3.3 times
    the baseline; the default ``eta`` was set so that 60 of those about double the weight.
    """

    eta: float = parameter(1e-4, "1", low=0, high=1, source=OURS + "; see above")
    alpha: float = parameter(
        0.1, "1", low=0, high=1e3, source="1: Oja 1982; the default is ours, see above"
    )
    window: float = parameter(100.0, "ms", low=1e-3, high=1e5, source=OURS)
    w_min: float = parameter(0.0, "1", low=-1e6, high=1, source="ours: no change of sign in a cell")
    w_max: float = parameter(
        10.0, "1", low=1, high=1e6, source="ours: far above any measured change, stops a runaway"
    )

    sets = {
        "patterns": {"eta": 0.01, "alpha": 1, "window": 1, "w_min": -1e3, "w_max": 1e3},
    }
    equation = "dw = eta y (x - alpha y w)"
    references = (
        "Oja E (1982) J Math Biol 15:267",
        "Sanger TD (1989) Neural Netw 2:459 (several outputs)",
    )
    reads = "rates"
    illustrative = (
        "no published spiking constants, blind to the order of spikes, and a spiking cell is not "
        "linear; rates are counted over a declared window"
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
        Claim("a silent input of an active cell decays", -0.07, -0.05, pre=0),
        Claim("an active input of a silent cell stays", 0.0, 0.0, post=0),
        Claim(
            "one window of 10 and 30 Hz: eta y (x - alpha y w)",
            0.0209950,
            0.0210050,
            times=1,
            post=3,
        ),
        Claim("alpha sets the decay", 0.0119950, 0.0120050, times=1, post=3, given={"alpha": 0.2}),
        Claim(
            "two windows: the decay grows with the weight", 0.0418060, 0.0418160, times=2, post=3
        ),
        Claim("strong growth ends at w_max", 9.0, 9.0, times=1, given={"eta": 1, "alpha": 0}),
        Claim("strong decay ends at w_min", -1.0, -1.0, times=1, pre=0, given={"eta": 1}),
    )
    rate_powers = {"eta": -2}

    w = weight(1.0, low="w_min", high="w_max")

    def at_presentation(self, pre_rate: float, post_rate: float, w: float) -> Changes:
        """Grow with both rates, decay with the square of the cell's."""
        return {"w": self.eta * post_rate * (pre_rate - self.alpha * post_rate * w)}
