"""What a route does to the release of one invented input, as a rig would see it."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
from numpy.typing import NDArray

from plastic import measures
from plastic.measures import Readout
from plastic.routes import Mixture, Route
from tests.engine.readers import lands, reader_of, scene_of, state_at

Floats = NDArray[np.float64]


def responses(route: Route, factors: Sequence[float], **contact: float) -> dict[str, Floats]:
    """Return mean conductance (nS) and measures of release at each factor.

    20 sites, p = 0.4 of at most 0.9, q = 0.5 nS (cv 0.3); depression and facilitation; a second
    place that an added contact may take.
    """
    more = {"quantal_cv": 0.3, "recovery": 400.0, "facilitation": 60.0, **contact}
    scene = scene_of(lands("weak", 300.0, **more), lands("weak", 80.0, added=True, **more))
    reader = reader_of(scene, probability=0.4, highest=0.9, quantum=0.5)
    state = state_at(reader, Mixture.pure("it", route), factors)
    nothing = np.zeros((1, 1, len(factors)))
    readout = Readout(
        *[nothing] * 4,
        state.sites,
        state.probability,
        state.quantum,
        effect=np.ones((1, 2)),
        input_of=np.array([0, 0]),
        quantal_cv=np.full(2, more["quantal_cv"]),
        depletion=np.full(2, more["recovery"]),
        facilitation=np.full(2, more["facilitation"]),
        baseline=0,
    )
    names = ("inverse_cv2", "failure_rate", "paired_pulse_ratio")
    found = {name: measures.find(name).value(readout)[0, 0] for name in names}
    return {"mean": state.conductance([0, 1])[0], **found}
