"""From a study to its scene and its simulated cells.

Every cell draws its parameters from the seed, its own number and the parameter's name, so that
cell 7 is the same cell whatever the number of cells, the arm or the slice it is computed in.
"""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from plastic import draws
from plastic.engine import layout
from plastic.engine.assembly import Contact, Drive, Receptor, Scene, ceiling, events_of, wire
from plastic.engine.kernel import Numbers, numbers_of
from plastic.engine.layout import Cells, table
from plastic.engine.readings import OWN_NODES, Reader, axis, interpolate, position
from plastic.membrane.cable import conductances, input_resistance
from plastic.membrane.tree import build_tree
from plastic.routes import Mixture
from plastic.rules import Rule
from plastic.study.inputs import Input
from plastic.study.model import Study

Floats = NDArray[np.float64]

#: mV that a threshold stays above rest and reset, whatever the draw
LEAST_DRIVE = 2.0
#: a bundle is never recruited beyond this multiple of its nominal sites
MOST_RECRUITED = 8.0
#: tables of EPSPs end at this multiple of the largest nominal bundle: ten times what a bundle can
#: be recruited to. Nominal, so that no cell's tables depend on the cells beside it
TABULATED = 10.0 * MOST_RECRUITED
#: points per node at which such a table is inverted
FINER = 12


@dataclass(frozen=True)
class Population:
    """The scene of a study and what its cells drew.

    load (nS), threshold (mV over rest), input_resistance (Mohm), amplitude : array, shape (cell,)
    sites, probability, highest, quantum : array, shape (cell, contact); quantum in nS
    top : float
        The conductance at which tables of EPSPs end, nS.
    short : dict of input to the number of cells whose baseline EPSP could not be recruited
    """

    scene: Scene
    load: Floats
    threshold: Floats
    input_resistance: Floats
    amplitude: Floats
    sites: Floats
    probability: Floats
    highest: Floats
    quantum: Floats
    top: float
    short: dict[str, int]

    def base(self, chosen: slice = slice(None)) -> Cells:
        """Return the cells without any rule, for readings."""
        number = np.arange(len(self.load))[chosen]
        release = table(
            layout.RELEASE,
            sites=self.sites[chosen],
            probability=self.probability[chosen],
            highest=self.highest[chosen],
            quantum=self.quantum[chosen],
        )
        cells = table(
            layout.CELL, number=number, load=self.load[chosen], threshold=self.threshold[chosen]
        )
        n = len(number)
        return Cells(cells, release, np.zeros((n, 0, 0)), np.zeros((n, 0)))

    def with_rule(
        self, rule: Rule, route: Mixture, *, hold: bool, chosen: slice = slice(None)
    ) -> Cells:
        """Return the cells with their rule: amplitudes spread, weights held at the ceiling."""
        numbers, base = numbers_of(rule), self.base(chosen)
        n, learners = len(base.cells), self.scene.ordered_learners()
        parameters = np.tile(numbers.parameters, (n, 1))
        for name in rule.amplitudes:
            at = list(rule.parameters).index(name)
            spread = parameters[:, at] * self.amplitude[chosen]
            parameters[:, at] = np.clip(
                spread, rule.parameters[name].low, rule.parameters[name].high
            )
        high = np.tile(numbers.high[None, :, None], (n, 1, len(learners)))
        if hold and len(rule.weights) == 1:
            held = weight_at(rule, ceilings(self, route, chosen))
            high = np.minimum(high, held[:, None, :])
        return base._replace(high=np.ascontiguousarray(high), parameters=parameters)


def ceilings(population: Population, route: Mixture, chosen: slice = slice(None)) -> Floats:
    """Return the factor at which every channel of the route is at its limit, (cell, learner)."""
    scene = population.scene
    learners = scene.ordered_learners()
    counts = _widened(scene)
    found = np.ones((len(population.load[chosen]), len(learners)))
    for i, name in enumerate(learners):
        k = scene.primary(name)
        over = population.highest[chosen, k] / population.probability[chosen, k]
        found[:, i] = [ceiling(route, float(x), counts) for x in over]
    return found


