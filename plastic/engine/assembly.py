"""From a described cell, a schedule of events, a rule and a route to the arrays of the engine.

A `Scene` is the cell and its inputs as arrays and small records, without any population; an arm
adds times, a rule and a route. What does not fit is refused here, with what was needed and what is
provided.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field

import numpy as np

from plastic.engine import layout
from plastic.engine.kernel import Numbers
from plastic.engine.layout import Cells, Floats, Ints, Log, Records, Wiring, table
from plastic.errors import Misfit
from plastic.membrane.receptors import norm
from plastic.membrane.spikes import BackPropagation
from plastic.membrane.tree import Tree
from plastic.routes._interface import TARGETS, Mixture, Route

TICK = 1000.0  # ms between updates of what is expressed

#: what moves at ticks only, since it concerns more than the contact that learned
SLOW = ("diameter", "inhibition")


@dataclass(frozen=True)
class Receptor:
    """Kinetics and reversal of a synaptic conductance; mV absolute, ms."""

    reversal: float
    rise: float
    decay: float


@dataclass(frozen=True)
class Contact:
    """One place where an input lands."""

    input: str
    node: int
    receptor: Receptor
    delay: float = 0.0  # ms from the presynaptic spike
    quantal_cv: float = 0.0
    recovery: float = 0.0  # ms of depletion, 0: none
    facilitation: float = 0.0  # ms, 0: none
    neck: float = 0.0  # Mohm, in series with one site
    share: float = 1.0  # of the input's sites
    added: bool = False  # exists only by the route added_contact


@dataclass(frozen=True)
class Drive:
    """An input that is driven by the spikes of another one (feed-forward)."""

    driver: str
    driven: str
    delay: float  # ms


@dataclass(frozen=True)
class Scene:
    """A cell with its inputs; membrane values in ohm cm^2, ohm cm, ms; voltages in mV."""

    tree: Tree
    rm: float
    ri: float
    tau_m: float
    rest: float
    reset: float
    refractory: float
    contacts: Sequence[Contact]
    learners: Sequence[str] = ()
    drives: Sequence[Drive] = ()
    inhibitory: Sequence[str] = ()
    back_propagation: BackPropagation = field(default_factory=BackPropagation)
    dt: float = 0.1
    seed: int = 0
    deterministic: bool = False
    clocked: bool = False

    @property
    def inputs(self) -> list[str]:
        """The inputs in the order of their contacts."""
        return list(dict.fromkeys(k.input for k in self.contacts))

    def primary(self, name: str) -> int:
        """Return the index of the first contact of an input."""
        return next(k for k, contact in enumerate(self.contacts) if contact.input == name)

    def ordered_learners(self) -> list[str]:
        """Return the learning inputs sorted by the distance of their first contact."""

        def place(name: str) -> tuple[float, int, int]:
            node = self.contacts[self.primary(name)].node
            return float(self.tree.node_distance[node]), node, self.primary(name)

        return sorted(self.learners, key=place)


def input_times(
    scene: Scene, times: Mapping[str, Floats], *, inhibition_blocked: bool = False
) -> dict[str, Floats]:
    """Return the event times (ms) of every input, the driven ones included."""
    found: dict[str, list[Floats]] = {name: [np.asarray(t, float)] for name, t in times.items()}
    for drive in scene.drives:
        driver = np.asarray(times.get(drive.driver, ()), dtype=float)
        found.setdefault(drive.driven, []).append(driver + drive.delay)
    blocked = set(scene.inhibitory) if inhibition_blocked else set()
    merged = {}
    for name, parts in found.items():
        if name not in scene.inputs:
            raise Misfit("protocol", got=f"events of {name!r}", expected=f"{scene.inputs}")
        steps = np.unique(np.rint(np.concatenate(parts) / scene.dt).astype(np.int64))
        merged[name] = np.asarray(steps * scene.dt if name not in blocked else [], dtype=float)
    return merged


def events_of(
    scene: Scene, times: Mapping[str, Floats], injected: Floats, *, pre_is: str
) -> Records:
    """Return the events of every contact and learner, in steps.

    Parameters
    ----------
    scene : Scene
    times : mapping of input to array, ms
        As returned by `input_times`.
    injected : array, ms
        Forced spikes of the cell.
    pre_is : {"arrival", "spike"}
        Which presynaptic moment the rule calls "pre".
    """
    learners = scene.ordered_learners()
    rows: list[tuple[Ints, int, int]] = []
    for k, contact in enumerate(scene.contacts):
        at = np.asarray(times.get(contact.input, ()), dtype=float)
        step = np.rint((at + contact.delay) / scene.dt).astype(np.int64)
        learns = contact.input in learners and k == scene.primary(contact.input)
        with_contact = learns and pre_is == "arrival"
        who = learners.index(contact.input) if learns else -1
        rows.append((step, k, who if with_contact else -1))
        if learns and not with_contact:
            plain = np.rint(at / scene.dt).astype(np.int64)
            rows.append((plain, -1, who))
    forced = np.rint(np.asarray(injected, float) / scene.dt).astype(np.int64)
    rows.append((forced, -1, -1))
    step = np.concatenate([r[0] for r in rows])
    contact_of = np.concatenate([np.full(len(r[0]), r[1]) for r in rows])
    learner = np.concatenate([np.full(len(r[0]), r[2]) for r in rows])
    # within a step: injected spikes, contacts that open, and then what learns from it
    is_input = (contact_of >= 0) | (learner >= 0)
    order = np.lexsort((contact_of, learner, is_input, step))
    return table(layout.EVENT, step=step[order], contact=contact_of[order], learner=learner[order])


def wire(
    scene: Scene,
    events: Records,
    *,
    end: float,
    readings: Floats,
    numbers: Numbers,
    route: Mixture | None,
    immediate: bool = False,
) -> Wiring:
    """Return the arrays that all cells of one arm share.

    Parameters
    ----------
    end : float, ms
    readings : array, ms
    numbers : Numbers
        The rule's declarations.
    route : Mixture or None
        None: the factor is expressed nowhere.
    immediate : bool
        Ignore the delays and time constants of expression.
    """
    dt, contacts = scene.dt, scene.contacts
    kinds = dict.fromkeys((k.node, k.receptor) for k in contacts)
    groups = sorted(kinds, key=lambda kind: kind[0])
    learners = scene.ordered_learners()
    places = [contacts[scene.primary(name)].node for name in learners]
    sites = [0, *dict.fromkeys(node for node in places if node != 0)]
    site_of = [sites.index(node) for node in places]
    distance = scene.tree.node_distance[sites]
    delay = np.rint(np.asarray(scene.back_propagation.delay(distance)) / dt)
    wired = _contacts(scene, groups, learners)
    beyond = _beyond(scene)
    return Wiring(
        plan=_plan(scene, end, numbers.window, _tick(route, dt, immediate)),
        stretches=_stretches(scene, beyond, wired),
        beyond=beyond,
        eased=_eased(scene, learners),
        groups=_groups(groups, scene.rest, dt),
        slots=_slots([node for node, _ in groups]),
        contacts=wired,
        sites=table(layout.SITE, delay=delay, distance=distance),
        learner_site=_ints(site_of),
        site_first=_ints(np.searchsorted(site_of, np.arange(len(sites) + 1))),
        events=events,
        reading_step=_ints(np.rint(np.asarray(readings) / dt)),
        channels=_channels(route, immediate),
        taus_pre=numbers.taus_pre,
        taus_post=numbers.taus_post,
        starts=numbers.starts,
        cell_starts=numbers.cell_starts,
        low=numbers.low,
    )


def _plan(scene: Scene, end: float, window: float, tick: int) -> Records:
    """Return the single numbers of an arm; end and window in ms, tick in steps."""
    dt, spread = scene.dt, scene.back_propagation
    return table(
        layout.PLAN,
        seed=scene.seed,
        n_steps=round(end / dt),
        n_nodes=scene.tree.n_nodes,
        refractory=round(scene.refractory / dt),
        tick=tick,
        window=round(window / dt),
        deterministic=int(scene.deterministic),
        clocked=int(scene.clocked),
        dt=dt,
        rm=scene.rm,
        ri=scene.ri,
        tau_m=scene.tau_m,
        reset=scene.reset - scene.rest,
        bap_length=spread.length_constant,
        bap_loss=spread.train_loss,
        bap_recovery=max(spread.recovery, 1e-9),
        bap_floor=spread.floor,
    ).reshape(1)


def _beyond(scene: Scene) -> Ints:
    """Return which contacts lie at or beyond each stretch, (stretch, contact)."""
    stretches, contacts = range(len(scene.tree.stretch_parent)), scene.contacts
    rows = [
        [int(k.node in scene.tree.beyond(s) and not k.added) for k in contacts] for s in stretches
    ]
    return np.array(rows, dtype=np.int64).reshape(len(stretches), len(contacts))


def _stretches(scene: Scene, beyond: Ints, contacts: Records) -> Records:
    """Return the stretches; one widens that has a learning excitatory contact beyond it."""
    tree = scene.tree
    return table(
        layout.STRETCH,
        parent=tree.stretch_parent,
        child=tree.stretch_child,
        widens=(beyond * contacts["excites"] * (contacts["learner"] >= 0)).any(axis=1),
        length=tree.stretch_length,
        diameter=tree.stretch_diameter,
    )


def _groups(groups: Sequence[tuple[int, Receptor]], rest: float, dt: float) -> Records:
    """Return the kinetics of every group of receptors; a rise of 0 is a single exponential."""
    rise, decay = np.array([(r.rise, r.decay) for _, r in groups]).reshape(-1, 2).T
    fastest = np.where(rise > 0, rise, 1.0)
    return table(
        layout.GROUP,
        reversal=[r.reversal - rest for _, r in groups],
        keep_decay=np.exp(-dt / decay),
        keep_rise=np.where(rise > 0, np.exp(-dt / fastest), 0.0),
        mean_decay=-np.expm1(-dt / decay) * decay / dt,
        mean_rise=np.where(rise > 0, -np.expm1(-dt / fastest) * fastest / dt, 0.0),
        norm=[float(norm(*times)) for times in zip(rise, decay, strict=True)],
    )


def _slots(nodes: Sequence[int]) -> Records:
    """Return the nodes that have receptors, each with the range of its (sorted) groups."""
    each = np.unique(nodes)
    return table(
        layout.SLOT,
        node=each,
        first=np.searchsorted(nodes, each),
        last=np.searchsorted(nodes, each, side="right"),
    )


def _contacts(
    scene: Scene, groups: Sequence[tuple[int, Receptor]], learners: Sequence[str]
) -> Records:
    """Return the contacts, with the group each opens and the learner it belongs to."""
    contacts = scene.contacts
    return table(
        layout.CONTACT,
        group=[groups.index((k.node, k.receptor)) for k in contacts],
        learner=[learners.index(k.input) if k.input in learners else -1 for k in contacts],
        added=[int(k.added) for k in contacts],
        excites=[int(k.input not in scene.inhibitory) for k in contacts],
        cv=[k.quantal_cv for k in contacts],
        recovery=[k.recovery for k in contacts],
        facilitation=[k.facilitation for k in contacts],
        neck=[k.neck for k in contacts],
    )


def _eased(scene: Scene, learners: Sequence[str]) -> Ints:
    """Return which inhibitory contacts each learning input drives, (learner, contact).

    An inhibitory input that learns itself is left to its own rule.
    """
    eased = set(scene.inhibitory) - set(learners)
    driven = {(d.driver, d.driven) for d in scene.drives if d.driven in eased}
    rows = [[int((name, k.input) in driven) for k in scene.contacts] for name in learners]
    return np.array(rows, dtype=np.int64).reshape(len(learners), len(scene.contacts))


def _ints(values: object) -> Ints:
    return np.ascontiguousarray(np.asarray(values, dtype=float), dtype=np.int64)


def _times_of(channel: Route, immediate: bool) -> tuple[float, float]:
    return (0.0, 0.0) if immediate else (channel.delay, channel.tau)


def _tick(route: Mixture | None, dt: float, immediate: bool) -> int:
    """Return the steps between updates of what is expressed; 0: the factor acts at once."""
    channels = [] if route is None else list(route.channels.values())
    late = any(any(_times_of(c, immediate)) or c.target in SLOW for c in channels)
    return round(TICK / dt) if late else 0


def _channels(route: Mixture | None, immediate: bool) -> Records:
    rows = [] if route is None else [(route.channels[n], s) for n, s in route.shares.items()]
    times = [_times_of(c, immediate) for c, _ in rows]
    return table(
        layout.CHANNEL,
        target=[TARGETS.index(c.target) for c, _ in rows],
        excess=[int(c.form == "excess") for c, _ in rows],
        delay=[round(delay / TICK) for delay, _ in times],
        exponent=[c.sign * s for c, s in rows],
        lowest=[c.lowest for c, _ in rows],
        highest=[c.highest for c, _ in rows],
        keep=[np.exp(-TICK / tau) if tau > 0 else 0.0 for _, tau in times],
    )


def ceiling(route: Mixture, highest_over_start: float, learned: Sequence[tuple[int, int]]) -> float:
    """Return the factor at which every channel of a route is at its limit.

    Parameters
    ----------
    route : Mixture
    highest_over_start : float
        Highest release probability over the baseline one.
    learned : sequence of (number of learning contacts, number of excitatory contacts)
        Per stretch that widens, at or beyond it.
    """
    largest = 1.0
    for name, share in route.shares.items():
        channel = route.channels[name]
        if share == 0:
            continue
        if channel.target == "probability":
            reach = highest_over_start
        elif channel.target == "diameter":
            reach = max(
                ((channel.highest * every - (every - own)) / own for own, every in learned if own),
                default=np.inf,
            )
        elif channel.form == "excess":
            reach = channel.highest + 1.0
        else:
            reach = channel.highest if channel.sign > 0 else 1.0 / max(channel.lowest, 1e-300)
        with np.errstate(over="ignore"):  # beyond the largest number there is no ceiling
            largest = max(largest, float(np.power(float(reach), 1.0 / share)))
    return largest


def empty_log(cells: Cells, wiring: Wiring, variables: int, spikes: int = 4096) -> Log:
    """Return a log of the right shapes for a block of cells."""
    n, readings = len(cells.cells), len(wiring.reading_step)
    learners, channels = len(wiring.learner_site), len(wiring.channels)
    return Log(
        variables=np.zeros((n, readings, variables, learners)),
        factor=np.zeros((n, readings, learners)),
        expressed=np.zeros((n, readings, channels, learners)),
        diameter=np.zeros((n, readings, len(wiring.stretches))),
        cell_states=np.zeros((n, readings, len(wiring.cell_starts))),
        spike_step=np.zeros((n, spikes), dtype=np.int64),
        ended=np.zeros(n, layout.ENDED),
    )
