"""More release sites at the same place."""

from __future__ import annotations

from plastic.parameters import parameter
from plastic.routes._interface import Route


class ReleaseSites(Route):
    """The number of sites rises; a fractional site releases with a fractional probability."""

    delay: float = parameter(0.0, "ms", low=0, source="ours")
    tau: float = parameter(1_200_000.0, "ms", low=0, source="tens of minutes: common practice")
    highest: float = parameter(10.0, "1", low=1, source="up to 10-fold in 12 h; Loebel et al. 2013")

    target = "sites"
    evidence = "contested"
    equation = "N = N0 factor^share"
    limit_cause = "number of sites at its limit"
    references = (
        "Loebel A et al. (2013) J Neurosci 33:6257",
        "Hardingham NR et al. (2010) (finds Q and p, not N, in layer 2/3)",
    )
