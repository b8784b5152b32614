"""Pair-based spike-timing-dependent plasticity, all spikes paired with all."""

from __future__ import annotations

from plastic.parameters import parameter
from plastic.rules._interface import Changes, Claim, Rule, trace, weight

BI_POO = "Bi & Poo 2001, Annu Rev Neurosci 24:139 (fit to Bi & Poo 1998)"


class PairTiming(Rule):
    """Pair rule: every pre-post pair potentiates, every post-pre pair depresses.

    One pair of lag D = t_post - t_pre changes w by ``a_plus (1 - w/w_max)^mu exp(-D/tau_plus)``
    for D > 0 and by ``-a_minus (w/w_max)^mu exp(D/tau_minus)`` for D < 0; all pairs add
    (all-to-all). Two spikes at the same instant do not see each other: everything reads the traces
    and w just before the instant. Hard bounds at 0 and w_max hold for every mu. Other pairings:
    ``nearest_pair_timing``, ``pre_centred_pair_timing``, ``reduced_pair_timing``.

    With mu = 0 (additive) the amplitudes are those of the published fit for a whole protocol of 60
    pairs at 1 Hz (0.777 and 0.273), divided by 60. Time constants looked up second hand; amplitudes
    from memory (mid to high confidence). With mu > 0, up to 1 (multiplicative), w/w_max is the
    weight of Gutig et al. 2003, a_plus and a_minus are the amplitudes at w = 0 and at w = w_max,
    and the window at the start is smaller, by (1 - 1/w_max)^mu and w_max^-mu: choose w_max with mu.
    """

    a_plus: float = parameter(0.777 / 60, "1", low=0, high=1, source=BI_POO + ", from memory; / 60")
    a_minus: float = parameter(
        0.273 / 60, "1", low=0, high=1, source=BI_POO + ", from memory; / 60"
    )
    tau_plus: float = parameter(16.8, "ms", low=1e-3, high=1e4, source=BI_POO)
    tau_minus: float = parameter(33.7, "ms", low=1e-3, high=1e4, source=BI_POO)
    w_max: float = parameter(
        10.0, "1", low=1, high=1e6, source="ours: far above any measured change, stops a runaway"
    )
    mu: float = parameter(0.0, "1", low=0, high=1, source="additive, as the fit assumes")

    sets = {
        "hippocampal_culture": {},
        "near_balanced": {"a_plus": 0.005, "a_minus": 0.00525, "tau_plus": 20, "tau_minus": 20},
        "visual_cortex": {
            "a_plus": 1.03 / 60,
            "a_minus": 0.51 / 60,
            "tau_plus": 13.3,
            "tau_minus": 34.5,
        },
        "multiplicative": {
            "a_plus": 0.01,
            "a_minus": 0.0105,
            "tau_plus": 20,
            "tau_minus": 20,
            "w_max": 2,
            "mu": 1,
        },
    }
    equation = (
        "D > 0: dw = a_plus (1 - w/w_max)^mu exp(-D/tau_plus);  "
        "D < 0: dw = -a_minus (w/w_max)^mu exp(D/tau_minus)"
    )
    references = (
        "Bi G, Poo M (1998) J Neurosci 18:10464",
        "Bi G, Poo M (2001) Annu Rev Neurosci 24:139",
        "Froemke RC, Dan Y (2002) Nature 416:433 (set visual_cortex, from memory)",
        "Song S, Miller KD, Abbott LF (2000) Nat Neurosci 3:919 (set near_balanced, from memory)",
        "Gutig R, Aharonov R, Rotter S, Sompolinsky H (2003) J Neurosci 23:3697 (mu; set "
        "multiplicative: alpha 1.05, 20 ms, lambda 0.005 from memory; w_max = 2 is ours, the start "
        "in the middle of the range)",
    )
    dose = 60
    amplitudes = ("a_plus", "a_minus")
    claims = (
        Claim("60 pairings at 1 Hz and +10 ms potentiate by 43 %", 0.42, 0.435),
        Claim("at -10 ms they depress by 20 %", -0.21, -0.195, lag=-10),
        Claim("pre pre post: both pre count", 0.011074, 0.011084, lag=20, pre=2, times=1),
        Claim("post post pre: both post count", -0.005900, -0.005890, lag=-20, post=2, times=1),
        Claim("pre post post: both post count", 0.011074, 0.011084, lag=10, post=2, times=1),
        Claim("post pre pre: both pre count", -0.005900, -0.005890, lag=-10, pre=2, times=1),
        Claim(
            "mu = 1/4, w = w_max / 4: (3/4)^(1/4) of the potentiation",
            0.006640,
            0.006650,
            times=1,
            given={"mu": 0.25, "w_max": 4},
        ),
        Claim(
            "and (1/4)^(1/4) of the depression",
            -0.002396,
            -0.002386,
            times=1,
            lag=-10,
            given={"mu": 0.25, "w_max": 4},
        ),
        Claim("strong potentiation ends at w_max", 9.0, 9.0, given={"a_plus": 1}),
        Claim("strong depression ends at 0", -1.0, -1.0, lag=-10, given={"a_minus": 1}),
    )
    promises = ("both_sides",)

    w = weight(1.0, low=0.0, high="w_max")
    r1 = trace("pre", tau="tau_plus")
    o1 = trace("post", tau="tau_minus")

    def at_pre(self, o1: float, w: float) -> Changes:
        """Depress by what is left of earlier postsynaptic spikes."""
        # a power costs more than the rest of the hook
        share = (w / self.w_max) ** self.mu if self.mu > 0 else 1.0
        return {"w": -self.a_minus * share * o1}

    def at_post(self, r1: float, w: float) -> Changes:
        """Potentiate by what is left of earlier presynaptic spikes."""
        share = (1 - w / self.w_max) ** self.mu if self.mu > 0 else 1.0
        return {"w": self.a_plus * share * r1}
