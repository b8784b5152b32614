"""Flags back into words: the integers of a results file, by their own ``flag_meanings``."""

from __future__ import annotations

from collections.abc import Mapping

import numpy as np
import xarray as xr
from numpy.typing import NDArray

#: what stands for a flag that says "nothing here"
NOT_RUN = "not run"


def meanings(flags: xr.DataArray) -> dict[int, str]:
    """Return the words of a flag variable by its integer, in plain words.

    Parameters
    ----------
    flags : DataArray
        With the attribute ``flag_meanings`` (words separated by blanks) and, where the values are
        not 0, 1, 2, ..., ``flag_values``.
    """
    words = [word.replace("_", " ") for word in str(flags.attrs["flag_meanings"]).split()]
    values = np.atleast_1d(flags.attrs.get("flag_values", np.arange(len(words))))
    return {int(value): word for value, word in zip(values, words, strict=True)}


def integers(flags: xr.DataArray) -> NDArray[np.int64]:
    """Return the flags as integers; a missing one is -1."""
    values = np.asarray(flags.values, dtype=float)
    return np.where(np.isfinite(values), values, -1).astype(np.int64)


def shares(values: NDArray[np.int64], words: Mapping[int, str]) -> dict[str, float]:
    """Return the share of each word among `values`, commonest first; shares of 0 are left out.

    Parameters
    ----------
    values : array, shape (cell,)
        Flags of one arm.
    words : mapping of flag to word
    """
    found, counts = np.unique(values, return_counts=True)
    order = np.argsort(-counts, kind="stable")
    total = max(len(values), 1)
    return {
        words.get(int(found[k]), NOT_RUN): float(counts[k]) / total for k in order if counts[k] > 0
    }
