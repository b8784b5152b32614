"""Rested cells to read, and the same cells integrated by scipy from the printed equations.

`integrated` knows nothing of the engine: a soma with a conductance `load`, one dendrite cut into
pi-equivalents (coupling G_inf/sinh L, shunts G_inf tanh(L/2), a sealed stub G_inf tanh L) whose
capacitance is tau_m times the leak, and conductances that open as differences of exponentials of
peak 1 (textbook formulas, from memory).
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass
from itertools import pairwise
from typing import Any

import numpy as np
from numpy.typing import NDArray
from scipy.integrate import solve_ivp
from scipy.optimize import brentq

from plastic.engine import layout
from plastic.engine.assembly import Contact, Drive, Receptor, Scene, events_of, wire
from plastic.engine.kernel import Numbers
from plastic.engine.layout import Cells, Wiring, table
from plastic.engine.readings import Reader, State, state_of
from plastic.membrane.tree import Dendrite, build_tree
from plastic.routes import Mixture

Floats = NDArray[np.float64]

RM, RI, TAU, REST = 15_000.0, 150.0, 15.0, -70.0  # ohm cm^2, ohm cm, ms, mV
LENGTH, DIAMETER = 400.0, 2.0  # um
FAST = Receptor(0.0, 0.5, 3.0)
SLOW = Receptor(0.0, 3.0, 60.0)
BRAKE = Receptor(-75.0, 0.5, 7.0)


# ---- the engine's side


def lands(
    name: str, at: float = 0.0, receptor: Receptor = FAST, **more: Any
) -> tuple[float, dict[str, Any]]:
    """Return where an input lands (um on the dendrite, 0: the soma) and what its contact is."""
    return at, {"input": name, "receptor": receptor, **more}


def scene_of(*landing: tuple[float, dict[str, Any]], **settings: Any) -> Scene:
    """Return a cell whose dendrite, if any, is cut where inputs land; "weak" learns."""
    places = sorted({at for at, _ in landing} - {0.0})
    dendrites = {"shaft": Dendrite(LENGTH, DIAMETER)} if places else {}
    tree = build_tree(dendrites, [("shaft", x) for x in places], 0)
    drives = [Drive(*drive) for drive in settings.pop("drives", ())]
    plain: dict[str, Any] = {"dt": 0.1, "seed": 11, "learners": ["weak"], "inhibitory": ["brake"]}
    return Scene(
        tree=tree,
        rm=RM,
        ri=RI,
        tau_m=TAU,
        rest=REST,
        reset=REST,
        refractory=2.0,
        contacts=[Contact(node=[0.0, *places].index(at), **more) for at, more in landing],
        drives=drives,
        **{**plain, **settings},
    )


def cells_of(
    scene: Scene,
    *,
    load: Sequence[float] = (8.0,),
    threshold: float | Sequence[float] = 12.0,
    sites: float | Sequence[float] = 20.0,
    probability: float | Sequence[float] = 0.5,
    quantum: float | Sequence[float] = 0.4,
    highest: float = 0.95,
) -> Cells:
    """Return cells: load (nS) and threshold (mV over rest) of each, release of each contact."""
    n, contacts = len(load), len(scene.contacts)
    chance = np.broadcast_to(probability, (n, contacts))
    release = table(
        layout.RELEASE,
        sites=np.broadcast_to(sites, (n, contacts)),
        probability=chance,
        highest=np.maximum(chance, highest),
        quantum=np.broadcast_to(quantum, (n, contacts)),
    )
    over = np.broadcast_to(threshold, (n,))
    cells = table(layout.CELL, number=np.arange(n), load=np.array(load), threshold=over)
    return Cells(cells, release, np.zeros((n, 0, 0)), np.zeros((n, 0)))


def wiring_of(scene: Scene) -> Wiring:
    """Return the wiring of an arm without events, rule or route."""
    none = np.zeros(0)
    numbers = Numbers(none, none, none, none, none, none, none, 0.0)
    events = events_of(scene, {}, none, pre_is="arrival")
    return wire(scene, events, end=0.0, readings=none, numbers=numbers, route=None)


def reader_of(scene: Scene, **cells: Any) -> Reader:
    """Return a reader of cells to which nothing happens."""
    return Reader(scene, wiring_of(scene), cells_of(scene, **cells))


def state_at(reader: Reader, route: Mixture, factors: Sequence[float]) -> State:
    """Return the slow variables at readings where every channel expresses these factors."""
    shape = (len(reader.loads), len(factors), len(route.shares), len(reader.scene.learners))
    each = np.broadcast_to(np.asarray(factors, float)[None, :, None, None], shape).copy()
    return state_of(reader.scene, reader.wiring, reader.cells, route, each)


# ---- scipy's side


@dataclass(frozen=True)
class Opening:
    """A conductance of peak `g` (nS) that opens at `time` (ms) at a node."""

    g: float
    node: int = 0
    receptor: Receptor = FAST
    time: float = 0.0


Network = tuple[Floats, Floats]


def network(
    load: float, places: Sequence[float] = (), widths: Sequence[float] | None = None
) -> Network:
    """Return conductance matrix and leaks (nS) of the soma and a dendrite cut at `places`."""
    G, leak = np.zeros((len(places) + 1,) * 2), np.zeros(len(places) + 1)
    leak[0] = load
    ends = [0.0, *places, *([LENGTH] if places else [])]
    for s in range(len(ends) - 1):
        d = DIAMETER * (1.0 if widths is None else widths[s]) * 1e-4  # cm
        x = (ends[s + 1] - ends[s]) * 1e-4 / np.sqrt(d / 4 * RM / RI)
        semi = 1e9 * np.pi / 2 * d**1.5 / np.sqrt(RM * RI)
        if s == len(places):
            leak[s] += semi * np.tanh(x)
            continue
        leak[[s, s + 1]] += semi * np.tanh(x / 2)
        link = semi / np.sinh(x)
        G[[s, s + 1], [s, s + 1]] += link
        G[[s, s + 1], [s + 1, s]] -= link
    return G + np.diag(leak), leak


def waveform(receptor: Receptor, t: float) -> float:
    """Return the difference of exponentials of peak 1; a single exponential without a rise."""
    r, d = receptor.rise, receptor.decay
    if t < 0:
        return 0.0
    if r == 0:
        return float(np.exp(-t / d))
    top = r * d / (d - r) * np.log(d / r)
    return float((np.exp(-t / d) - np.exp(-t / r)) / (np.exp(-top / d) - np.exp(-top / r)))


def integrated(
    cell: Network, openings: Sequence[Opening], end: float = 150.0
) -> tuple[Floats, Floats]:
    """Return times (ms) and the soma's voltage over rest (mV): C dV/dt = -G V + g (E - V)."""
    G, leak = cell

    def slope(t: float, v: Floats) -> Floats:
        current = -G @ v
        for o in openings:
            g = o.g * waveform(o.receptor, t - o.time)
            current[o.node] += g * (o.receptor.reversal - REST - v[o.node])
        return np.asarray(current / (TAU * leak))

    edges = sorted({0.0, *(o.time for o in openings), end})
    times, soma, v = [np.zeros(1)], [np.zeros(1)], np.zeros(len(leak))
    for a, b in pairwise(edges):
        grid = np.linspace(a, b, max(int((b - a) / 0.01), 2))
        made = solve_ivp(slope, (a, b), v, "LSODA", grid, rtol=1e-8, atol=1e-9, max_step=2.0)
        times, soma, v = [*times, made.t[1:]], [*soma, made.y[0, 1:]], made.y[:, -1]
    return np.concatenate(times), np.concatenate(soma)


def shape_of(t: Floats, v: Floats) -> tuple[float, float, float]:
    """Return peak (mV), 20-80 % rise and half-width (ms) around the highest point."""
    top = int(np.argmax(v))

    def at(part: float, side: int) -> float:
        reach = v[top::side] <= part * v[top]
        k = top + side * int(np.argmax(reach))
        pair = [k, k - side]
        return float(np.interp(part * v[top], v[pair], t[pair]))

    return float(v[top]), at(0.8, -1) - at(0.2, -1), at(0.5, 1) - at(0.5, -1)


def least(
    cell: Network, over: float, openings: Callable[[float], Sequence[Opening]], end: float = 80.0
) -> float:
    """Return the conductance (nS) at which the soma's peak is `over` mV, by root finding."""

    def missing(log: float) -> float:
        return float(integrated(cell, openings(np.exp(log)), end)[1].max()) - over

    return float(np.exp(brentq(missing, np.log(1e-2), np.log(2000.0), xtol=1e-7)))


def z_of(hits: float, trials: int, chance: float) -> float:
    """Return how many standard errors `hits` of `trials` are from what `chance` says."""
    return float((hits - trials * chance) / np.sqrt(trials * chance * (1 - chance)))
