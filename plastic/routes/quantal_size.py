"""More receptors: the size of the response to one quantum."""

from __future__ import annotations

from plastic.parameters import parameter
from plastic.routes._interface import Route


class QuantalSize(Route):
    """Quantal conductance rises: larger responses, same failures, same paired-pulse ratio."""

    delay: float = parameter(0.0, "ms", low=0, source="ours")
    tau: float = parameter(
        120_000.0, "ms", low=0, source="spine enlargement about 2 min; Matsuzaki et al. 2004"
    )
    highest: float = parameter(
        4.0,
        "1",
        low=1,
        source="spine volume 3-4 fold at once; Matsuzaki et al. 2004, from memory (mid)",
    )

    target = "quantum"
    evidence = "established"
    equation = "q = q0 factor^share"
    limit_cause = "quantal size at its limit"
    references = ("Matsuzaki M et al. (2004) Nature 429:761",)