def _widened(scene: Scene) -> list[tuple[int, int]]:
    """Return (learning, all) excitatory contacts at or beyond each stretch that widens."""
    rows = []
    for s in range(len(scene.tree.stretch_parent)):
        beyond = scene.tree.beyond(s)
        here = [
            c
            for c in scene.contacts
            if c.node in beyond and not c.added and c.input not in scene.inhibitory
        ]
        own = sum(c.input in scene.learners for c in here)
        if own:
            rows.append((own, len(here)))
    return rows


def weight_at(rule: Rule, factor: Floats) -> Floats:
    """Return the weight whose factor is `factor` (a rising map), within the rule's bounds."""
    only = next(iter(rule.weights.values()))
    low = np.full(factor.shape, rule.number(only.start))
    high = np.full(factor.shape, rule.number(only.high))
    reach = np.vectorize(lambda w: rule.factor(**{only.name: float(w)}))
    beyond = reach(high) <= factor
    for _ in range(60):
        middle = (low + high) / 2
        under = reach(middle) < factor
        low, high = np.where(under, middle, low), np.where(under, high, middle)
    return np.where(beyond, rule.number(only.high), high)


def scene_of(study: Study) -> Scene:
    """Return the cell and inputs of a study as the engine wants them."""
    cell, contacts, added = study.cell, [], []
    places = [place[:2] for it in study.inputs.values() for place in it.places]
    places += [
        (it.added_contact.on, it.added_contact.at)
        for it in study.inputs.values()
        if it.added_contact
    ]
    tree = build_tree(cell.dendrite, places, cell.refine)
    for name, it in study.inputs.items():
        for on, at, share in it.places:
            contacts.append(_contact(name, it, cell.rest, tree.node_of[on, at], share))
        if it.added_contact:
            node = tree.node_of[it.added_contact.on, it.added_contact.at]
            late = it.delay + it.added_contact.delay
            added.append(replace(_contact(name, it, cell.rest, node, 1.0), delay=late, added=True))
    return Scene(
        tree=tree,
        rm=cell.membrane.resistance,
        ri=cell.membrane.axial,
        tau_m=cell.membrane.tau,
        rest=cell.rest,
        reset=cell.reset,
        refractory=cell.refractory,
        contacts=[*contacts, *added],
        learners=list(study.compare.learns),
        drives=[
            Drive(d.input, name, d.delay) for name, it in study.inputs.items() for d in it.driven_by
        ],
        inhibitory=study.inhibitory,
        back_propagation=cell.back_propagation,
        dt=study.dt,
        seed=study.seed,
        deterministic=study.deterministic,
    )


def _contact(name: str, it: Input, rest: float, node: int, share: float) -> Contact:
    receptor = Receptor(it.receptor.reversal_at(rest), it.receptor.rise, it.receptor.decay)
    return Contact(
        name,
        node,
        receptor,
        delay=it.delay,
        quantal_cv=it.release.quantum_cv,
        recovery=it.release.depletion,
        facilitation=it.release.facilitation,
        neck=it.neck,
        share=share,
    )


