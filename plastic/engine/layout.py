"""What the compiled engine is given and what it fills: plain arrays, named.

`Wiring` is shared by the cells of one arm, `Cells` has one row per cell, `Log` is filled. Times
are whole steps of ``dt``; voltages are relative to rest; conductances are nS. Sites are the places
where learning inputs see the spikes of the cell; site 0 is the soma.
"""

from __future__ import annotations

from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

F = NDArray[np.float64]
I = NDArray[np.int64]  # noqa: E741 - the letter is the type's own


class Wiring(NamedTuple):
    """All that the cells of one arm share."""

    seed: int
    dt: float  # ms
    n_steps: int
    deterministic: int  # 1: every release is its mean
    clocked: int  # 1: never jump over quiet stretches
    # geometry: stretches of dendrite between nodes; a child of -1 is a sealed stub
    n_nodes: int
    stretch_parent: I
    stretch_child: I
    stretch_length: F  # um
    stretch_diameter: F  # um
    rm: float  # ohm cm^2
    ri: float  # ohm cm
    tau_m: float  # ms
    # spikes at the soma
    reset: float  # mV, relative to rest
    refractory: int  # steps
    # receptors, grouped by node, kinetics and reversal
    group_node: I
    group_reversal: F  # mV, relative to rest
    group_keep_decay: F  # factor per step
    group_keep_rise: F  # factor per step, 0 for a single exponential
    group_norm: F
    # contacts
    contact_group: I
    contact_learner: I  # learning input, or -1
    contact_added: I  # 1: exists only by the route added_contact
    contact_excites: I
    contact_cv: F  # quantal CV
    contact_recovery: F  # ms, 0: no depletion
    contact_facilitation: F  # ms, 0: none
    contact_neck: F  # Mohm
    contact_beyond: I  # (stretch, contact) 1: the contact lies at or beyond the stretch
    # learning inputs, sorted by site
    learner_site: I
    site_first: I  # (site + 1,) range of learners at each site
    site_delay: I  # steps
    site_distance: F  # um
    # back-propagated spike
    bap_length: F  # (4,) length constant um, loss per spike, recovery ms, floor
    # events, sorted by step; an injected spike has contact -1 and learner -1
    event_step: I
    event_contact: I
    event_learner: I
    event_ordinal: I
    reading_step: I
    # route channels
    channel_target: I
    channel_excess: I
    channel_exponent: F  # sign * share
    channel_lowest: F
    channel_highest: F
    channel_delay: I  # ticks
    channel_keep: F  # factor per tick
    tick: int  # steps; 0: expression is immediate
    stretch_widens: I
    # rule
    taus_pre: F  # ms
    taus_post: F
    starts: F
    cell_starts: F
    low: F
    window: int  # steps


class Cells(NamedTuple):
    """What differs between cells; every array has the cell first."""

    number: I  # the cell's own number, for its random draws
    load: F  # nS, soma and the rest of the cell
    threshold: F  # mV, relative to rest
    sites: F  # (cell, contact)
    probability: F
    probability_highest: F
    quantum: F  # nS
    high: F  # (cell, weight, learner)
    parameters: F  # (cell, parameter)


class Log(NamedTuple):
    """What a run leaves; every array has the cell first."""

    variables: F  # (cell, reading, variable, learner)
    factor: F  # (cell, reading, learner)
    expressed: F  # (cell, reading, channel, learner)
    diameter: F  # (cell, reading, stretch) multiple
    cell_states: F  # (cell, reading, state)
    spike_step: I  # (cell, spike)
    spike_count: I  # (cell,)
    releases: F  # (cell, contact) total conductance released, nS
    fault: I  # (cell,) 0, or 1 + learner whose weight is no number
    steps: I  # (cell,) membrane steps taken, jumps not counted
