"""Time course of a synaptic conductance: a difference of two exponentials with peak 1.

    g(t) = f (e^(-t/decay) - e^(-t/rise)),    t >= 0,    f = 1 / (e^(-tp/decay) - e^(-tp/rise))
    tp   = rise decay / (decay - rise) ln(decay / rise),    area = f (decay - rise)

The form above loses its digits where rise approaches decay. Here everything is written through
phi(z) = (1 - e^-z) / z, which is smooth, so that the limit is the alpha function
``(t/tau) e^(1 - t/tau)`` without a switch. `rise` = 0 means a single exponential that jumps to 1.
The two time constants may be exchanged: the shape is symmetric in them.

References
----------
The dual exponential and the alpha function are textbook forms (common practice); Rall W (1967)
J Neurophysiol 30:1138 for the alpha function as synaptic input (from memory).
"""

from __future__ import annotations

import numpy as np
from numpy.typing import ArrayLike, NDArray

Floats = NDArray[np.float64]


def _fast_and_slow(rise: ArrayLike, decay: ArrayLike) -> tuple[Floats, Floats]:
    rise, decay = np.broadcast_arrays(np.asarray(rise, float), np.asarray(decay, float))
    if not (np.all(rise >= 0) and np.all(decay > 0)):
        raise ValueError(f"rise = {rise} ms, decay = {decay} ms: rise >= 0 and decay > 0 expected")
    return np.minimum(rise, decay), np.maximum(rise, decay)


def _log1p_over(x: Floats) -> Floats:
    """Return ln(1 + x)/x, 1 at x = 0."""
    safe = np.where(x == 0, 1.0, x)
    return np.where(x == 0, 1.0, np.log1p(safe) / safe)


def _phi(z: Floats) -> Floats:
    """Return (1 - e^-z)/z, 1 at z = 0."""
    safe = np.where(z == 0, 1.0, z)
    return np.where(z == 0, 1.0, -np.expm1(-safe) / safe)


def peak_time(rise: ArrayLike, decay: ArrayLike) -> Floats:
    """Return the time of the peak after onset, ms; 0 for `rise` = 0, `decay` for equal constants.

    Parameters
    ----------
    rise, decay : array_like, ms

    Returns
    -------
    array, broadcast shape, ms
    """
    fast, slow = _fast_and_slow(rise, decay)
    safe = np.where(fast > 0, fast, slow)
    return np.where(fast > 0, slow * _log1p_over((slow - safe) / safe), 0.0)


def norm(rise: ArrayLike, decay: ArrayLike) -> Floats:
    """Return the factor f that makes the peak of the difference of exponentials 1.

    It is 1 for `rise` = 0 and infinite where the constants are equal (the shape itself stays
    finite there: use `conductance`); negative where `rise` > `decay`.

    Parameters
    ----------
    rise, decay : array_like, ms

    Returns
    -------
    array, broadcast shape, dimensionless
    """
    difference = np.asarray(decay, float) - np.asarray(rise, float)
    safe = np.where(difference == 0, 1.0, difference)
    return np.where(difference == 0, np.inf, area(rise, decay) / safe)


def conductance(t: ArrayLike, rise: ArrayLike, decay: ArrayLike) -> Floats:
    """Return the time course with peak 1; 0 before onset at t = 0.

    Parameters
    ----------
    t : array_like, ms
    rise, decay : array_like, ms

    Returns
    -------
    array, broadcast shape, dimensionless

    Examples
    --------
    >>> float(conductance(0.0, 0.0, 3.0))
    1.0
    """
    fast, slow = _fast_and_slow(rise, decay)
    t, fast, slow = np.broadcast_arrays(np.asarray(t, float), fast, slow)
    late = np.maximum(t, 0.0)
    safe = np.where(fast > 0, fast, slow)
    rate = 1 / safe - 1 / slow
    dual = late / safe * np.exp((peak_time(fast, slow) - late) / slow) * _phi(late * rate)
    return np.where(t < 0, 0.0, np.where(fast > 0, dual, np.exp(-late / slow)))


def area(rise: ArrayLike, decay: ArrayLike) -> Floats:
    """Return the integral of the time course with peak 1, decay e^(tp/decay).

    Parameters
    ----------
    rise, decay : array_like, ms

    Returns
    -------
    array, broadcast shape, ms
    """
    _, slow = _fast_and_slow(rise, decay)
    return slow * np.exp(peak_time(rise, decay) / slow)
