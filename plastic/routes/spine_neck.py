"""Wider spine necks: less resistance between the spine head and the dendrite."""

from __future__ import annotations

from plastic.parameters import parameter
from plastic.routes._interface import Route


class SpineNeck(Route):
    """The neck's resistance falls, so that more of each quantum's current reaches the dendrite.

    The neck is in series with the conductance of one site: q / (1 + q R), taken at the peak. With
    ordinary necks and quanta q R is a few per cent, and so is all that this route can give.
    """

    delay: float = parameter(0.0, "ms", low=0, source="ours")
    tau: float = parameter(180_000.0, "ms", low=0, source="minutes; Tonnesen et al. 2014")
    lowest: float = parameter(
        0.1, "1", low=0, high=1, source="ours: a neck ten times less resistive is no neck"
    )

    target = "neck"
    sign = -1
    evidence = "established"
    equation = "R_neck = R0 factor^-share"
    limit_cause = "spine neck at its limit"
    references = (
        "Tonnesen J et al. (2014) Nat Neurosci 17:678",
        "Araya R et al. (2014) PNAS 111:E2895",
    )
