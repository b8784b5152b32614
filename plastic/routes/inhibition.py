"""Less inhibition: the quantum of the inhibition that the input recruits."""

from __future__ import annotations

from plastic.parameters import parameter
from plastic.routes._interface import Route


class Inhibition(Route):
    """The inhibition that a learning input drives gets weaker, so that its EPSP is cut less.

    The inhibitory quantum falls as the factor rises. An inhibitory input that other inputs drive
    too gets weaker for all of them; driven by several learning inputs it follows their mean factor.
    Only inputs that recruit inhibition can take this route.
    """

    delay: float = parameter(0.0, "ms", low=0, source="ours")
    tau: float = parameter(
        300_000.0,
        "ms",
        low=0,
        source="minutes (inhibitory depression by endocannabinoids, Chevaleyre & Castillo 2003; "
        "from memory)",
    )
    lowest: float = parameter(
        0.3,
        "1",
        low=0,
        high=1,
        source="ours: inhibitory long-term depression leaves most of the inhibition; published "
        "depressions are to 60-80 % (from memory, low)",
    )
    highest: float = parameter(3.0, "1", low=1, source="ours: no upper limit is known")

    target = "inhibition"
    sign = -1
    evidence = "established"
    equation = "q_inhibitory = q0 factor^-share"
    limit_cause = "inhibition at its limit"
    touches_others = True
    references = (
        "Chevaleyre V, Castillo PE (2003) Neuron 38:461 (from memory)",
        "Lu YM, Mansuy IM, Kandel ER, Roder J (2000) Neuron 26:197 (from memory)",
    )
