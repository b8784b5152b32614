"""How to add a measure: one file, one class, one plain-array function.

A measure turns a `Readout` (what the readings of one arm saw) into an array of shape
(cell, input, reading). Unit, name in words and references are declared on the class; the labelled
wrapper that puts it into a dataset is written once, in the study.
"""

from __future__ import annotations

import inspect
from collections.abc import Sequence
from dataclasses import dataclass
from typing import ClassVar

import numpy as np
from numpy.typing import NDArray

Floats = NDArray[np.float64]


@dataclass(frozen=True)
class Readout:
    """What the readings of one arm saw.

    peak, rise, half_width : array, shape (cell, input, reading); mV, ms, ms
        The EPSP of the input alone, at the mean of its release.
    fires : array, shape (cell, input, reading)
        The probability that the input alone fires the cell.
    sites, probability, quantum : array, shape (cell, contact, reading); quantum in nS
    effect : array, shape (cell, contact), mV/nS
        The EPSP at the soma per conductance of each contact.
    input_of : array of int, shape (contact,)
        The input each contact belongs to; -1 where it is none of the inputs that are read.
    quantal_cv, depletion, facilitation : array, shape (contact,); ms
    baseline : int
        The reading at the end of the baseline.
    """

    peak: Floats
    rise: Floats
    half_width: Floats
    fires: Floats
    sites: Floats
    probability: Floats
    quantum: Floats
    effect: Floats
    input_of: NDArray[np.int64]
    quantal_cv: Floats
    depletion: Floats
    facilitation: Floats
    baseline: int

    def per_input(self, values: Floats, *, product: bool = False) -> Floats:
        """Sum (or multiply) an array (cell, contact, reading) over the contacts of each input."""
        collect = np.prod if product else np.sum
        rows = [collect(values[:, self.input_of == i], axis=1) for i in range(self.peak.shape[1])]
        return np.stack(rows, axis=1)

    @property
    def amplitude(self) -> Floats:
        """The mean response of each contact at the soma, mV, before any saturation."""
        mean = self.sites * self.probability * self.quantum
        return np.asarray(mean * self.effect[:, :, None], dtype=float)


class Measure:
    """Base of every measure; see the manual at the top of this module."""

    unit: ClassVar[str]
    long_name: ClassVar[str]
    equation: ClassVar[str] = ""
    references: ClassVar[Sequence[str]] = ()

    @staticmethod
    def value(readout: Readout) -> Floats:
        """Return the measure, shape (cell, input, reading)."""
        raise TypeError("a measure defines value")

    @classmethod
    def summary(cls) -> str:
        """Return the first line of the measure's docstring."""
        return (inspect.getdoc(cls) or "").split("\n")[0]
