"""The EPSP as a percentage of its baseline."""

from __future__ import annotations

import numpy as np

from plastic.measures._interface import Floats, Measure, Readout


class EpspPercentOfBaseline(Measure):
    """Peak of the EPSP in percent of its value at the end of the baseline."""

    unit = "%"
    long_name = "peak of the EPSP, percent of the end of baseline"
    references = ("common practice",)

    @staticmethod
    def value(readout: Readout) -> Floats:
        """Return the percentage; not a number where the baseline is nothing."""
        start = readout.peak[:, :, readout.baseline, None]
        with np.errstate(divide="ignore", invalid="ignore"):
            return np.where(start > 0, 100.0 * readout.peak / start, np.nan)
