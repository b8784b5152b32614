"""Readings: what a rested, virtual probe of one input alone would see. They change nothing.

At rest, an input alone fires the cell when its total conductance passes a threshold g*, a property
of the cell, its geometry, the kinetics and the inhibition the input recruits, not of the rule, p, q
or N. So EPSP shapes and g* come from small tables per cell, over conductance and over the one thing
that moves the geometry or the place (a widened dendrite, an added contact); the probability of a
spike is the exact tail of binomial release with quantal variance. Where the premise fails, the
probe is simulated: `Reader.premise` says why.
"""

from __future__ import annotations

import math
import threading
from collections.abc import Callable
from dataclasses import dataclass

import numpy as np

from plastic.engine.assembly import Scene
from plastic.engine.kernel import probes
from plastic.engine.layout import Cells, Floats, Ints, Wiring
from plastic.routes._interface import Mixture, Route

#: nodes of the tables: own conductance; width or added conductance, of an EPSP and of a threshold
OWN_NODES, ACROSS_NODES, GOAL_NODES = 32, 17, 129
#: nS; the tables are even in log(1 + g / SCALE)
SCALE = 1.0
#: nS; no conductance up to this one fires the cell: out of reach
LARGEST = 2000.0
#: ms of an EPSP that is followed, and within which a spike counts
EPSP_LENGTH, SPIKE_LENGTH = 150.0, 80.0
#: what moves beside an input's own conductance
WIDTH, ADDED, EASED = "the dendrite widens", "a contact is added", "inhibition eases"
#: trials per reading where the premise of the tables fails
TRIALS = 200


@dataclass(frozen=True)
class Openings:
    """What opens when one input is stimulated once: contacts, steps, and whose they are."""

    contact: Ints
    step: Ints
    own: Floats  # share of the input's own conductance
    added: Floats  # share of the conductance of its added contact
    fixed: Floats  # 1 where a driven input opens


@dataclass(frozen=True)
class State:
    """The slow variables at the readings of one arm.

    sites, probability, quantum : array, shape (cell, contact, reading); quantum in nS
    width : array, shape (cell, reading, stretch), multiple of the diameter
    """

    sites: Floats
    probability: Floats
    quantum: Floats
    width: Floats

    def conductance(self, contacts: list[int]) -> Floats:
        """Return the mean conductance (nS) of some contacts together, shape (cell, reading)."""
        chosen = self.sites[:, contacts] * self.probability[:, contacts] * self.quantum[:, contacts]
        return np.asarray(chosen.sum(axis=1), dtype=float)


def state_of(scene: Scene, wiring: Wiring, cells: Cells, route: Mixture, factors: Floats) -> State:
    """Return the slow variables that a route makes of factors.

    Parameters
    ----------
    factors : array, shape (cell, reading, channel, learner)
        The factor that each channel expresses, channels in the order of the route's shares.
    """
    shape = (factors.shape[0], len(scene.contacts), factors.shape[1])
    base = {
        n: np.repeat(cells.release[n][:, :, None], shape[2], axis=2)
        for n in ("sites", "quantum", "probability")
    }
    sites, quantum, probability = (
        base["sites"].copy(),
        base["quantum"].copy(),
        base["probability"].copy(),
    )
    neck = np.tile(wiring.contacts["neck"][None, :, None] * 1e-3, (shape[0], 1, shape[2]))
    sites[:, wiring.contacts["added"] == 1] = 0.0
    width = np.ones((shape[0], shape[2], len(wiring.stretches)))
    for ch, (name, share) in enumerate(route.shares.items()):
        channel = route.channels[name]
        if channel.target == "diameter":
            width = _widths(wiring, channel, factors[:, :, ch] ** share)
            continue
        if channel.target == "inhibition":
            for eased in np.flatnonzero(wiring.eased.any(axis=0)):
                drivers = factors[:, :, ch][:, :, wiring.eased[:, eased] == 1]
                quantum[:, eased] *= channel.multiple(drivers.mean(axis=2), share)
            continue
        for k, i in enumerate(wiring.contacts["learner"]):
            if i < 0:
                continue
            value = channel.multiple(factors[:, :, ch, i], share)
            if channel.target == "probability":
                highest = cells.release["highest"][:, k, None]
                probability[:, k] = np.minimum(probability[:, k] * value, highest)
            elif channel.target == "quantum":
                quantum[:, k] *= value
            elif channel.target == "neck":
                neck[:, k] *= value
            elif channel.target == "added_sites" and wiring.contacts["added"][k]:
                sites[:, k] = base["sites"][:, k] * value
            elif channel.target == "sites" and not wiring.contacts["added"][k]:
                sites[:, k] *= value
    return State(sites, probability, quantum / (1.0 + quantum * neck), width)


