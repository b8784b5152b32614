"""The height of the EPSP."""

from __future__ import annotations

from plastic.measures._interface import Floats, Measure, Readout


class EpspPeak(Measure):
    """Peak of the EPSP at the soma above rest, with the inhibition that the input recruits.

    At the mean of release and with the spike left out, as when one extrapolates under a spike.
    """

    unit = "mV"
    long_name = "peak of the EPSP at the soma, input alone"
    references = ("common practice",)

    @staticmethod
    def value(readout: Readout) -> Floats:
        """Return the peak, mV."""
        return readout.peak
