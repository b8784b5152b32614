"""What a second stimulus gives, in proportion to the first."""

from __future__ import annotations

import numpy as np

from plastic.measures._interface import Floats, Measure, Readout
from plastic.membrane import release

#: ms between the two stimuli
INTERVAL = 50.0


class PairedPulseRatio(Measure):
    """Expected second over first response, 50 ms apart, as the ratio of the means.

    Falls when the release probability rises, and only then. Of release alone: no saturation, and
    without the inhibition that the first stimulus leaves behind.
    """

    unit = "1"
    long_name = "expected paired-pulse ratio (50 ms, mean of second over mean of first)"
    equation = "[1 + (1-p) exp(-dt/tau_f)] [1 - p exp(-dt/tau_r)]"
    references = (
        "Tsodyks MV, Markram H (1997) PNAS 94:719",
        "Kim J, Alger BE (2001) J Neurosci 21:9608 (ratio of means; from memory)",
    )

    @staticmethod
    def value(readout: Readout) -> Floats:
        """Return the ratio; not a number where the first response is nothing."""
        ratio = release.paired_pulse_ratio(
            readout.probability, readout.depletion[:, None], readout.facilitation[:, None], INTERVAL
        )
        first = readout.per_input(readout.amplitude)
        second = readout.per_input(readout.amplitude * ratio)
        with np.errstate(divide="ignore", invalid="ignore"):
            return np.asarray(second / first, dtype=float)