def _widths(wiring: Wiring, channel: Route, grown: Floats) -> Floats:
    """Return the multiple of every stretch's diameter, (cell, reading, stretch)."""
    contacts, beyond = wiring.contacts, wiring.beyond.astype(bool)
    each = np.ones((*grown.shape[:2], len(contacts)))
    for k, i in enumerate(contacts["learner"]):
        if i >= 0:
            each[:, :, k] = grown[:, :, i]
    width = np.ones((*grown.shape[:2], len(beyond)))
    for s in np.flatnonzero(wiring.stretches["widens"]):
        here = beyond[s] & (contacts["excites"] == 1)
        width[:, :, s] = np.clip(each[:, :, here].mean(axis=2), channel.lowest, channel.highest)
    return width


@dataclass(frozen=True)
class Shape:
    """EPSP shape at the soma, each array (cell, reading): mV, ms, ms."""

    peak: Floats
    rise: Floats
    half_width: Floats


def position(g: Floats, top: float, nodes: int) -> Floats:
    """Return where conductances (nS) lie on a table's axis, 0 to nodes - 1."""
    scaled = np.log1p(np.asarray(g) / SCALE) / math.log1p(top / SCALE)
    return np.clip(scaled * (nodes - 1), 0.0, nodes - 1.0)


def axis(top: float, nodes: int) -> Floats:
    """Return the conductances (nS) at the nodes of a table's axis."""
    return np.asarray(
        SCALE * np.expm1(np.linspace(0.0, math.log1p(top / SCALE), nodes)), dtype=float
    )


def _weights(at: Floats, nodes: int) -> tuple[Ints, Floats]:
    """Return the first of four nodes around each position, and their cubic Lagrange weights."""
    first = np.clip(np.floor(at).astype(np.int64) - 1, 0, max(nodes - 4, 0))
    x = at - first
    weights = np.stack(
        [
            -(x - 1) * (x - 2) * (x - 3) / 6,
            x * (x - 2) * (x - 3) / 2,
            -x * (x - 1) * (x - 3) / 2,
            x * (x - 1) * (x - 2) / 6,
        ]
    )
    return first, weights


def interpolate(values: Floats, along: Floats, across: Floats | None = None) -> Floats:
    """Return values of per-cell tables at positions, by cubic Lagrange interpolation.

    Parameters
    ----------
    values : array, shape (cell, across, along)
    along, across : array, shape (cell, reading)
        Positions on the last and on the middle axis, in nodes.
    """
    cell = np.arange(values.shape[0])[:, None]
    first, weights = _weights(along, values.shape[2])
    if across is None or values.shape[1] == 1:
        rows = [(0, 1.0)]
        second = np.zeros_like(first)
    else:
        second, outer = _weights(across, values.shape[1])
        rows = [(k, outer[k]) for k in range(4)]
    total = np.zeros(along.shape)
    for row, factor in rows:
        for k in range(4):
            total += factor * weights[k] * values[cell, second + row, first + k]
    return total


