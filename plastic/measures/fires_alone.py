"""Whether the input drives the cell."""

from __future__ import annotations

from plastic.measures._interface import Floats, Measure, Readout


class FiresAlone(Measure):
    """Probability that one stimulus of the input alone fires the rested cell."""

    unit = "1"
    long_name = "probability that the input alone fires the cell"
    equation = "P(conductance >= g*), binomial release with quantal variance"

    @staticmethod
    def value(readout: Readout) -> Floats:
        """Return the probability."""
        return readout.fires
