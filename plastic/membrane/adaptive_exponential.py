"""The adaptive exponential neuron: equations, published parameters, rheobase, a plain reference.

    C dV/dt   = -g_L (V - E_L) + g_L D e^((V - V_T)/D) - w + I
    tau_w dw/dt = a (V - E_L) - w
    at V >= peak:   V -> reset,   w -> w + b

Voltages are absolute here, as in the papers. The reference integrator is slow and short: what a
compiled mechanism is checked against.

References
----------
Brette R, Gerstner W (2005) J Neurophysiol 94:3637. Naud R, Marcille N, Clopath C, Gerstner W (2008)
Biol Cybern 99:335 (patterns). Touboul J, Brette R (2008) Biol Cybern 99:319 (rheobase). Parameters
and formulas from memory, sure; the patterns come out as they are named.
"""

from __future__ import annotations

import math
from collections.abc import Callable, Mapping
from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from plastic.parameters import Parametrised, parameter

Floats = NDArray[np.float64]

BRETTE = "Brette & Gerstner 2005 (from memory, sure)"
#: of D; the largest change of V in one step of the reference
FINE = 0.05

#: Naud et al. 2008, Table 1 (from memory, sure); V_T is -50 mV and D 2 mV in all; last a step, pA
_COLUMNS = ("capacitance", "leak", "rest", "a", "tau_w", "b", "reset")
_PATTERNS = {
    "tonic": (200.0, 10.0, -70.0, 2.0, 30.0, 0.0, -58.0, 500.0),
    "adapting": (200.0, 12.0, -70.0, 2.0, 300.0, 60.0, -58.0, 500.0),
    "initial_burst": (130.0, 18.0, -58.0, 4.0, 150.0, 120.0, -50.0, 400.0),
    "regular_bursting": (200.0, 10.0, -58.0, 2.0, 120.0, 100.0, -46.0, 210.0),
    "delayed_accelerating": (200.0, 12.0, -70.0, -10.0, 300.0, 0.0, -58.0, 300.0),
    "delayed_regular_bursting": (100.0, 10.0, -65.0, -10.0, 90.0, 30.0, -47.0, 110.0),
    "transient": (100.0, 10.0, -65.0, 10.0, 90.0, 100.0, -47.0, 180.0),
    "irregular": (100.0, 12.0, -60.0, -11.0, 130.0, 30.0, -48.0, 160.0),
}


class AdaptiveExponential(Parametrised):
    """An adaptive exponential neuron; the defaults are those fitted to a detailed model.

    ``AdaptiveExponential.from_set(name)`` is a firing pattern of Naud et al. 2008 under the step of
    current ``PATTERN_CURRENT[name]``. Deviation: those papers leave the cut-off `peak` open or at
    20 mV; it only matters where a adapts w during the upswing, which lasts microseconds.
    """

    capacitance: float = parameter(281.0, "pF", low=1e-3, source=BRETTE)
    leak: float = parameter(30.0, "nS", low=1e-6, source=BRETTE)
    rest: float = parameter(-70.6, "mV", source=BRETTE)
    threshold: float = parameter(-50.4, "mV", source=BRETTE)
    slope: float = parameter(2.0, "mV", low=1e-2, source=BRETTE)
    a: float = parameter(4.0, "nS", source=BRETTE)
    tau_w: float = parameter(144.0, "ms", low=1e-3, source=BRETTE)
    b: float = parameter(80.5, "pA", source=BRETTE)
    reset: float = parameter(-70.6, "mV", source=BRETTE)
    peak: float = parameter(0.0, "mV", source="ours: where the spike is taken as certain")

    sets = {
        "brette_gerstner": {},
        **{
            name: {**dict(zip(_COLUMNS, row, strict=False)), "threshold": -50.0, "slope": 2.0}
            for name, row in _PATTERNS.items()
        },
    }

    def current(self, v: float) -> float:
        """Return what flows through the membrane beside w and the input, pA, inward positive.

        ``-g_L (V - E_L) + g_L D e^((V - V_T)/D)`` at V = `v` mV.
        """
        rise = math.exp(min((v - self.threshold) / self.slope, 700.0))  # a larger one overflows
        return self.leak * (self.rest - v + self.slope * rise)

    @property
    def tau_m(self) -> float:
        """The time constant of the membrane, C/g_L, ms."""
        return self.capacitance / self.leak

    @property
    def saddle_node(self) -> float:
        """The constant current, pA, beyond which there is no resting point.

        ``(g_L + a) [V_T - E_L - D + D ln(1 + a/g_L)]``

        Raises
        ------
        ValueError
            a at or below -g_L: then no resting point is stable at any current.
        """
        if self.a <= -self.leak:
            raise ValueError(f"a = {self.a} nS: must be above -leak = {-self.leak} nS for a rest")
        return self._resting_limit(self.a / self.leak)

    @property
    def hopf(self) -> float:
        """The constant current, pA, at which the resting point begins to swing, if a is large.

        ``(g_L + a) [V_T - E_L - D + D ln(1 + tau_m/tau_w)] + D g_L (a/g_L - tau_m/tau_w)``
        """
        ratio = self.tau_m / self.tau_w
        return self._resting_limit(ratio) + self.slope * (self.a - self.leak * ratio)

    @property
    def rheobase(self) -> float:
        """The constant current, pA, beyond which rest is lost when approached slowly.

        The saddle-node where a/g_L < tau_m/tau_w, the Hopf point otherwise. A sudden step below it
        may still give a spike at its onset.
        """
        return self.saddle_node if self.a / self.leak < self.tau_m / self.tau_w else self.hopf

    def _resting_limit(self, ratio: float) -> float:
        bend = self.slope * (math.log1p(ratio) - 1)
        return (self.leak + self.a) * (self.threshold - self.rest + bend)


