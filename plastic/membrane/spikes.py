"""Spikes of a leaky neuron in closed form, and how a spike travels into a dendrite.

A leaky neuron ``tau dV/dt = V_inf - V`` fires at a threshold and starts again from its reset. Its
rate is known exactly under a constant input and under white noise (Siegert).

A passive coupling lets a spike into the dendrite far too well (at 1 kHz it is several times too
large), so delay and amplitude are given as functions of distance and of the train instead.
"""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike, NDArray
from scipy.integrate import quad
from scipy.special import erfcx

Floats = NDArray[np.float64]

#: -zeta(1/2)/sqrt(2 pi): by how much, in standard deviations of one step, a threshold that is only
#: looked at on a grid acts as if it were higher. Chernoff; Broadie, Glasserman & Kou 1997 Math
#: Finance 7:325 (from memory, sure)
GRID_SHIFT = 0.5825971579390107


def leaky_interval(
    v_inf: ArrayLike, tau: ArrayLike, threshold: ArrayLike, reset: ArrayLike, refractory: ArrayLike
) -> Floats:
    """Return the time between the spikes of a leaky neuron under a constant input.

    ``refractory + tau ln[(v_inf - reset)/(v_inf - threshold)]``, infinite where v_inf does not
    pass the threshold (textbook, from memory, sure). A current I into a leak G gives v_inf = I/G
    and tau = C/G; a constant conductance g with reversal E (from rest) beside it gives v_inf =
    (I + g E)/(G + g) and tau = C/(G + g).

    Parameters
    ----------
    v_inf : array_like, mV from rest
        Where the voltage would settle without spikes.
    tau : array_like, ms
    threshold, reset : array_like, mV from rest, reset below threshold
    refractory : array_like, ms

    Returns
    -------
    array, broadcast shape, ms
    """
    v_inf, threshold, reset = (np.asarray(v, float) for v in (v_inf, threshold, reset))
    _require_order(reset, threshold)
    over = v_inf > threshold
    room = np.where(over, v_inf - threshold, 1.0)
    climb = np.asarray(tau, float) * np.log1p((threshold - reset) / room)
    return np.where(over, np.asarray(refractory, float) + climb, np.inf)


def leaky_rate(
    v_inf: ArrayLike, tau: ArrayLike, threshold: ArrayLike, reset: ArrayLike, refractory: ArrayLike
) -> Floats:
    """Return the rate of a leaky neuron under a constant input; 0 where it is silent.

    Parameters
    ----------
    As for `leaky_interval`.

    Returns
    -------
    array, broadcast shape, Hz
    """
    return np.asarray(1000.0 / leaky_interval(v_inf, tau, threshold, reset, refractory))


def siegert_rate(
    mean: float,
    sigma: float,
    tau: float,
    threshold: float,
    reset: float,
    refractory: float,
    *,
    dt: float = 0.0,
) -> float:
    """Return the rate of a leaky neuron under white noise.

    ``tau dV/dt = -V + mean + sigma sqrt(tau) xi``, so that without spikes V has the standard
    deviation sigma/sqrt 2, and::

        1/rate = refractory + tau sqrt(pi) integral of e^(x^2) (1 + erf x)
                 from (reset - mean)/sigma to (threshold - mean)/sigma

    A simulation that looks at the threshold once per `dt` fires less often; it is matched by a
    threshold higher by ``0.5826 sigma sqrt(dt/tau)``, to first order in sqrt(dt).

    Parameters
    ----------
    mean : float, mV from rest
    sigma : float, mV, above 0
    tau : float, ms
    threshold, reset : float, mV from rest, reset below threshold
    refractory : float, ms
    dt : float, ms
        0: the threshold is looked at all the time.

    Returns
    -------
    float, Hz

    References
    ----------
    Siegert AJF (1951) Phys Rev 81:617; Ricciardi LM (1977) Diffusion Processes; Brunel N (2000)
    J Comput Neurosci 8:183 (all from memory, sure of the formula).
    """
    _require_order(reset, threshold)
    if not (sigma > 0 and tau > 0 and dt >= 0):
        raise ValueError(f"sigma = {sigma} mV, tau = {tau} ms, dt = {dt} ms: above 0 (dt: or 0)")
    high = (threshold + GRID_SHIFT * sigma * math.sqrt(dt / tau) - mean) / sigma
    low = (reset - mean) / sigma
    if high > 24:  # below 1e-240 Hz, and e^(x^2) is near its overflow
        return 0.0
    # e^(x^2) (1 + erf x) = erfcx(-x); next to a high threshold it is a narrow peak
    peak = max(low, high - 1.0)
    parts = [
        quad(lambda x: erfcx(-x), *ends, epsabs=0, epsrel=1e-11, limit=500)[0]
        for ends in ((low, peak), (peak, high))
        if ends[0] < ends[1]
    ]
    area = sum(parts)
    return 1000.0 / (refractory + tau * math.sqrt(math.pi) * float(area))


