"""The workloads of the benchmarks, as the engine takes them: invented numbers, nothing measured.

W1: a point neuron with 1000 plastic inputs at 15 Hz and 200 inhibitory ones at 10 Hz, pair rule,
steps of 0.1 ms. W2: 60 pairings at 0.1 Hz on a two-compartment neuron with three inputs, almost
all of it silence.
"""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np

from plastic import routes
from plastic.engine import layout
from plastic.engine.assembly import (
    Contact,
    Drive,
    Receptor,
    Scene,
    empty_log,
    events_of,
    input_times,
    wire,
)
from plastic.engine.kernel import Rows, module_for, numbers_of
from plastic.engine.layout import Cells, Floats, Log, Records, Wiring, table
from plastic.membrane.tree import Dendrite, build_tree
from plastic.routes import Mixture
from plastic.rules import Rule

DT = 0.1  # ms
REST, LEAK, TAU = -70.0, 10.0, 20.0  # mV, nS, ms
THRESHOLD, RESET, REFRACTORY = 15.0, 3.0, 2.0  # mV over rest, ms

PLASTIC, INHIBITORY = 1000, 200
RATE, INHIBITORY_RATE = 15.0, 10.0  # Hz
QUANTUM, BRAKE_QUANTUM = 0.08, 0.35  # nS
EXCITATORY, BRAKE = Receptor(0.0, 0.0, 5.0), Receptor(-75.0, 0.0, 10.0)


@dataclass(frozen=True)
class Prepared:
    """A run that only has to be started: the arrays of the engine and the rule that is run."""

    rule: Rule
    wiring: Wiring
    cells: Cells

    def run(self) -> Log:
        """Run it and return its log."""
        kind, stop = type(self.rule), np.zeros(1, np.int64)
        log = empty_log(self.cells, self.wiring, len(Rows.of(kind).inputs), 65536)
        done = module_for(kind).run_cells(self.wiring, self.cells, log, stop)
        assert done == len(self.cells.cells)
        return log

    def clocked(self) -> Prepared:
        """Return the same run with every step taken and none jumped over."""
        plan = self.wiring.plan.copy()
        plan["clocked"] = 1
        return replace(self, wiring=self.wiring._replace(plan=plan))


def w1(rule: Rule, seconds: float, *, inputs: int = PLASTIC, seed: int = 1) -> Prepared:
    """Return W1 of a length, for a rule."""
    draw = np.random.default_rng(seed)
    learners, brakes = names("e", inputs), names("i", INHIBITORY)
    scene = Scene(
        tree=build_tree({}, [("soma", 0.0)], 1),
        contacts=[
            *(Contact(name, 0, EXCITATORY) for name in learners),
            *(Contact(name, 0, BRAKE) for name in brakes),
        ],
        learners=learners,
        inhibitory=brakes,
        **membrane(),
    )
    times = {name: poisson(RATE, seconds, draw) for name in learners}
    times |= {name: poisson(INHIBITORY_RATE, seconds, draw) for name in brakes}
    release = table(
        layout.RELEASE,
        sites=np.ones((1, inputs + INHIBITORY)),
        probability=1.0,
        highest=1.0,
        quantum=[[QUANTUM] * inputs + [BRAKE_QUANTUM] * INHIBITORY],
    )
    return prepared(rule, scene, times, seconds * 1000, release, load=LEAK)


def w2(rule: Rule, cells: int, *, pairings: int = 60) -> Prepared:
    """Return W2 in a number of cells: a weak input paired with a strong one that fires the cell."""
    dendrite = {"apical": Dendrite(300.0, 2.0)}
    tree = build_tree(dendrite, [("soma", 0.0), ("apical", 200.0)], 0)
    far, fast = tree.node_of["apical", 200.0], Receptor(0.0, 0.5, 3.0)
    scene = Scene(
        tree=tree,
        contacts=[
            Contact("weak", far, fast, quantal_cv=0.3),
            Contact("strong", 0, fast, quantal_cv=0.3),
            Contact("brake", 0, Receptor(-75.0, 0.5, 7.0), quantal_cv=0.3),
        ],
        learners=["weak"],
        inhibitory=["brake"],
        drives=[Drive("strong", "brake", 2.0)],
        **membrane(),
    )
    start = 1000.0 + 10_000.0 * np.arange(pairings)
    times = input_times(scene, {"weak": start, "strong": start + 10.0})
    release = table(
        layout.RELEASE,
        sites=np.tile([10.0, 40.0, 10.0], (cells, 1)),
        probability=0.5,
        highest=0.9,
        quantum=[[0.3, 1.5, 0.5]],
    )
    return prepared(rule, scene, times, 10_000.0 * pairings, release, load=8.0)


def names(letter: str, count: int) -> list[str]:
    """Return the names of a number of inputs."""
    return [f"{letter}{k}" for k in range(count)]


def poisson(rate: float, seconds: float, draw: np.random.Generator) -> Floats:
    """Return the spike times (ms) of one Poisson input, on distinct steps."""
    steps = draw.integers(0, round(seconds * 1000 / DT), draw.poisson(rate * seconds))
    return np.unique(steps) * DT


def membrane() -> dict[str, float]:
    """Return what all scenes share of the membrane and of spikes."""
    return {
        "rm": 15_000.0,
        "ri": 150.0,
        "tau_m": TAU,
        "rest": REST,
        "reset": REST + RESET,
        "refractory": REFRACTORY,
        "dt": DT,
    }


def prepared(
    rule: Rule,
    scene: Scene,
    times: dict[str, Floats],
    end: float,
    release: Records,
    *,
    load: float,
) -> Prepared:
    """Return a scene with its events and cells, for a rule that moves the quantum at once."""
    numbers, n = numbers_of(rule), len(release)
    wiring = wire(
        scene,
        events_of(scene, times, np.empty(0), pre_is=rule.pre_is),
        end=end,
        readings=np.array([0.0, end]),
        numbers=numbers,
        route=Mixture.pure("quantal_size", routes.find("quantal_size")()),
        immediate=True,
    )
    cells = Cells(
        table(layout.CELL, number=np.arange(n), load=load, threshold=THRESHOLD),
        release,
        np.tile(numbers.high[None, :, None], (n, 1, len(scene.learners))),
        np.tile(numbers.parameters, (n, 1)),
    )
    return Prepared(rule, wiring, cells)
