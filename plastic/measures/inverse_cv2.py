"""How much the responses vary: CV^-2."""

from __future__ import annotations

import numpy as np

from plastic.measures._interface import Floats, Measure, Readout
from plastic.membrane import release


class InverseCv2(Measure):
    """Expected mean squared over variance of the EPSP, noise-free: what a locus plot shows.

    A change of q leaves it as it is; of N moves it with the mean; of p by more.
    """

    unit = "1"
    long_name = "expected CV^-2 of the EPSP (no recording noise)"
    equation = "mean^2 / variance; N p / (1 - p + cv_q^2) for one contact"
    references = (
        "Bekkers JM, Stevens CF (1990) Nature 346:724",
        "Malinow R, Tsien RW (1990) Nature 346:177",
    )

    @staticmethod
    def value(readout: Readout) -> Floats:
        """Return CV^-2; infinite where every site always releases the same."""
        variance = release.variance(
            readout.sites, readout.probability, readout.quantum, readout.quantal_cv[:, None]
        )
        spread = readout.per_input(variance * readout.effect[:, :, None] ** 2)
        mean = readout.per_input(readout.amplitude)
        with np.errstate(divide="ignore", invalid="ignore"):
            return np.asarray(mean**2 / spread, dtype=float)