def _require_order(reset: ArrayLike, threshold: ArrayLike) -> None:
    if not np.all(np.asarray(reset, float) < np.asarray(threshold, float)):
        raise ValueError(f"reset = {reset!r} mV must be below threshold = {threshold!r} mV")


@dataclass(frozen=True)
class BackPropagation:
    """How a spike travels into a dendrite: delay, decrement with distance and within a train.

    Spike n reaches distance x after ``x / velocity`` with the amplitude, relative to the soma,

        a(x, n) = exp(-x / (length_constant r_n))

    where r is 1 before the first spike, is multiplied by ``1 - train_loss`` at each spike, and
    recovers to 1 with the time constant `recovery`. Where the amplitude is below `floor`, the
    spike is no postsynaptic event for a rule. Deviation: the spike also broadens with distance in
    the tissue; no rule here reads its width.

    Parameters
    ----------
    velocity : float, um/ms
        0.5 m/s in the apical trunk of layer 5: Stuart, Schiller & Sakmann 1997 (looked up).
    length_constant : float, um
        500/ln 2: about half the amplitude at 500 um in layer 5 (from memory, unsure).
    train_loss : float, in [0, 1)
        Ours. That the decrement depends on frequency: Stuart et al. 1997 (looked up), no figure.
    recovery : float, ms
        Ours; 0 means at once.
    floor : float, in [0, 1]
        Ours.

    Raises
    ------
    ValueError
        A value outside its range.

    References
    ----------
    Stuart G, Schiller J, Sakmann B (1997) J Physiol 505:617 (journal and page from memory)
    """

    velocity: float = 500.0
    length_constant: float = 721.0
    train_loss: float = 0.1
    recovery: float = 500.0
    floor: float = 0.25

    def __post_init__(self) -> None:
        for name, ok, allowed in (
            ("velocity", self.velocity > 0, "above 0 um/ms"),
            ("length_constant", self.length_constant > 0, "above 0 um"),
            ("train_loss", 0 <= self.train_loss < 1, "in [0, 1)"),
            ("recovery", 0 <= self.recovery < math.inf, "0 ms or more, finite"),
            ("floor", 0 <= self.floor <= 1, "in [0, 1]"),
        ):
            if not ok:
                raise ValueError(f"{name} = {getattr(self, name)}: must be {allowed}")

    def delay(self, distance: ArrayLike) -> Floats:
        """Return when a spike arrives after it left the soma.

        Parameters
        ----------
        distance : array_like, um, 0 or more

        Returns
        -------
        array, shape of `distance`, ms
        """
        return np.asarray(distance, float) / self.velocity

    def reach(self, spike_times: ArrayLike) -> Floats:
        """Return r, the length constant that each spike finds as a share of the rested one.

        Parameters
        ----------
        spike_times : array_like, shape (spike,), ms, increasing

        Returns
        -------
        array, shape (spike,), in (0, 1]
        """
        times = np.asarray(spike_times, float)
        gaps = np.diff(times)
        if times.ndim != 1 or not np.all(gaps > 0):
            raise ValueError("spike times must be one increasing list")
        with np.errstate(over="ignore"):  # a recovery next to 0 keeps nothing of the loss
            kept = np.exp(-gaps / self.recovery) if self.recovery > 0 else np.zeros_like(gaps)
        r = np.ones(times.shape)
        for i in range(len(gaps)):
            r[i + 1] = 1 - (1 - r[i] * (1 - self.train_loss)) * kept[i]
        return r

    def amplitudes(self, distance: ArrayLike, spike_times: ArrayLike) -> Floats:
        """Return the amplitude of each spike at each distance, relative to the soma.

        Parameters
        ----------
        distance : array_like, shape (...), um, 0 or more
        spike_times : array_like, shape (spike,), ms, increasing

        Returns
        -------
        array, shape (..., spike), in [0, 1]
        """
        far = np.asarray(distance, float)[..., np.newaxis]
        return np.exp(-far / (self.length_constant * self.reach(spike_times)))

    def counts(self, distance: ArrayLike, spike_times: ArrayLike) -> NDArray[np.bool_]:
        """Return which spikes are a postsynaptic event at each distance: amplitude >= floor.

        Parameters
        ----------
        As for `amplitudes`.

        Returns
        -------
        array of bool, shape (..., spike)
        """
        return np.asarray(self.amplitudes(distance, spike_times) >= self.floor, dtype=np.bool_)
