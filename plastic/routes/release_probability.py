"""More transmitter: the probability that a site releases."""

from __future__ import annotations

from plastic.parameters import parameter
from plastic.routes._interface import Route


class ReleaseProbability(Route):
    """Release probability rises: more quanta per spike, stronger depletion, lower paired pulses.

    It is the utilisation of the short-term dynamics, so depletion and the paired-pulse ratio
    follow. Bounded by ``release.highest`` of the input: strength multiplies by at most
    highest / p0.
    """

    delay: float = parameter(0.0, "ms", low=0, source="ours")
    tau: float = parameter(180_000.0, "ms", low=0, source="minutes: common practice")

    target = "probability"
    evidence = "established"
    equation = "p = p0 factor^share, at most release.highest"
    limit_cause = "release probability at its limit"
    references = (
        "Enoki R et al. (2009) Neuron 62:242 (from memory)",
        "Costa RP et al. (2015) eLife 4:e09457",
    )
