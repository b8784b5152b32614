"""How fast the EPSP rises."""

from __future__ import annotations

from plastic.measures._interface import Floats, Measure, Readout


class EpspRise(Measure):
    """Time from 20 to 80 % of the EPSP's peak: short for near contacts, long for far ones."""

    unit = "ms"
    long_name = "20-80 % rise time of the EPSP at the soma"
    references = ("Rall W (1967) J Neurophysiol 30:1138",)

    @staticmethod
    def value(readout: Readout) -> Floats:
        """Return the rise time, ms."""
        return readout.rise
