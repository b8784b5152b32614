"""Random numbers as a function of what they are for: no state, no order, no thread.

Every draw is a counter-based hash of (seed, cell, channel, ordinal, part). The same bits come out
for any number of threads, any order of arms and after a resume, and two arms see the same cells
and the same release noise (common random numbers). The mixing function is the 64-bit finaliser of
Steele, Lea & Flood 2014 (OOPSLA), keyed in a schedule so that raw indices are never a key.

These are the plain-Python originals; the compiled engine repeats them and a test compares bits.
"""

from __future__ import annotations

import hashlib
import math

import numpy as np
from numpy.typing import NDArray
from scipy.special import ndtri

MASK = (1 << 64) - 1
GOLDEN = 0x9E3779B97F4A7C15

#: parts of one event's draws: sites below, then these
PARTS = 4096
FRACTION, NORMAL_A, NORMAL_B, REFILL = 2045, 2046, 2047, 2048
MOST_SITES = 2000


def mix(z: int) -> int:
    """Return the 64-bit hash of `z`."""
    z &= MASK
    z = ((z ^ (z >> 30)) * 0xBF58476D1CE4E5B9) & MASK
    z = ((z ^ (z >> 27)) * 0x94D049BB133111EB) & MASK
    return z ^ (z >> 31)


def key(seed: int, cell: int, channel: int) -> int:
    """Return the key of one stream: one channel (a contact, a named parameter) of one cell."""
    return mix(mix(mix(seed + GOLDEN) + GOLDEN * (cell + 1)) + GOLDEN * (channel + 1))


def uniform(stream: int, ordinal: int, part: int = 0) -> float:
    """Return draw number (`ordinal`, `part`) of a stream, in [0, 1)."""
    counter = ordinal * PARTS + part
    return (mix(stream + GOLDEN * (counter + 1)) >> 11) * 2.0**-53


def normal(stream: int, ordinal: int) -> float:
    """Return a standard normal draw (Box & Muller 1958) of event `ordinal`."""
    radius = math.sqrt(-2.0 * math.log(1.0 - uniform(stream, ordinal, NORMAL_A)))
    return radius * math.cos(2.0 * math.pi * uniform(stream, ordinal, NORMAL_B))


def binomial(stream: int, ordinal: int, trials: int, probability: float, part: int = 0) -> int:
    """Return the number of successes in `trials` draws of event `ordinal`, from `part` on."""
    return sum(uniform(stream, ordinal, part + k) < probability for k in range(trials))


def named(seed: int, cells: int, name: str) -> NDArray[np.float64]:
    """Return one standard normal number per cell for the parameter called `name`.

    Returns
    -------
    array, shape (cells,), dimensionless
        Cell k has the same number whatever the number of cells.
    """
    channel = int.from_bytes(hashlib.blake2b(name.encode(), digest_size=8).digest(), "little")
    draws = [uniform(key(seed, cell, channel), 0) for cell in range(cells)]
    return np.asarray(ndtri(np.clip(draws, 1e-12, 1 - 1e-12)), dtype=float)


def lognormal(mean: float, cv: float, scores: NDArray[np.float64]) -> NDArray[np.float64]:
    """Return log-normal values of a mean and a coefficient of variation from normal scores."""
    spread = math.sqrt(math.log1p(cv * cv))
    return np.asarray(mean * np.exp(spread * scores - spread * spread / 2), dtype=float)
