"""The suppression model: a spike counts less the sooner it follows another of its own side."""

from __future__ import annotations

from plastic.parameters import parameter
from plastic.rules._interface import Changes, Claim, Rule, state, trace, weight

FD = "Froemke & Dan 2002, Nature 416:433, from memory"


class SuppressionTiming(Rule):
    """Pair rule in which a spike is weakened by the one before it on the same side.

    Spike k of either side has the efficacy ``e = 1 - exp(-(t_k - t_{k-1}) / tau_s)``, with
    tau_s_pre or tau_s_post; the first has e = 1. Every pair of lag D = t_post - t_pre changes w by
    ``a_plus e_pre e_post exp(-D/tau_plus)`` for D > 0 and by
    ``-a_minus e_pre e_post exp(D/tau_minus)`` for D < 0; all pairs add (all-to-all). r and o are
    the sums of the efficacies of one side, each decayed to the last spike of that side; what is
    left of them since is r x and o y. Two spikes at the same instant do not see each other:
    everything reads r, o and the traces just before it.
    Hard bounds at 0 and w_max.

    Amplitudes are those of the whole published protocol of 60 to 80 pairs at 0.2 Hz, divided by
    60. The form and the suppression times from memory (high confidence), the window from memory
    (mid).
    """

    a_plus: float = parameter(1.03 / 60, "1", low=0, high=1, source=FD + " (mid); / 60")
    a_minus: float = parameter(0.51 / 60, "1", low=0, high=1, source=FD + " (mid); / 60")
    tau_plus: float = parameter(13.3, "ms", low=1e-3, high=1e4, source=FD + " (mid)")
    tau_minus: float = parameter(34.5, "ms", low=1e-3, high=1e4, source=FD + " (mid)")
    tau_s_pre: float = parameter(28.0, "ms", low=1e-3, high=1e4, source=FD + " (high)")
    tau_s_post: float = parameter(88.0, "ms", low=1e-3, high=1e4, source=FD + " (high)")
    w_max: float = parameter(
        10.0, "1", low=1, high=1e6, source="ours: far above any measured change, stops a runaway"
    )

    equation = (
        "dw = e_pre e_post F(D), e = 1 - exp(-interval/tau_s);  "
        "D > 0: F = a_plus exp(-D/tau_plus);  D < 0: F = -a_minus exp(D/tau_minus)"
    )
    references = ("Froemke RC, Dan Y (2002) Nature 416:433",)
    dose = 60
    amplitudes = ("a_plus", "a_minus")
    claims = (
        Claim("60 pairings at 1 Hz and +10 ms potentiate by half", 0.47, 0.5),
        Claim("the other way round they depress by two fifths", -0.4, -0.36, lag=-10),
        Claim("further spikes of the cell, 10 ms apart, add little", 0.5, 0.54, rate=0.1, post=3),
        Claim("at 50 Hz hardly anything is left", -0.05, 0.05, rate=50),
        Claim(
            "two spikes of the cell: the second counts by 1 - exp(-10/88)",
            0.0084986,
            0.0085086,
            lag=10,
            post=2,
            times=1,
        ),
        Claim(
            "three of each side: every pair by both efficacies",
            0.0097875,
            0.0097975,
            lag=5,
            pre=3,
            post=3,
            apart=7.0,
            times=1,
        ),
        Claim(
            "and the other way round",
            -0.0080739,
            -0.0080639,
            lag=-5,
            pre=3,
            post=3,
            apart=7.0,
            times=1,
        ),
        Claim("strong potentiation ends at w_max", 9.0, 9.0, given={"a_plus": 1}),
        Claim("strong depression ends at 0", -1.0, -1.0, lag=-10, given={"a_minus": 1}),
    )
    promises = ("both_sides",)

    w = weight(1.0, low=0.0, high="w_max")
    r = state(0.0)
    o = state(0.0)
    x = trace("pre", tau="tau_plus", jump="set")
    y = trace("post", tau="tau_minus", jump="set")
    s_pre = trace("pre", tau="tau_s_pre", jump="set")
    s_post = trace("post", tau="tau_s_post", jump="set")

    def at_pre(self, r: float, x: float, o: float, y: float, s_pre: float) -> Changes:
        """Depress by earlier postsynaptic spikes; enter the presynaptic sum with this efficacy."""
        efficacy = 1 - s_pre
        return {"w": -self.a_minus * efficacy * o * y, "r": r * x + efficacy - r}

    def at_post(self, r: float, x: float, o: float, y: float, s_post: float) -> Changes:
        """Potentiate by earlier presynaptic spikes; enter the postsynaptic sum likewise."""
        efficacy = 1 - s_post
        return {"w": self.a_plus * efficacy * r * x, "o": o * y + efficacy - o}
