"""A wider dendrite between the input and the soma: a hypothesis, not an established route."""

from __future__ import annotations

from plastic.parameters import parameter
from plastic.routes._interface import Route


class DendriteWidth(Route):
    """The dendrite on the path widens, for every input on it, and not always to its gain.

    Each stretch follows the mean of factor^share over all excitatory contacts at or beyond it.
    Widening lowers the axial resistance and the local saturation, and adds membrane to charge. The
    steady response of the soma to a weak input at the tip of a sealed dendrite, and with it the
    charge of its EPSP, grows only if G_soma R_axial + L coth L > 3; the peak of a brief EPSP may
    gain somewhat earlier, and a strong input gains by saturating less.
    Activity-driven widening of a dendritic shaft has not been measured; it is a hypothesis.
    """

    delay: float = parameter(0.0, "ms", low=0, source="ours")
    tau: float = parameter(1_800_000.0, "ms", low=0, source="ours: slow")
    lowest: float = parameter(0.7, "1", low=0.1, high=1, source="ours: 1/1.3 and a little")
    highest: float = parameter(1.3, "1", low=1, high=10, source="ours: no measurement exists")

    target = "diameter"
    evidence = "hypothesis"
    equation = "d = d0 mean(factor^share) over excitatory contacts at or beyond, at most 1.3 d0"
    limit_cause = "dendrite diameter at its limit"
    touches_others = True
    references = ("Bird AD, Cuntz H (2016) PLoS Comput Biol 12:e1004897 (theory)",)
