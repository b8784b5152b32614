"""How often nothing is released."""

from __future__ import annotations

from plastic.measures._interface import Floats, Measure, Readout
from plastic.membrane import release


class FailureRate(Measure):
    """Expected share of stimuli at which no site releases."""

    unit = "1"
    long_name = "expected failure rate"
    equation = "(1 - p)^N, over all contacts of the input"
    references = ("del Castillo J, Katz B (1954) J Physiol 124:560",)

    @staticmethod
    def value(readout: Readout) -> Floats:
        """Return the failure rate."""
        each = release.failure_rate(readout.sites, readout.probability)
        return readout.per_input(each, product=True)
