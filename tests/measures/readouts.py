"""What readings saw, invented: an input of two contacts, one of one, and a contact of neither."""

from __future__ import annotations

from dataclasses import replace
from typing import Any

import numpy as np
from numpy.typing import NDArray

from plastic.measures import Readout

Floats = NDArray[np.float64]

CELLS, READINGS = 3, 4
#: the input of each contact; -1 is none of those that are read
INPUT_OF = (0, 0, 1, -1)


def invented(seed: int = 1) -> Readout:
    """Return a readout with every number drawn within what it may be, release never certain."""
    rng = np.random.default_rng(seed)

    def draw(low: float, high: float, *shape: int) -> Floats:
        return rng.uniform(low, high, shape)

    inputs, contacts = (CELLS, 2, READINGS), (CELLS, len(INPUT_OF), READINGS)
    return Readout(
        peak=draw(1, 20, *inputs),
        rise=draw(0.5, 5, *inputs),
        half_width=draw(5, 40, *inputs),
        fires=draw(0, 1, *inputs),
        sites=draw(0.5, 60, *contacts),
        probability=draw(0.05, 0.95, *contacts),
        quantum=draw(0.1, 1, *contacts),
        effect=draw(0.1, 2, CELLS, len(INPUT_OF)),
        input_of=np.array(INPUT_OF),
        quantal_cv=draw(0.1, 0.6, len(INPUT_OF)),
        depletion=draw(50, 900, len(INPUT_OF)),
        facilitation=draw(20, 500, len(INPUT_OF)),
        baseline=1,
    )


def single(**changes: Any) -> Readout:
    """Return one input with one contact in one cell; lists are readings, numbers are constant.

    30 sites, p = 0.4, q = 0.5 nS with cv 0.3, 1.5 mV/nS, 800 ms of depletion, no facilitation.
    """
    moving = {"sites": 30.0, "probability": 0.4, "quantum": 0.5}
    moving |= {"peak": 8.0, "rise": 1.0, "half_width": 20.0, "fires": 0.5}
    fixed = {"quantal_cv": 0.3, "depletion": 800.0, "facilitation": 0.0}
    length = max(np.size(changes.get(name, 0.0)) for name in moving)
    values: dict[str, Any] = {
        name: np.broadcast_to(np.asarray(changes.pop(name, value), float), (1, 1, length)).copy()
        for name, value in moving.items()
    }
    values |= {name: np.array([changes.pop(name, value)]) for name, value in fixed.items()}
    values["effect"] = np.array([[changes.pop("effect", 1.5)]])
    made = Readout(**values, input_of=np.array([0]), baseline=0)
    return replace(made, **changes)


def paired(first: Readout, second: Readout) -> Readout:
    """Return one input whose contacts are those of two `single` readouts."""
    both = {
        name: np.concatenate([getattr(first, name), getattr(second, name)], axis=1)
        for name in ("sites", "probability", "quantum", "effect")
    }
    both |= {
        name: np.concatenate([getattr(first, name), getattr(second, name)])
        for name in ("quantal_cv", "depletion", "facilitation")
    }
    return replace(first, **both, input_of=np.array([0, 0]))


def drawn(readout: Readout, trials: int, seed: int = 3) -> Floats:
    """Return responses (mV) of the first input in the first cell, drawn with numpy.

    Every contact releases a binomial number of Gaussian quanta, a fractional site by chance.
    """
    rng, total = np.random.default_rng(seed), np.zeros(trials)
    for k in np.flatnonzero(readout.input_of == 0):
        sites, p = readout.sites[0, k, 0], readout.probability[0, k, 0]
        whole = int(sites)
        count = rng.binomial(whole, p, trials) + (rng.random(trials) < (sites - whole) * p)
        noise = readout.quantal_cv[k] * np.sqrt(count) * rng.standard_normal(trials)
        total += readout.effect[0, k] * readout.quantum[0, k, 0] * (count + noise)
    return total
