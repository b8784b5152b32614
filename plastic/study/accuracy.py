"""How far the simulated EPSPs of a study's cell are from those of the same cell cut ever finer.

Steady voltages of the reduced cell are exact however it is cut; transients are not. So the nominal
cell is cut finer (its sealed ends too), with a fine step of time, and twice as fine again until no
somatic peak moves by more than `CONVERGED`. What the simulation makes of the study's own cell, at
the study's own step, is compared with that limit.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, replace
from math import ceil

import numpy as np

from plastic.engine.assembly import Scene
from plastic.engine.layout import Floats, Wiring
from plastic.engine.plain import Membrane
from plastic.engine.readings import EPSP_LENGTH
from plastic.engine.traces import Opening, shape, traces
from plastic.membrane.cable import build_tree
from plastic.study.model import Study
from plastic.study.nominal import mean_conductance, nominal
from plastic.study.population import Population, bare_reader

#: relative change of a somatic peak below which a finer cell is the limit; the error falls four
#: times per doubling, so a third of the last change is left
CONVERGED = 2.5e-4
#: nodes beyond which no finer cell is tried
MOST_NODES = 300
#: steps per fastest time constant in the limit, and the shortest step (ms) unless the study's is
STEPS, SHORTEST = 10.0, 0.02
#: what is compared -> its unit
ERRORS: Mapping[str, str] = {
    "peak": "percent",
    "time_to_peak": "ms",
    "half_width": "percent",
    "attenuation": "percent",
    "local_peak": "percent",
}


@dataclass(frozen=True)
class Limit:
    """A cell cut so finely that cutting it finer changes nothing.

    Attributes
    ----------
    scene : Scene
        Its nodes, and a fine step.
    refine : int
        Extra nodes per stretch.
    change : float
        Largest relative change of a somatic peak from the cell half as fine.
    values : mapping of name to array, shape (input,)
        The keys of `ERRORS`: mV, ms, ms, local over somatic peak, mV.
    """

    scene: Scene
    refine: int
    change: float
    values: Mapping[str, Floats]


@dataclass(frozen=True)
class Accuracy:
    """Errors of the simulated cell, per input: its value minus the limit.

    An input is stimulated alone, at its mean release, without what it drives; the local EPSP is
    that at its first contact. NaN where it has no EPSP (a shunt that reverses at rest).

    Attributes
    ----------
    inputs : tuple of str
    simulated, limit : mapping of name to array, shape (input,)
        As in `Limit`.
    refine, change
        As in `Limit`.
    """

    inputs: tuple[str, ...]
    simulated: Mapping[str, Floats]
    limit: Mapping[str, Floats]
    refine: int
    change: float

    @property
    def converged(self) -> bool:
        """Whether the limit was reached before the cell had more than `MOST_NODES` nodes."""
        return self.change < CONVERGED

    def error(self, name: str) -> Floats:
        """Return the error of a key of `ERRORS`, (input,): in percent of the limit, or in ms."""
        mine, true = self.simulated[name], self.limit[name]
        return mine - true if ERRORS[name] == "ms" else 100 * (mine / true - 1)

    def attributes(self) -> dict[str, object]:
        """Return the errors as attributes of a results file, four digits each."""
        found: dict[str, object] = {"accuracy_inputs": ", ".join(self.inputs)}
        for name, unit in ERRORS.items():
            rounded = [float(f"{value:.4g}") for value in self.error(name)]
            found[f"accuracy_{name}_{unit}"] = np.array(rounded)
        found["accuracy_limit_refine"] = self.refine
        found["accuracy_limit_change_percent"] = float(f"{100 * self.change:.4g}")
        return found


def accuracy_of(
    study: Study, cell: Population | None = None, limit: Limit | None = None
) -> Accuracy:
    """Return the errors of a study's nominal cell.

    Parameters
    ----------
    study : Study
    cell, limit : optional
        Its nominal cell and the limit of it, when they are there already.
    """
    one = nominal(study) if cell is None else cell
    true = limit_of(study, one) if limit is None else limit
    wiring, load = bare_reader(one).wiring, float(one.load[0])
    stimuli = [own_openings(one, name) for name in one.scene.inputs]
    seen = [_simulated(one.scene, wiring, load, stimulus) for stimulus in stimuli]
    own = _values(seen, one.scene.dt)
    return Accuracy(tuple(one.scene.inputs), own, true.values, true.refine, true.change)


def limit_of(study: Study, cell: Population) -> Limit:
    """Return the limit of a study's nominal cell."""
    load = float(cell.load[0])
    stimuli = [own_openings(cell, name) for name in cell.scene.inputs]

    def read(refine: int) -> tuple[Scene, dict[str, Floats]]:
        scene = _cut(study, cell.scene, refine)
        return scene, _values(_fine(scene, load, stimuli), scene.dt)

    refine, change = max(study.cell.refine, 1), np.inf
    scene, values = read(refine)
    while change >= CONVERGED and 2 * scene.tree.n_nodes <= MOST_NODES:
        refine, before = 2 * refine + 1, values["peak"]
        scene, values = read(refine)
        moved = np.abs(values["peak"] / before - 1)
        change = float(np.max(moved[np.isfinite(moved)], initial=0.0))
    return Limit(scene, refine, change, values)


