"""Counts of repeats over simulated cells, when some cells never get there."""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike


def simulated(cells: int) -> str:
    """Return a number of simulated cells in words; they are never called n."""
    return f"{cells} simulated cell{'' if cells == 1 else 's'}"


@dataclass(frozen=True)
class Counts:
    """Median and quartiles of a count; infinite means "beyond the protocol".

    Attributes
    ----------
    median, low, high : float, repeats
        Median, lower and upper quartile over simulated cells.
    limit : int, repeats
        How many repeats the protocol has.
    """

    median: float
    low: float
    high: float
    limit: int

    def shown(self, value: float) -> str:
        """Return one of the three numbers, or "> 60" when it lies beyond the protocol."""
        if math.isnan(value):
            return "-"
        return f"{value:.0f}" if math.isfinite(value) else f"> {self.limit}"

    def __str__(self) -> str:
        if not math.isfinite(self.low):
            return self.shown(self.low)
        return f"{self.shown(self.median)} ({self.shown(self.low)} to {self.shown(self.high)})"


def quantile(values: ArrayLike, share: float) -> float:
    """Return the quantile of counts of which some may be infinite; NaN of none.

    Linear between order statistics, as is usual; but between a finite and an infinite neighbour
    the answer is infinite, because nothing is known about how far beyond the protocol a cell is.

    Parameters
    ----------
    values : array, shape (cell,), repeats
    share : float, in [0, 1]
    """
    ordered = np.sort(np.asarray(values, dtype=float).ravel())
    if not len(ordered):
        return math.nan
    place = share * (len(ordered) - 1)
    low, high = ordered[math.floor(place)], ordered[math.ceil(place)]
    if low == high or not math.isfinite(high):
        return float(high)
    return float(low + (place - math.floor(place)) * (high - low))


def counts_of(repeats: ArrayLike, limit: int) -> Counts:
    """Return the counts of an arm; a cell that did not get there is beyond the protocol.

    Parameters
    ----------
    repeats : array, shape (cell,), repeats
    limit : int, repeats
    """
    values = np.asarray(repeats, dtype=float)
    values = np.where(np.isfinite(values), values, math.inf)
    return Counts(quantile(values, 0.5), quantile(values, 0.25), quantile(values, 0.75), limit)
