"""Conductance of a receptor: its time course, its block by magnesium, named defaults.

The time course is a difference of two exponentials with peak 1::

    g(t) = f (e^(-t/decay) - e^(-t/rise)),    t >= 0,    f = 1 / (e^(-tp/decay) - e^(-tp/rise))
    tp   = rise decay / (decay - rise) ln(decay / rise),    area = f (decay - rise)

The form above loses its digits where rise approaches decay. Here everything is written through
phi(z) = (1 - e^-z) / z, which is smooth, so that the limit is the alpha function
``(t/tau) e^(1 - t/tau)`` without a switch. `rise` = 0 means a single exponential that jumps to 1.
The two time constants may be exchanged: the shape is symmetric in them.

An NMDA receptor passes the share B of its conductance that magnesium does not block::

    B(V) = 1 / (1 + ([Mg]/K0) e^(-slope V))

K0 is the dissociation constant at 0 mV. Deviation: the block follows voltage at once; that it also
has slow components is left out.

References
----------
The dual exponential and the alpha function are textbook forms (common practice); Rall W (1967)
J Neurophysiol 30:1138 for the alpha function as synaptic input (from memory). Jahr CE, Stevens CF
(1990) J Neurosci 10:3178 for B(V) (abstract and formula looked up, pages from memory).
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike, NDArray
from scipy.special import expit

Floats = NDArray[np.float64]


@dataclass(frozen=True)
class Kinetics:
    """A named receptor: time constants of its conductance, its reversal, and where they are from.

    Attributes
    ----------
    rise, decay : float, ms
    reversal : float, mV
    source : str
    """

    rise: float
    decay: float
    reversal: float
    source: str


_SPRUSTON = "Spruston, Jonas & Sakmann 1995"
#: default receptors near body temperature
KINETICS: Mapping[str, Kinetics] = {
    "ampa": Kinetics(
        0.5,
        3.0,
        0.0,
        "times: common practice, patches deactivate with 2-3 ms at 22 C (" + _SPRUSTON + ", from "
        "memory, fairly sure); reversal about 0 mV: the same paper (looked up)",
    ),
    "nmda": Kinetics(
        2.0,
        75.0,
        0.0,
        "times: common practice, currents decay with 50-150 ms at 32-37 C (from memory, fairly "
        "sure); reversal about 0 mV: " + _SPRUSTON + " (looked up)",
    ),
    "gaba_a": Kinetics(
        0.5,
        5.7,
        -80.0,
        "rise: common practice; decay: middle of 4.2-7.2 ms at 34-35 C, Otis & Mody 1992 (looked "
        "up); reversal: Destexhe, Mainen & Sejnowski (looked up second hand), though chloride "
        "decides it",
    ),
}


@dataclass(frozen=True)
class MagnesiumBlock:
    """The voltage-dependent block of NMDA receptors, ``B = 1/(1 + ([Mg]/k0) e^(-slope V))``.

    Attributes
    ----------
    k0 : float, mM
        Dissociation constant of magnesium at 0 mV.
    slope : float, 1/mV
    source : str
    """

    k0: float
    slope: float
    source: str

    def unblocked(self, voltage: ArrayLike, magnesium: ArrayLike) -> Floats:
        """Return the share of the conductance that is not blocked.

        Parameters
        ----------
        voltage : array_like, mV, absolute (not from rest)
        magnesium : array_like, mM, 0 or more
            Outside the cell.

        Returns
        -------
        array, broadcast shape, in [0, 1]
        """
        return np.asarray(expit(self.slope * np.asarray(voltage, float) - self._log(magnesium)))

    def half(self, magnesium: ArrayLike) -> Floats:
        """Return the voltage at which half is blocked, ``ln([Mg]/k0)/slope``.

        Parameters
        ----------
        magnesium : array_like, mM, 0 or more

        Returns
        -------
        array, mV, absolute; minus infinity without magnesium
        """
        return np.asarray(self._log(magnesium) / self.slope)

    def _log(self, magnesium: ArrayLike) -> Floats:
        magnesium = np.asarray(magnesium, float)
        if not np.all(magnesium >= 0):
            raise ValueError(f"magnesium = {magnesium} mM: must be 0 or more")
        with np.errstate(divide="ignore"):  # without magnesium nothing is blocked at any voltage
            return np.asarray(np.log(magnesium / self.k0))


#: published constants of the block
MAGNESIUM: Mapping[str, MagnesiumBlock] = {
    "jahr_stevens": MagnesiumBlock(
        3.57, 0.062, "Jahr & Stevens 1990, hippocampal culture (formula looked up second hand)"
    ),
    "ascher_nowak": MagnesiumBlock(
        8.8, 1 / 12.5, "Ascher & Nowak 1988, cultured central neurones (from memory, fairly sure)"
    ),
    "vargas_caballero_robinson": MagnesiumBlock(
        4.1, 0.063, "Vargas-Caballero & Robinson 2003, cortical pyramids (from memory, unsure)"
    ),
}

#: of the decay rate of GABA-A currents between 22 and 37 C; Otis & Mody 1992 (looked up)
GABA_A_Q10 = 2.1


def at_temperature(tau: ArrayLike, q10: float, measured: float, wanted: float) -> Floats:
    """Return a time constant at another temperature, ``tau q10^(-(wanted - measured)/10)``.

    Parameters
    ----------
    tau : array_like, ms
        At the temperature `measured`.
    q10 : float
        By how much ten degrees speed it up.
    measured, wanted : float, C

    Returns
    -------
    array, shape of `tau`, ms
    """
    if not q10 > 0:
        raise ValueError(f"q10 = {q10}: must be above 0")
    return np.asarray(np.asarray(tau, float) * q10 ** ((measured - wanted) / 10))


def _fast_and_slow(rise: ArrayLike, decay: ArrayLike) -> tuple[Floats, Floats]:
    rise, decay = np.broadcast_arrays(np.asarray(rise, float), np.asarray(decay, float))
    if not (np.all(rise >= 0) and np.all(decay > 0)):
        raise ValueError(f"rise = {rise} ms, decay = {decay} ms: rise >= 0 and decay > 0 expected")
    return np.minimum(rise, decay), np.maximum(rise, decay)


def _log1p_over(x: Floats) -> Floats:
    """Return ln(1 + x)/x, 1 at x = 0."""
    safe = np.where(x == 0, 1.0, x)
    return np.where(x == 0, 1.0, np.log1p(safe) / safe)


def phi(z: Floats) -> Floats:
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
    dual = late / safe * np.exp((peak_time(fast, slow) - late) / slow) * phi(late * rate)
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