class Reader:
    """Readings of the cells of one block; tables are made when first needed and shared by arms.

    Parameters
    ----------
    scene : Scene
    wiring : Wiring
        Of any arm of the study: only what all arms share is read.
    cells : Cells
    top : float, optional
        The largest conductance of the tables, nS; by default forty times the largest of these
        cells. Given, a cell reads the same bits whatever the cells beside it.
    """

    def __init__(
        self, scene: Scene, wiring: Wiring, cells: Cells, top: float | None = None
    ) -> None:
        self.scene, self.wiring, self.cells = scene, wiring, cells
        self.loads = np.ascontiguousarray(cells.cells["load"])
        self.thresholds = np.ascontiguousarray(cells.cells["threshold"])
        neck = wiring.contacts["neck"] * 1e-3
        self.quantum = cells.release["quantum"] / (1.0 + cells.release["quantum"] * neck)
        base = cells.release["sites"] * cells.release["probability"] * self.quantum
        own = [k for k, c in enumerate(scene.contacts) if c.input not in scene.inhibitory]
        widest = 40.0 * float(base[:, own].max()) if own else 1.0
        self.top = widest if top is None else top
        self.added_top = self.top / 4
        self._tables: dict[tuple[object, ...], tuple[Floats, ...]] = {}
        self._lock = threading.Lock()

    # ---- what opens

    def own_contacts(self, name: str) -> list[int]:
        """Return the contacts an input has from the start."""
        return [k for k, c in enumerate(self.scene.contacts) if c.input == name and not c.added]

    def added_contacts(self, name: str) -> list[int]:
        """Return the contacts an input gets by the route added_contact."""
        return [k for k, c in enumerate(self.scene.contacts) if c.input == name and c.added]

    def openings(self, name: str, *, inhibition: bool = True) -> Openings:
        """Return what one stimulus of an input opens, in order of time."""
        scene, rows = self.scene, []
        starts = min(scene.contacts[k].delay for k in self.own_contacts(name))
        for k, contact in enumerate(scene.contacts):
            delays = [
                d.delay for d in scene.drives if d.driver == name and d.driven == contact.input
            ]
            mine = contact.input == name
            if mine:
                delays = [0.0]
            if contact.input in scene.inhibitory and not inhibition:
                delays = []
            for delay in delays:
                step = round((delay + contact.delay - starts) / scene.dt)
                own = contact.share if mine and not contact.added else 0.0
                rows.append((step, k, own, float(mine and contact.added), float(not mine)))
        rows.sort()
        columns = [np.array(column) for column in zip(*rows, strict=True)]
        steps, chosen = columns[0].astype(np.int64), columns[1].astype(np.int64)
        steps -= steps[0]  # what the input drives may open before its own contacts do
        return Openings(chosen, steps, *(column.astype(float) for column in columns[2:]))

    def premise(self, name: str, route: Mixture | None, *, inhibition: bool = True) -> str:
        """Return why the tables do not hold for firing by this input; empty when they hold."""
        contacts, wiring = self.scene.contacts, self.wiring
        opened = self.openings(name, inhibition=inhibition)
        for k in opened.contact[opened.fixed == 1]:
            release = self.cells.release[:, k]
            certain = (release["probability"] >= 1).all() and (release["sites"] % 1 == 0).all()
            if not self.scene.deterministic and (not certain or wiring.contacts[k]["cv"] > 0):
                return f"{contacts[k].input}, which it recruits, releases at random"
        if len(self.own_contacts(name)) > 1:
            return "it lands at several places"
        if len(self._moving(name, route)) > 1:
            return " and ".join(self._moving(name, route))
        if self._widened_by_many(route):
            return "several inputs widen the dendrite"
        return ""

    def _targets(self, route: Mixture | None) -> set[str]:
        return set() if route is None else {c.target for c in route.channels.values()}

    def _widened_by_many(self, route: Mixture | None) -> bool:
        return "diameter" in self._targets(route) and len(self.scene.learners) > 1

    def _moving(self, name: str, route: Mixture | None) -> list[str]:
        """Return what moves beside an input's own conductance, in words."""
        targets, opened = self._targets(route), self.openings(name)
        moves = {
            WIDTH: "diameter" in targets,
            ADDED: "added_sites" in targets and name in self.scene.learners,
            EASED: "inhibition" in targets and bool(self._eased(opened).any()),
        }
        return [what for what, is_so in moves.items() if is_so]

    def _varies(self, name: str, route: Mixture | None) -> str:
        """Return what a table needs as its second axis, or nothing."""
        return next(iter(self._moving(name, route)), "")

    def _eased(self, opened: Openings) -> Floats:
        """Return 1 for openings of driven inhibition that a learning input may ease."""
        eased: Ints = self.wiring.eased.max(axis=0, initial=0)
        return np.asarray(opened.fixed * eased[opened.contact], dtype=float)

    # ---- tables

    def _width_axis(self, route: Mixture, nodes: int) -> tuple[float, float, Floats]:
        """Return the range of the grown factor and the multiples (node, stretch) along it."""
        channel, wiring = _channel(route, "diameter"), self.wiring
        excites = wiring.contacts["excites"] == 1
        learns = wiring.contacts["learner"] >= 0
        at = wiring.beyond.astype(bool) & excites
        every, own = at.sum(axis=1), (at & learns).sum(axis=1)
        widens = wiring.stretches["widens"] == 1
        reach = [(channel.highest * n - (n - k)) / k for n, k in zip(every, own, strict=True) if k]
        least = [(channel.lowest * n - (n - k)) / k for n, k in zip(every, own, strict=True) if k]
        low, high = max(min([*least, 1.0]), 0.0), max([*reach, 1.0 + 1e-6])
        grown = np.linspace(low, high, nodes)[:, None]
        mean = np.where(widens, (grown * own + (every - own)) / np.maximum(every, 1), 1.0)
        limited = np.where(widens, np.clip(mean, channel.lowest, channel.highest), 1.0)
        return low, high, np.ascontiguousarray(limited)

    def _grid(
        self, name: str, route: Mixture | None, nodes: int
    ) -> tuple[tuple[str, object], Floats, Floats]:
        """Return a key, the multiples (geometry, stretch) and the added conductances of a table."""
        varies = self._varies(name, route)
        key: object = None
        multiples, extra = np.ones((1, len(self.wiring.stretches))), np.zeros(1)
        if varies == WIDTH and route is not None:
            key = _channel(route, "diameter")
            multiples = self._width_axis(route, nodes)[2]
        if varies == ADDED:
            extra = axis(self.added_top, nodes)
        if varies == EASED and route is not None:
            key = channel = _channel(route, "inhibition")
            extra = np.linspace(channel.highest, channel.lowest, nodes)  # ever less inhibition
        return (varies, key), multiples, extra

    def _kept(
        self, key: tuple[object, ...], make: Callable[[], tuple[Floats, ...]]
    ) -> tuple[Floats, ...]:
        """Return a table, made once per reader."""
        with self._lock:
            if key not in self._tables:
                self._tables[key] = make()
            return self._tables[key]

    def _shapes(self, name: str, route: Mixture | None, inhibition: bool) -> tuple[Floats, ...]:
        """Return tables of peak, rise and half-width, each (cell, across, own)."""
        key, multiples, extra = self._grid(name, route, ACROSS_NODES)
        wiring, opened = self.wiring, self.openings(name, inhibition=inhibition)

        def make() -> tuple[Floats, ...]:
            own = axis(self.top, OWN_NODES)
            pairs = np.array([(g, a) for a in extra for g in own])
            fixed, second = self._beside(opened, key[0])
            amounts = (
                fixed[:, None, :] + pairs[None, :, :1] * opened.own + pairs[:, 1:] * second[:, None]
            )
            out = np.zeros((len(self.loads), len(multiples), len(pairs), 4))
            probes().run_shapes(
                wiring.plan,
                wiring.stretches,
                wiring.groups,
                wiring.slots,
                self.loads,
                multiples,
                opened.step,
                wiring.contacts["group"][opened.contact].copy(),
                np.ascontiguousarray(amounts),
                round(EPSP_LENGTH / self.scene.dt),
                out,
            )
            across = max(len(multiples), len(extra))
            return tuple(
                _filled(out[..., k].reshape(len(self.loads), across, len(own))) for k in (0, 2, 3)
            )

        return self._kept(("shape", name, inhibition, key), make)

    def _goals(self, name: str, route: Mixture | None, inhibition: bool) -> Floats:
        """Return the table of g*, nS, (cell, across)."""
        key, multiples, extra = self._grid(name, route, GOAL_NODES)
        wiring, opened = self.wiring, self.openings(name, inhibition=inhibition)

        def make() -> tuple[Floats, ...]:
            goals = np.zeros((len(self.loads), len(multiples), len(extra)))
            fixed, second = self._beside(opened, key[0])
            probes().run_thresholds(
                wiring.plan,
                wiring.stretches,
                wiring.groups,
                wiring.slots,
                self.loads,
                self.thresholds,
                multiples,
                opened.step,
                wiring.contacts["group"][opened.contact].copy(),
                fixed,
                opened.own,
                second,
                extra,
                LARGEST,
                round(SPIKE_LENGTH / self.scene.dt),
                goals,
            )
            return (goals.reshape(len(self.loads), -1),)

        return self._kept(("goal", name, inhibition, key), make)[0]

    def _beside(self, opened: Openings, varies: str) -> tuple[Floats, Floats]:
        """Return what opens beside the own conductance, each (cell, opening).

        First what always opens (nS), the driven inputs at their mean; then what opens per unit of
        the table's second axis: of an added conductance (nS), or of eased inhibition (multiples).
        """
        release = self.cells.release[:, opened.contact]
        mean = release["sites"] * release["probability"] * self.quantum[:, opened.contact]
        driven = mean * opened.fixed
        if varies == EASED:
            eased = self._eased(opened)
            return np.ascontiguousarray(driven * (1 - eased)), np.ascontiguousarray(driven * eased)
        added = np.tile(opened.added, (len(self.loads), 1))
        return np.ascontiguousarray(driven), added

    def peaks(self, name: str) -> Floats:
        """Return the EPSP peak (mV) over the table's own conductances, (cell, node)."""
        return np.asarray(self._shapes(name, None, True)[0][:, 0], dtype=float)

    # ---- readings

    def _across(self, name: str, route: Mixture | None, state: State, nodes: int) -> Floats | None:
        """Return the position of every reading on the table's second axis."""
        varies = self._varies(name, route)
        if varies == ADDED:
            return position(state.conductance(self.added_contacts(name)), self.added_top, nodes)
        if varies == EASED and route is not None:
            channel, opened = _channel(route, "inhibition"), self.openings(name)
            k = opened.contact[np.flatnonzero(self._eased(opened))[0]]
            left = state.quantum[:, k] / self.quantum[:, k, None]
            share = (channel.highest - left) / (channel.highest - channel.lowest)
            return np.asarray(np.clip(share, 0.0, 1.0) * (nodes - 1), dtype=float)
        if varies != WIDTH or route is None:
            return None
        low, high, limited = self._width_axis(route, nodes)
        # the stretch that is limited last tells the grown factor apart over the whole range
        widest = int(np.argmax([len(np.unique(limited[:, s])) for s in range(limited.shape[1])]))
        grown = np.linspace(low, high, nodes)
        rising, index = np.unique(limited[:, widest], return_index=True)
        at = np.interp(state.width[:, :, widest], rising, grown[index])
        return (at - low) / (high - low) * (nodes - 1)

    def shape(
        self, name: str, route: Mixture | None, state: State, *, inhibition: bool = True
    ) -> Shape:
        """Return the EPSP of an input alone at every reading, at the mean of its release."""
        if len(self._moving(name, route)) > 1 or self._widened_by_many(route):
            return self._direct_shape(name, state, inhibition)
        peak, rise, half = self._shapes(name, route, inhibition)
        along = position(state.conductance(self.own_contacts(name)), self.top, OWN_NODES)
        across = self._across(name, route, state, ACROSS_NODES)
        return Shape(
            interpolate(peak, along, across),
            interpolate(rise, along, across),
            interpolate(half, along, across),
        )

    def _direct_shape(self, name: str, state: State, inhibition: bool) -> Shape:
        wiring, opened = self.wiring, self.openings(name, inhibition=inhibition)
        chosen = opened.contact
        amounts = (state.sites * state.probability * state.quantum)[:, chosen]
        n, readings = amounts.shape[0], amounts.shape[2]
        out = np.zeros((n, readings, 1, 4))
        group = wiring.contacts["group"][chosen].copy()
        for c in range(n):
            for r in range(readings):
                probes().run_shapes(
                    wiring.plan,
                    wiring.stretches,
                    wiring.groups,
                    wiring.slots,
                    self.loads[c : c + 1],
                    np.ascontiguousarray(state.width[c, r][None]),
                    opened.step,
                    group,
                    np.ascontiguousarray(amounts[c, :, r][None, None]),
                    round(EPSP_LENGTH / self.scene.dt),
                    out[c : c + 1, r : r + 1],
                )
        return Shape(out[:, :, 0, 0], out[:, :, 0, 2], out[:, :, 0, 3])

    def threshold(
        self, name: str, route: Mixture | None, state: State, *, inhibition: bool = True
    ) -> Floats:
        """Return the own conductance (nS) that fires the cell at each reading, inf out of reach."""
        goals = self._goals(name, route, inhibition)
        across = self._across(name, route, state, GOAL_NODES)
        if across is None:
            return np.repeat(goals[:, :1], state.width.shape[1], axis=1)
        return _between(goals, across)

    def fires_alone(
        self, name: str, route: Mixture | None, state: State, *, inhibition: bool = True
    ) -> Floats:
        """Return the probability that the input alone fires the cell, (cell, reading)."""
        if self.premise(name, route, inhibition=inhibition):
            return self.simulated(name, state, inhibition=inhibition)
        own = self.own_contacts(name)
        mine = _release(state, own[0])
        if self.scene.deterministic:
            goal = self.threshold(name, route, state, inhibition=inhibition)
            return (state.conductance(own) >= goal).astype(float)
        cv = float(self.wiring.contacts["cv"][own[0]])
        out = np.zeros(mine.shape[:2])
        if self._varies(name, route) == ADDED:
            goals = self._goals(name, route, inhibition)
            roots, weights = np.polynomial.hermite_e.hermegauss(9)
            probes().run_two_contacts(
                mine,
                _release(state, self.added_contacts(name)[0]),
                cv,
                axis(self.added_top, GOAL_NODES),
                goals,
                roots,
                weights / weights.sum(),
                out,
            )
            return out
        goal = np.ascontiguousarray(self.threshold(name, route, state, inhibition=inhibition))
        probes().run_tails(goal, mine, cv, out)
        return out

    def simulated(
        self, name: str, state: State, trials: int = TRIALS, *, inhibition: bool = True
    ) -> Floats:
        """Return the share of simulated stimuli that fire the cell, (cell, reading)."""
        wiring, opened = self.wiring, self.openings(name, inhibition=inhibition)
        release = np.stack([_release(state, int(k)) for k in opened.contact], axis=2)
        cv = wiring.contacts["cv"][opened.contact].copy()
        if self.scene.deterministic:  # one certain quantum of the mean
            release[..., 2] *= release[..., 0] * release[..., 1]
            release[..., :2], cv[:], trials = 1.0, 0.0, 1
        out = np.zeros(release.shape[:2])
        probes().run_chances(
            wiring.plan,
            wiring.stretches,
            wiring.groups,
            wiring.slots,
            np.ascontiguousarray(self.cells.cells["number"]),
            self.loads,
            self.thresholds,
            np.ascontiguousarray(state.width),
            opened.step,
            wiring.contacts["group"][opened.contact].copy(),
            opened.contact,
            np.ascontiguousarray(release),
            cv,
            trials,
            round(SPIKE_LENGTH / self.scene.dt),
            out,
        )
        return out

    def effect(self, contact: int) -> Floats:
        """Return the EPSP at the soma per nS of a weak opening of one contact, mV/nS, (cell,)."""
        wiring, weak = self.wiring, 0.01
        out = np.zeros((len(self.loads), 1, 1, 4))
        probes().run_shapes(
            wiring.plan,
            wiring.stretches,
            wiring.groups,
            wiring.slots,
            self.loads,
            np.ones((1, len(wiring.stretches))),
            np.zeros(1, np.int64),
            wiring.contacts["group"][[contact]].copy(),
            np.full((len(self.loads), 1, 1), weak),
            round(EPSP_LENGTH / self.scene.dt),
            out,
        )
        return np.asarray(out[:, 0, 0, 0] / weak, dtype=float)


