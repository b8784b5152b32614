"""Receptors that bind a pulse of transmitter, and the slow cascade of GABA-B behind one.

First-order kinetics of the bound share r while the transmitter stands at T, and then without it::

    dr/dt = alpha T (1 - r) - beta r
    r     = r_inf + (r_0 - r_inf) e^(-t/tau),   r_inf = alpha T/(alpha T + beta),
                                                tau   = 1/(alpha T + beta)

GABA-B opens potassium channels through a G protein s, of which n bind together::

    ds/dt = k3 r - k4 s,    open share = s^n / (s^n + kd)

Between the edges of the pulses everything is a sum of two exponentials and is evaluated as such:
there is no time step.

References
----------
Destexhe A, Mainen ZF, Sejnowski TJ (1994) Neural Comput 6:14 and (1998) in Methods in Neuronal
Modeling, 2nd ed., 1-25; Destexhe A, Sejnowski TJ (1995) PNAS 92:9515 (all from memory). Otis TS,
De Koninck Y, Mody I (1993) J Physiol 463:391 (from memory).
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from typing import NamedTuple

import numpy as np
from numpy.typing import ArrayLike, NDArray

from plastic.membrane.receptors import phi

Floats = NDArray[np.float64]


class Pulses(NamedTuple):
    """Equal rectangular pulses of transmitter, none of which may overlap another.

    Attributes
    ----------
    onsets : array_like, shape (pulse,), ms, increasing
    duration : float, ms
    transmitter : float, mM
    """

    onsets: ArrayLike
    duration: float = 1.0
    transmitter: float = 1.0


@dataclass(frozen=True)
class Binding:
    """First-order binding of transmitter to a receptor.

    Attributes
    ----------
    alpha : float, 1/(mM ms)
    beta : float, 1/ms
    source : str
    """

    alpha: float
    beta: float
    source: str

    def steady(self, transmitter: ArrayLike) -> Floats:
        """Return the bound share that stands at last, alpha T/(alpha T + beta).

        Parameters
        ----------
        transmitter : array_like, mM, 0 or more

        Returns
        -------
        array, shape of `transmitter`, in [0, 1]
        """
        return np.asarray(self.alpha * np.asarray(transmitter, float) * self.tau(transmitter))

    def tau(self, transmitter: ArrayLike = 0.0) -> Floats:
        """Return the time constant of binding, 1/(alpha T + beta); without transmitter, of decay.

        Parameters
        ----------
        transmitter : array_like, mM, 0 or more

        Returns
        -------
        array, shape of `transmitter`, ms
        """
        transmitter = np.asarray(transmitter, float)
        if not np.all(transmitter >= 0):
            raise ValueError(f"transmitter = {transmitter} mM: must be 0 or more")
        return np.asarray(1 / (self.alpha * transmitter + self.beta))

    def bound(self, t: ArrayLike, pulses: Pulses) -> Floats:
        """Return the bound share, 0 before the first pulse.

        Parameters
        ----------
        t : array_like, ms
        pulses : Pulses

        Returns
        -------
        array, shape of `t`, in [0, 1]
        """
        edges, level = _edges(pulses)
        r = np.zeros(len(edges))
        for i, gap in enumerate(np.diff(edges)):
            r[i + 1] = self._relaxed(r[i], gap, level[i])
        where, late = _segment(np.asarray(t, float), edges)
        found = self._relaxed(r[where], np.maximum(late, 0.0), level[where])
        return np.where(late < 0, 0.0, found)

    def _relaxed(self, start: Floats, gap: Floats, transmitter: Floats) -> Floats:
        goal = self.steady(transmitter)
        return np.asarray(goal + (start - goal) * np.exp(-gap / self.tau(transmitter)))


_COURSE = "Destexhe, Mainen & Sejnowski (looked up second hand, a course page)"
_MEMORY = "Destexhe, Mainen & Sejnowski 1994, 1998 (from memory, sure)"
#: published binding; a pulse of 1 mM for 1 ms goes with them
BINDING: Mapping[str, Binding] = {
    "ampa": Binding(1.1, 0.19, _MEMORY),
    "nmda": Binding(0.072, 0.0066, _MEMORY),
    "gaba_a": Binding(5.0, 0.18, _COURSE),
    "gaba_b": Binding(0.09, 0.0012, _COURSE),
}

#: Dissociation constant of the GABA-B channel by source. They disagree and we cannot settle it: the
#: time course hardly depends on it, the open share is twenty times larger with the smaller one.
GABA_B_KD: Mapping[str, tuple[float, str]] = {
    "chapter": (100.0, "uM^4; Destexhe, Mainen & Sejnowski 1998 (from memory, sure)"),
    "course": (5.0, "no unit printed; a course page that gives the same other rates (looked up)"),
}


@dataclass(frozen=True)
class Cascade:
    """The G protein between GABA-B receptors and the potassium channels that they open.

    Attributes
    ----------
    binding : Binding
    k3 : float, uM/ms
        Production of G protein by bound receptors.
    k4 : float, 1/ms
        Its decay.
    n : int
        How many bind to one channel.
    kd : float, uM^n
        See `GABA_B_KD`: published values disagree.
    reversal : float, mV
        That of potassium.
    source : str
    """

    binding: Binding = BINDING["gaba_b"]
    k3: float = 0.18
    k4: float = 0.034
    n: int = 4
    kd: float = GABA_B_KD["chapter"][0]
    reversal: float = -95.0
    source: str = "k3, k4, n: looked up second hand, a course page; kd, reversal: from memory, sure"

    def protein(self, t: ArrayLike, pulses: Pulses) -> Floats:
        """Return the G protein s, 0 before the first pulse.

        Parameters
        ----------
        t : array_like, ms
        pulses : Pulses

        Returns
        -------
        array, shape of `t`, uM
        """
        edges, level = _edges(pulses)
        r, s = self.binding.bound(edges, pulses), np.zeros(len(edges))
        for i, gap in enumerate(np.diff(edges)):
            s[i + 1] = self._relaxed(s[i], r[i], gap, level[i])
        where, late = _segment(np.asarray(t, float), edges)
        found = self._relaxed(s[where], r[where], np.maximum(late, 0.0), level[where])
        return np.where(late < 0, 0.0, found)

    def open(self, t: ArrayLike, pulses: Pulses) -> Floats:
        """Return the open share of the channels, ``s^n/(s^n + kd)``.

        Parameters
        ----------
        t : array_like, ms
        pulses : Pulses

        Returns
        -------
        array, shape of `t`, in [0, 1)
        """
        bound = self.protein(t, pulses) ** self.n
        return np.asarray(bound / (bound + self.kd))

    def _relaxed(self, start: Floats, r: Floats, gap: Floats, transmitter: Floats) -> Floats:
        """Return s after a gap in which r relaxes from its start to its goal.

        The term of r's own exponential goes through phi, so that equal rates need no switch.
        """
        goal, rate = self.binding.steady(transmitter), 1 / self.binding.tau(transmitter)
        own = gap * np.exp(-np.minimum(rate, self.k4) * gap) * phi(np.abs(self.k4 - rate) * gap)
        held = -np.expm1(-self.k4 * gap) / self.k4
        made = self.k3 * (goal * held + (r - goal) * own)
        return np.asarray(start * np.exp(-self.k4 * gap) + made)


def gaba_b_course(t: ArrayLike) -> Floats:
    """Return the measured time course of a GABA-B current with peak 1; 0 before onset at t = 0.

    ``(1 - e^(-t/45.2))^4 (0.84 e^(-t/110.4) + 0.16 e^(-t/516.2))`` over its peak of 0.30639 at
    119 ms; dentate gyrus, Otis, De Koninck & Mody 1993 (from memory, fairly sure). A difference of
    two exponentials is no substitute: fitted to this, it is off by 40 % of the peak in the rise.

    Parameters
    ----------
    t : array_like, ms

    Returns
    -------
    array, shape of `t`, dimensionless
    """
    late = np.maximum(np.asarray(t, float), 0.0)
    fall = 0.84 * np.exp(-late / 110.4) + 0.16 * np.exp(-late / 516.2)
    return np.asarray((-np.expm1(-late / 45.2)) ** 4 * fall / 0.306393099268)


def _edges(pulses: Pulses) -> tuple[Floats, Floats]:
    """Return where the transmitter steps, ms, and its concentration from there on, mM."""
    onsets = np.atleast_1d(np.asarray(pulses.onsets, float))
    if not (onsets.ndim == 1 and onsets.size and pulses.duration > 0):
        raise ValueError("pulses need a list of onsets and a duration above 0 ms")
    if not np.all(np.diff(onsets) >= pulses.duration):
        raise ValueError(
            f"pulses of {pulses.duration} ms: onsets must increase and not overlap the next pulse"
        )
    edges = np.column_stack([onsets, onsets + pulses.duration]).ravel()
    return edges, np.tile([pulses.transmitter, 0.0], len(onsets))


def _segment(t: Floats, edges: Floats) -> tuple[NDArray[np.intp], Floats]:
    """Return the last edge at or before each time (the first one before all) and the time since."""
    where = np.maximum(np.searchsorted(edges, t, side="right") - 1, 0)
    return where, np.asarray(t - edges[where])
