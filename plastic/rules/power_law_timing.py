"""The power-law pair rule: potentiation grows less than the weight, depression as the weight."""

from __future__ import annotations

from plastic.parameters import parameter
from plastic.rules._interface import Changes, Claim, Rule, trace, weight

MAD = "Morrison, Aertsen & Diesmann 2007, Neural Comput 19:1437, from memory (mid)"


class PowerLawTiming(Rule):
    """Pair rule whose potentiation grows as a power of the weight, its depression as the weight.

    One pair of lag D = t_post - t_pre changes w by ``lambda_ w_0^(1-mu) w^mu exp(-D/tau_plus)`` for
    D > 0 and by ``-lambda_ alpha w exp(D/tau_minus)`` for D < 0; all pairs add (all-to-all). Two
    spikes at the same instant do not see each other: everything reads the traces and w just before
    the instant. w is a current in pA, w_0 its unit; it has one fixed point under uncorrelated
    spikes, ``w_0 (tau_plus / (alpha tau_minus))^(1/(1-mu))``, for mu < 1. No upper bound is
    published: w_max stops a runaway. mu = 0 is constant potentiation with proportional depression,
    the means of van Rossum, Bi & Turrigiano 2000 (c_p = lambda_ w_0, c_d = lambda_ alpha).

    The paper's lambda has a trailing underscore, since the word is taken. Values from memory (mid
    confidence); the start is ours, the fixed point of these values, rounded.
    """

    lambda_: float = parameter(0.1, "1", low=0, high=100, source=MAD)
    alpha: float = parameter(0.11, "1", low=1e-6, high=1e3, source=MAD)
    mu: float = parameter(0.4, "1", low=0, high=1, source=MAD)
    tau_plus: float = parameter(20.0, "ms", low=1e-3, high=1e4, source=MAD)
    tau_minus: float = parameter(20.0, "ms", low=1e-3, high=1e4, source=MAD)
    w_0: float = parameter(1.0, "pA", low=1e-6, high=1e6, source=MAD)
    w_start: float = parameter(
        39.6, "pA", low=1e-6, high=1e3, source="ours: the fixed point of the values above"
    )
    w_max: float = parameter(
        1e3, "pA", low=1e3, high=1e9, source="ours: far above the fixed point, stops a runaway"
    )

    equation = (
        "D > 0: dw = lambda_ w_0^(1-mu) w^mu exp(-D/tau_plus);  "
        "D < 0: dw = -lambda_ alpha w exp(D/tau_minus)"
    )
    references = (
        "Morrison A, Aertsen A, Diesmann M (2007) Neural Comput 19:1437",
        "van Rossum MCW, Bi GQ, Turrigiano GG (2000) J Neurosci 20:8812 (mu = 0)",
    )
    dose = 60
    amplitudes = ("lambda_",)
    claims = (
        Claim("60 pairings at 1 Hz and +10 ms potentiate by 43 %", 0.42, 0.44),
        Claim("the other way round they depress by a third", -0.34, -0.32, lag=-10),
        Claim("one pair potentiates by the power 0.4 of the weight", 0.0066667, 0.0066767, times=1),
        Claim("and depresses in proportion to it", -0.0066768, -0.0066668, times=1, lag=-10),
        Claim(
            "twice the unit of weight, 2^0.6 times the potentiation",
            0.0101074,
            0.0101174,
            times=1,
            given={"w_0": 2},
        ),
        Claim(
            "with another power and other time constants it potentiates accordingly",
            0.0027009,
            0.0027109,
            times=1,
            given={"mu": 0.2, "tau_plus": 15},
        ),
        Claim(
            "and depresses accordingly",
            -0.0082713,
            -0.0082613,
            times=1,
            lag=-10,
            given={"mu": 0.2, "tau_minus": 35},
        ),
        Claim("pre pre post: both pre count", 0.0107133, 0.0107233, lag=20, pre=2, times=1),
        Claim("post post pre: both post count", -0.0107235, -0.0107135, lag=-20, post=2, times=1),
        Claim(
            "strong potentiation ends at w_max",
            24.252525251525253,
            24.252525253525253,
            given={"lambda_": 100},
        ),
        Claim("strong depression ends at 0", -1.0, -1.0, lag=-10, given={"lambda_": 80}),
    )
    promises = ("both_sides",)

    w = weight("w_start", low=0.0, high="w_max")
    r1 = trace("pre", tau="tau_plus")
    o1 = trace("post", tau="tau_minus")

    def at_pre(self, o1: float, w: float) -> Changes:
        """Depress in proportion to the weight by what is left of earlier postsynaptic spikes."""
        return {"w": -self.lambda_ * self.alpha * w * o1}

    def at_post(self, r1: float, w: float) -> Changes:
        """Potentiate as a power of the weight by what is left of earlier presynaptic spikes."""
        return {"w": self.lambda_ * self.w_0 ** (1 - self.mu) * w**self.mu * r1}
