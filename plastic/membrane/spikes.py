"""Back-propagation of the spike of the soma into a dendrite, as a declared waveform.

A passive coupling lets a spike into the dendrite far too well (at 1 kHz it is several times too
large), so delay and amplitude are given as functions of distance and of the train instead.
"""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike, NDArray

Floats = NDArray[np.float64]


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
