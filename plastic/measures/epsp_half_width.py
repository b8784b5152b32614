"""How long the EPSP lasts."""

from __future__ import annotations

from plastic.measures._interface import Floats, Measure, Readout


class EpspHalfWidth(Measure):
    """Time for which the EPSP is above half its peak."""

    unit = "ms"
    long_name = "half-width of the EPSP at the soma"
    references = ("Rall W (1967) J Neurophysiol 30:1138",)

    @staticmethod
    def value(readout: Readout) -> Floats:
        """Return the half-width, ms."""
        return readout.half_width