def populate(study: Study) -> Population:
    """Return the simulated cells of a study."""
    scene, n = scene_of(study), study.cells
    cell, tree = study.cell, scene.tree
    nominal = input_resistance(conductances(tree, cell.rest_of_cell, scene.rm, scene.ri), 0)
    dendritic = 1000.0 / nominal - cell.rest_of_cell
    score = draws.named(study.seed, n, "input resistance")
    resistance = draws.lognormal(nominal, cell.input_resistance_cv, score)
    load = np.maximum(1000.0 / resistance - dendritic, 0.05 * cell.rest_of_cell)
    threshold = cell.threshold.mean + cell.threshold.sd * draws.named(study.seed, n, "threshold")
    floor = max(cell.rest, cell.reset) + LEAST_DRIVE
    shape = (n, len(scene.contacts))
    sites, probability, quantum = np.zeros(shape), np.zeros(shape), np.zeros(shape)
    highest = np.zeros(shape)
    for k, contact in enumerate(scene.contacts):
        release = study.inputs[contact.input].release
        drawn = draws.named(study.seed, n, f"release probability of {contact.input}")
        p = draws.lognormal(release.probability.mean, release.probability.cv, drawn)
        sites[:, k] = release.sites * contact.share
        probability[:, k] = np.clip(p, 1e-3, release.highest)
        highest[:, k], quantum[:, k] = release.highest, release.quantum
    made = Population(
        scene,
        load,
        np.maximum(threshold, floor) - cell.rest,
        1000.0 / (load + dendritic),
        draws.lognormal(
            1.0, study.compare.amplitude_cv, draws.named(study.seed, n, "amplitude of the rule")
        ),
        sites,
        probability,
        highest,
        quantum,
        _largest(study),
        {},
    )
    return _recruited(study, made)


def _largest(study: Study) -> float:
    """Return the conductance at which tables of EPSPs end, nS."""
    bundles = [
        release.sites * release.probability.mean * release.quantum
        for release in (it.release for it in study.inputs.values() if it.kind == "excitatory")
    ]
    return TABULATED * max(bundles, default=1.0)


def _recruited(study: Study, made: Population) -> Population:
    """Set the sites of every input with a ``baseline_epsp`` so that its EPSP meets the target."""
    scene, sites, short = made.scene, made.sites.copy(), {}
    wanted = {n: it.baseline_epsp for n, it in study.inputs.items() if it.baseline_epsp}
    if not wanted:
        return made
    reader = bare_reader(made)
    for name, epsp in wanted.items():
        score = draws.named(study.seed, study.cells, f"baseline EPSP of {name}")
        target = draws.lognormal(epsp.target, epsp.cv, score)
        reached, grid = _finer(reader, name)
        needed = np.array(
            [np.interp(t, *_rising(row, grid)) for t, row in zip(target, reached, strict=True)]
        )
        own = reader.own_contacts(name)
        neck = scene.contacts[own[0]].neck
        quantum = made.quantum[:, own[0]] / (1.0 + made.quantum[:, own[0]] * neck * 1e-3)
        count = np.rint(needed / (made.probability[:, own[0]] * quantum))
        most = min(MOST_RECRUITED * study.inputs[name].release.sites, draws.MOST_SITES)
        missed = (count > most) | (target > reached.max(axis=1))
        count = np.clip(count, 1, most)
        short[name] = int(missed.sum())
        for k, contact in enumerate(scene.contacts):
            if contact.input == name:
                sites[:, k] = count * contact.share
    return replace(made, sites=sites, short={k: v for k, v in short.items() if v})


def _finer(reader: Reader, name: str) -> tuple[Floats, Floats]:
    """Return an input's table of EPSPs (cell, point) between its nodes too, and its points (nS).

    A straight line from node to node would recruit up to one site too many.
    """
    grid = axis(reader.top, FINER * OWN_NODES)
    along = np.tile(position(grid, reader.top, OWN_NODES), (len(reader.loads), 1))
    return interpolate(reader.peaks(name)[:, None, :], along), grid


def _rising(row: Floats, grid: Floats) -> tuple[Floats, Floats]:
    """Return the rising part of an EPSP table, so that it can be inverted."""
    top = int(np.argmax(row)) + 1
    return np.maximum.accumulate(row[:top]), grid[:top]


def bare_reader(population: Population, chosen: slice = slice(None)) -> Reader:
    """Return a reader of some cells, with nothing happening."""
    scene = population.scene
    none = np.zeros(0)
    numbers = Numbers(none, none, none, none, none, none, none, 0.0)
    events = events_of(scene, {}, np.empty(0), pre_is="arrival")
    wiring = wire(scene, events, end=0.0, readings=np.empty(0), numbers=numbers, route=None)
    return Reader(scene, wiring, population.base(chosen), top=population.top)