def _cut(study: Study, scene: Scene, refine: int) -> Scene:
    """Return the scene with every stretch cut into ``refine + 1``, and with a fine step."""
    old, dendrites = scene.tree, study.cell.dendrite
    places = [(old.node_dendrite[k.node], float(old.node_distance[k.node])) for k in scene.contacts]
    tips = [(name, dendrite.length) for name, dendrite in dendrites.items()]
    tree = build_tree(dendrites, [*places, *tips], refine)
    contacts = [
        replace(contact, node=tree.node_of[place])
        for contact, place in zip(scene.contacts, places, strict=True)
    ]
    times = [tau for k in contacts for tau in (k.receptor.rise, k.receptor.decay) if tau > 0]
    wanted = max(min([*times, scene.tau_m]) / STEPS, SHORTEST)
    # a whole part of the study's step, so that what opens at one of its steps opens at one of these
    return replace(scene, tree=tree, contacts=contacts, dt=scene.dt / ceil(scene.dt / wanted))


def own_openings(cell: Population, name: str) -> list[Opening]:
    """Return what one stimulus of an input opens by itself, at its mean release."""
    scene, conductance = cell.scene, mean_conductance(cell)
    own = [k for k, c in enumerate(scene.contacts) if c.input == name and not c.added]
    steps = [round(scene.contacts[k].delay / scene.dt) for k in own]
    first = min(steps)
    return [
        Opening(k, (step - first) * scene.dt, float(conductance[k]))
        for k, step in zip(own, steps, strict=True)
    ]


def _values(seen: Sequence[tuple[Floats, Floats]], dt: float) -> dict[str, Floats]:
    """Return every quantity of `ERRORS` from the voltages of soma and contact, per input."""
    soma = [shape(at_soma, dt) for at_soma, _ in seen]
    local = np.array([shape(there, dt).peak for _, there in seen])
    peak = np.array([one.peak if one.peak != 0 else np.nan for one in soma])
    return {
        "peak": peak,
        "time_to_peak": np.array([one.time for one in soma]),
        "half_width": np.array([one.half_width for one in soma]),
        "attenuation": local / peak,
        "local_peak": np.where(np.isfinite(peak), local, np.nan),
    }


def _fine(
    scene: Scene, load: float, stimuli: Sequence[Sequence[Opening]]
) -> list[tuple[Floats, Floats]]:
    nodes = [scene.contacts[openings[0].contact].node for openings in stimuli]
    seen = traces(scene, load, stimuli, length=EPSP_LENGTH, record=[0, *nodes]).voltage
    return [(seen[i, 0], seen[i, i + 1]) for i in range(len(stimuli))]


def _simulated(
    scene: Scene, wiring: Wiring, load: float, openings: Sequence[Opening]
) -> tuple[Floats, Floats]:
    """Return what the simulation makes of it, until half of the EPSP at the soma is over."""
    membrane = Membrane(wiring, load)
    node = scene.contacts[openings[0].contact].node
    due: dict[int, list[Opening]] = {}
    for o in openings:
        due.setdefault(round(o.time / scene.dt), []).append(o)
    seen: list[tuple[float, float]] = []
    top = 0.0
    for step in range(round(EPSP_LENGTH / scene.dt)):
        seen.append((float(membrane.v[0]), float(membrane.v[node])))
        top = max(top, abs(seen[-1][0]))
        if step > max(due) + 50 and abs(seen[-1][0]) < 0.4 * top:
            break
        for o in due.get(step, ()):
            membrane.open(int(wiring.contacts["group"][o.contact]), o.peak)
        membrane.step()
    at = np.array(seen)
    return at[:, 0], at[:, 1]