def _channel(route: Mixture, target: str) -> Route:
    """Return the channel of a route that moves one physical variable."""
    return next(c for c in route.channels.values() if c.target == target)


def _release(state: State, contact: int) -> Floats:
    """Return (sites, probability, quantum) of one contact, shape (cell, reading, 3)."""
    parts = (state.sites[:, contact], state.probability[:, contact], state.quantum[:, contact])
    return np.ascontiguousarray(np.stack(parts, axis=-1))


def _between(goals: Floats, across: Floats) -> Floats:
    """Return thresholds between nodes, as `goal_beside` of the compiled readings does.

    Linear in the logarithm; in the inverse next to "out of reach", in itself next to nothing.
    """
    first = np.clip(np.floor(across).astype(np.int64), 0, goals.shape[1] - 2)
    cell = np.arange(goals.shape[0])[:, None]
    low, high, part = goals[cell, first], goals[cell, first + 1], across - first
    known = np.isfinite(low) & np.isfinite(high)
    with np.errstate(divide="ignore", invalid="ignore"):
        far = 1.0 / ((1 - part) / low + part / high)
        near = np.where(
            (low > 0) & (high > 0), low * (high / low) ** part, low + part * (high - low)
        )
    return np.asarray(np.where(known, near, far), dtype=float)


def _filled(values: Floats) -> Floats:
    """Replace what has no value (no EPSP at the lowest conductance) by the next node's.

    What has none at any higher node either (an EPSP longer than `EPSP_LENGTH`) stays without.
    """
    for node in range(values.shape[2] - 2, -1, -1):
        missing = np.isnan(values[:, :, node])
        values[:, :, node][missing] = values[:, :, node + 1][missing]
    return values
