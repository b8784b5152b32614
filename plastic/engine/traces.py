"""Voltages over time of one cell at rest, for several sets of openings at once. Changes nothing.

The current of every synapse is constant over a step, and the membrane answers to it exactly::

    V' = P V + B I,    I = g [E - theta V' - (1 - theta) V],    B = (1 - P) / G

with the propagator P, the mean g of the step, theta = (1 + x)/(2 + x) and x = g B at its node:
the trapezoid for a weak synapse, and no overshoot for one that takes its node to the reversal. The
membrane is taken apart into its modes, each of which only decays. One small linear system per step;
second order in the step, however finely the cell is cut. There are no spikes. Plain numpy: cheap
enough for one cell.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike, NDArray

from plastic.engine.assembly import Scene
from plastic.engine.layout import Floats
from plastic.membrane.cable import conductances, leaks
from plastic.membrane.receptors import conductance

#: mV; a deviation from rest below it has no shape
FLAT = 1e-9
#: steps that are prepared at once
CHUNK = 256
#: share of its largest peak below which everything in a set is closed
CLOSED = 1e-9


@dataclass(frozen=True)
class Opening:
    """A contact that opens at a time (ms), with a peak conductance in nS."""

    contact: int
    time: float
    peak: float


@dataclass(frozen=True)
class Traces:
    """What some sets of openings did to a cell.

    Attributes
    ----------
    voltage : array, shape (set, recorded node, step), mV from rest
        At the start of every step.
    charge : array, shape (set, node), pC
        What entered through the synapses of the node: the integral of g (E - V).
    dt : float, ms
    """

    voltage: Floats
    charge: Floats
    dt: float


@dataclass(frozen=True)
class Shape:
    """Shape of one EPSP or IPSP; NaN where it has none.

    Attributes
    ----------
    peak : float, mV from rest
        Largest deviation, negative for an IPSP.
    time : float, ms
        Of the peak, by the parabola through the three highest samples.
    rise, half_width : float, ms
        20-80 % rise; width at half the peak.
    """

    peak: float
    time: float
    rise: float
    half_width: float


def traces(
    scene: Scene,
    load: float,
    sets: Sequence[Sequence[Opening]],
    *,
    length: float,
    record: Sequence[int],
    multiple: ArrayLike = 1.0,
) -> Traces:
    """Return what each set of openings does to one cell at rest.

    Parameters
    ----------
    scene : Scene
        Its ``dt`` is the step.
    load : float, nS
        Conductance at the soma.
    sets : sequence of sequences of Opening
    length : float, ms
    record : sequence of int
        The nodes whose voltage is kept; 0 is the soma.
    multiple : float or array, shape (stretch,)
        Of the diameter.
    """
    dt, steps = scene.dt, round(length / scene.dt)
    nodes = np.unique([scene.contacts[o.contact].node for openings in sets for o in openings])
    modes = _modes(scene, load, multiple)
    keep = np.exp(-modes.rate * dt)[:, None]
    at, seen = modes.voltage[nodes], modes.voltage[list(record)]
    push = at.T * (-np.expm1(-modes.rate * dt) / modes.rate)[:, None]
    largest = np.array([max((o.peak for o in openings), default=0.0) for openings in sets])
    y = np.zeros((len(keep), len(sets)))
    voltage = np.empty((steps, len(seen), len(sets)))
    total = np.zeros((len(sets), len(nodes)))
    for start in range(0, steps, CHUNK):
        chosen = slice(start, min(start + CHUNK, steps))
        middle = np.asarray((np.arange(steps)[chosen] + 0.5) * dt, dtype=float)
        g, driven = _open(scene, sets, nodes, middle)
        if np.all(g.max(axis=(0, 2)) <= CLOSED * largest):  # nothing is open
            after = np.arange(len(middle) + 1)[:, None, None]
            later = keep**after * y
            voltage[chosen], y = seen @ later[:-1], later[-1]
            continue
        late, inverse = _implicit(g, at @ push)
        now = at @ y
        for i in range(len(middle)):
            voltage[start + i] = seen @ y
            free = keep * y
            pulled = driven[i] - late[i] * (at @ free).T - (g - late)[i] * now.T
            current = (inverse[i] @ pulled[..., None])[..., 0]
            y = free + push @ current.T
            now = at @ y
            total += current
    charge = np.zeros((len(sets), scene.tree.n_nodes))
    charge[:, nodes] = total * dt / 1000.0
    return Traces(np.ascontiguousarray(voltage.transpose(2, 1, 0)), charge, dt)


@dataclass(frozen=True)
class _Modes:
    """The membrane as independent modes: V = voltage y, and dy/dt = -rate y + voltage^T I."""

    rate: Floats
    voltage: Floats  # (node, mode)


def _modes(scene: Scene, load: float, multiple: ArrayLike) -> _Modes:
    matrix = conductances(scene.tree, load, scene.rm, scene.ri, multiple)
    root = np.sqrt(scene.tau_m * leaks(scene.tree, load, scene.rm, scene.ri, multiple))
    rate, vectors = np.linalg.eigh(matrix / np.outer(root, root))
    return _Modes(rate, vectors / root[:, None])


def _implicit(g: Floats, B: Floats) -> tuple[Floats, Floats]:
    """Return theta g, (step, set, node), and what turns the pull of every step into currents."""
    x = g * B.diagonal()
    late = g * (1 + x) / (2 + x)
    system = np.eye(len(B)) + late[..., None] * B
    return late, np.asarray(np.linalg.inv(system), dtype=float)


def _open(
    scene: Scene, sets: Sequence[Sequence[Opening]], nodes: NDArray[np.intp], times: Floats
) -> tuple[Floats, Floats]:
    """Return g and g E, means over the steps around some times, (time, set, node), nS and pA."""
    half = scene.dt / 2
    g = np.zeros((len(times), len(sets), len(nodes)))
    driven = np.zeros_like(g)
    for column, openings in enumerate(sets):
        for o in openings:
            contact = scene.contacts[o.contact]
            receptor, at = contact.receptor, int(np.searchsorted(nodes, contact.node))
            since = times - o.time
            start, middle, end = (
                conductance(t, receptor.rise, receptor.decay)
                for t in (np.maximum(since - half, 0.0), since, since + half)
            )
            # Simpson's rule; what opens does so between steps, at none of the step before
            one = np.where(since > 0, o.peak * (start + 4 * middle + end) / 6, 0.0)
            g[:, column, at] += one
            driven[:, column, at] += one * (receptor.reversal - scene.rest)
    return g, driven


def shape(trace: Floats, dt: float) -> Shape:
    """Return the shape of one trace (mV from rest, sampled every `dt` ms)."""
    top = int(np.argmax(np.abs(trace)))
    peak = float(trace[top])
    if not abs(peak) > FLAT:
        return Shape(0.0, np.nan, np.nan, np.nan)
    up = trace / peak
    time = float(top)
    if 0 < top < len(up) - 1:
        before, after = up[top - 1], up[top + 1]
        time += float(0.5 * (before - after) / (before - 2.0 + after))
    left, right = up[top::-1], up[top:]
    rise = _first_below(left, 0.2) - _first_below(left, 0.8)
    half_width = _first_below(left, 0.5) + _first_below(right, 0.5)
    return Shape(peak, time * dt, rise * dt, half_width * dt)


def _first_below(values: Floats, level: float) -> float:
    """Return where values that start at 1 first fall below a level, in samples; NaN: never."""
    below = values < level
    i = int(np.argmax(below))
    if not below[i]:
        return float("nan")
    return float(i - (level - values[i]) / (values[i - 1] - values[i]))
