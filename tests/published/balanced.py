"""A leaky cell that excitatory and inhibitory Poisson inputs drive, one kind of which learns.

Invented numbers: with no learning it fires at about 15 Hz. The inhibitory conductance is shared by
any number of inputs.
"""

from __future__ import annotations

import numpy as np

from plastic import Rule, routes
from plastic.engine import layout
from plastic.engine.assembly import Contact, Receptor, Scene, empty_log, events_of, wire
from plastic.engine.kernel import Rows, module_for, numbers_of
from plastic.engine.layout import Cells, Floats, table
from plastic.membrane.tree import build_tree
from plastic.routes import Mixture
from tests.published.poisson import train

EXCITATORY = 60
RATE = 10.0  # Hz, of every input
QUANTUM, BRAKE = 1.1, 20.0  # nS, of one excitatory and of all inhibitory inputs
KIND = {"e": Receptor(0.0, 0.0, 5.0), "i": Receptor(-80.0, 0.0, 10.0)}


def outcome(
    rule: Rule, kind: str, *, seconds: float, inhibitory: int = 100, seed: int = 1
) -> tuple[Floats, Floats]:
    """Return the spikes (s) and the final factors when the inputs of `kind`, "e" or "i", learn."""
    draw, brakes = np.random.default_rng(seed), [f"i{k}" for k in range(inhibitory)]
    names = [f"e{k}" for k in range(EXCITATORY)] + brakes
    quantum = {"e": QUANTUM, "i": BRAKE / inhibitory}
    learners = [name for name in names if name[0] == kind]
    scene = Scene(
        tree=build_tree({}, [("soma", 0.0)], 1),
        rm=15_000.0,
        ri=150.0,
        tau_m=20.0,
        rest=-70.0,
        reset=-70.0,
        refractory=3.0,
        contacts=[Contact(name, 0, KIND[name[0]]) for name in names],
        learners=learners,
        inhibitory=brakes,
    )
    end = 1000.0 * seconds
    times = {name: np.unique(np.rint(train(RATE, end, draw) / 0.1)) * 0.1 for name in names}
    numbers, rule_type = numbers_of(rule), type(rule)
    wiring = wire(
        scene,
        events_of(scene, times, np.empty(0), pre_is=rule.pre_is),
        end=end,
        readings=np.array([end]),
        numbers=numbers,
        route=Mixture.pure("quantal_size", routes.find("quantal_size")(highest=1e3)),
        immediate=True,
    )
    cells = Cells(
        table(layout.CELL, number=np.zeros(1), load=10.0, threshold=15.0),
        table(
            layout.RELEASE,
            sites=np.ones((1, len(names))),
            probability=1.0,
            highest=1.0,
            quantum=[[quantum[name[0]] for name in names]],
        ),
        np.tile(numbers.high[None, :, None], (1, 1, len(learners))),
        numbers.parameters[None, :],
    )
    log = empty_log(cells, wiring, len(Rows.of(rule_type).inputs), 65536)
    done = module_for(rule_type).run_cells(wiring, cells, log, np.zeros(1, np.int64))
    assert done == 1
    spikes = log.spike_step[0, : int(log.ended["spikes"][0])] * 1e-4
    return spikes, log.factor[0, -1]