#: pA, the step of current that goes with each pattern; the same table
PATTERN_CURRENT: Mapping[str, float] = {name: row[-1] for name, row in _PATTERNS.items()}


class Firing(NamedTuple):
    """What the reference integrator found.

    Attributes
    ----------
    spikes : array, shape (spike,), ms
        When V passed the peak.
    t, v, w : array, shape (step,), ms, mV, pA
        At the end of each step, its own start included; steps are unequal.
    """

    spikes: Floats
    t: Floats
    v: Floats
    w: Floats


def adaptive_exponential(
    cell: AdaptiveExponential,
    current: Callable[[float], float],
    duration: float,
    *,
    start: tuple[float, float] | None = None,
    dt: float = 0.1,
) -> Firing:
    """Integrate the equations with fourth-order Runge-Kutta in steps that shrink in the upswing.

    A step is `dt`, or shorter so that V changes by no more than a twentieth of D: the upswing
    reaches any peak within a finite time, and fixed steps would place its end at random. They would
    also need V cut off at the peak inside each step, or a trial far beyond it would drag w along.

    Parameters
    ----------
    cell : AdaptiveExponential
    current : callable
        Injected current, pA, at a time in ms.
    duration : float, ms
    start : (V in mV, w in pA), optional
        Rest and 0 by default.
    dt : float, ms
        Longest step.

    Returns
    -------
    Firing
    """
    t, (v, w) = 0.0, (cell.rest, 0.0) if start is None else start
    spikes, seen = [], [(t, v, w)]
    while t < duration:
        speed = abs(_slopes(cell, v, w, current(t))[0])
        step = min(dt, duration - t, FINE * cell.slope / speed if speed > 0 else dt)
        v, w = _advance(cell, v, w, t, step, current)
        # a step that is too short to move the clock ends the run where it would otherwise hang
        t = max(t + step, math.nextafter(t, math.inf))
        if v >= cell.peak:
            spikes.append(t)
            v, w = cell.reset, w + cell.b
        seen.append((t, v, w))
    columns = np.array(seen).T
    return Firing(np.array(spikes), columns[0], columns[1], columns[2])


def _slopes(cell: AdaptiveExponential, v: float, w: float, injected: float) -> tuple[float, float]:
    """Return dV/dt and dw/dt, mV/ms and pA/ms."""
    dv = (cell.current(v) - w + injected) / cell.capacitance
    return dv, (cell.a * (v - cell.rest) - w) / cell.tau_w


def _advance(
    cell: AdaptiveExponential,
    v: float,
    w: float,
    t: float,
    h: float,
    current: Callable[[float], float],
) -> tuple[float, float]:
    """Return V and w one classical Runge-Kutta step later."""
    middle = current(t + h / 2)
    k1 = _slopes(cell, v, w, current(t))
    k2 = _slopes(cell, v + h / 2 * k1[0], w + h / 2 * k1[1], middle)
    k3 = _slopes(cell, v + h / 2 * k2[0], w + h / 2 * k2[1], middle)
    k4 = _slopes(cell, v + h * k3[0], w + h * k3[1], current(t + h))
    dv, dw = (
        h / 6 * (one + 2 * two + 2 * three + four)
        for one, two, three, four in zip(k1, k2, k3, k4, strict=True)
    )
    return v + dv, w + dw
