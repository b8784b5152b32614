"""Inhibitory plasticity that balances excitation at a target rate, after Vogels et al."""

from __future__ import annotations

from plastic.parameters import parameter
from plastic.rules._interface import Changes, Claim, Rule, trace, weight

VOGELS = "Vogels et al. 2011, Science 334:1569, from memory"


class InhibitoryBalance(Rule):
    """Inhibition grows with near-coincident spikes and shrinks with each presynaptic one.

    At a presynaptic spike ``dw = eta (o - alpha)``, at a postsynaptic spike ``dw = eta r``, where
    r follows the pre-, o the postsynaptic spikes, each adding 1 and decaying with ``tau``, and
    ``alpha = 2 rho_0 tau``. One pair changes w by eta (exp(-|D|/tau) - alpha) whatever its order;
    two spikes of the same instant do not see each other, since traces are read just before it. w is
    kept in [0, w_max] after every change.

    For independent Poisson trains dw/dt = 2 eta tau r_pre (r_post - rho_0): an *inhibitory* input
    grows while the cell fires faster than ``rho_0`` and shrinks while it is slower, so that the
    cell ends at ``rho_0``: in a closed loop a little off, because spikes avoid inhibition.

    The weight is a multiple of the baseline inhibitory conductance. On an excitatory input the same
    changes drive the rate away from ``rho_0``. Equations from memory (high confidence); the paper's
    learning rate is in units of its own conductances and does not carry over, so ``eta`` is ours.
    """

    eta: float = parameter(0.005, "1", low=0, high=1, source="ours: seconds to minutes at 10 Hz")
    rho_0: float = parameter(5.0, "Hz", low=0, high=1e3, source=VOGELS + " (mid: 3 or 5)")
    tau: float = parameter(20.0, "ms", low=1e-3, high=1e4, source=VOGELS + " (high)")
    w_max: float = parameter(
        10.0, "1", low=1, high=1e6, source="ours: far above any measured change, stops a runaway"
    )

    sets = {"five_hertz": {}, "three_hertz": {"rho_0": 3}}
    equation = "pre: dw = eta (o - 2 rho_0 tau);  post: dw = eta r"
    references = ("Vogels TP, Sprekeler H, Zenke F, Clopath C, Gerstner W (2011) Science 334:1569",)
    illustrative = (
        "published for inhibitory inputs, which grow to hold the cell at rho_0; on an excitatory "
        "input the same changes drive the rate away from it"
    )
    amplitudes = ("eta",)
    claims = (
        Claim("near-coincident spikes strengthen, input first", 0.11, 0.13),
        Claim("and as much when the cell is first", 0.11, 0.13, lag=-10),
        Claim(
            "an input of a silent cell weakens by eta alpha with each spike", -0.061, -0.059, post=0
        ),
        Claim("one pair: eta (exp(-1/2) - 1/5)", 0.0020277, 0.0020377, times=1),
        Claim(
            "with rho_0 = 20 Hz the depression is four times as large",
            -0.0040050,
            -0.0039950,
            times=1,
            post=0,
            given={"rho_0": 20},
        ),
        Claim("all pairs count, on both sides", 0.0028671, 0.0028771, lag=20, pre=2, times=1),
        Claim("post post pre: both post count", 0.0038671, 0.0038771, lag=-20, post=2, times=1),
        Claim("strong strengthening ends at w_max", 9.0, 9.0, given={"eta": 1, "rho_0": 0}),
        Claim("strong weakening ends at 0", -1.0, -1.0, post=0, given={"eta": 1, "rho_0": 100}),
    )

    w = weight(1.0, low=0.0, high="w_max")
    r = trace("pre", tau="tau")
    o = trace("post", tau="tau")

    def at_pre(self, o: float) -> Changes:
        """Grow by what is left of postsynaptic spikes, less what the target rate would leave."""
        return {"w": self.eta * (o - 2e-3 * self.rho_0 * self.tau)}

    def at_post(self, r: float) -> Changes:
        """Grow by what is left of presynaptic spikes."""
        return {"w": self.eta * r}
