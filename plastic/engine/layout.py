"""What the compiled engine is given and what it fills: few arrays, with named fields.

`Wiring` is shared by the cells of one arm, `Cells` has one row per cell, `Log` is filled. Times
are whole steps of ``dt``; voltages are mV relative to rest; conductances nS. Sites are the places
where learning inputs see the spikes of the cell; site 0 is the soma.
"""

from __future__ import annotations

from typing import Any, NamedTuple

import numpy as np
from numpy.typing import NDArray

Floats = NDArray[np.float64]
Ints = NDArray[np.int64]
Records = NDArray[Any]


def _fields(integers: str, floats: str) -> np.dtype[Any]:
    return np.dtype([(n, "i8") for n in integers.split()] + [(n, "f8") for n in floats.split()])


#: single numbers of an arm
PLAN = _fields(
    "seed n_steps n_nodes refractory tick window deterministic clocked",
    "dt rm ri tau_m reset bap_length bap_loss bap_recovery bap_floor",
)
#: a stretch of dendrite between two nodes; a child of -1 is a sealed stub; um
STRETCH = _fields("parent child widens", "length diameter")
#: receptors of one kind at one node; mean_ is the mean over a step of what decays over it
GROUP = _fields("", "reversal keep_decay keep_rise mean_decay mean_rise norm")
#: a node that has receptors, and the range of its groups
SLOT = _fields("node first last", "")
#: a contact; recovery and facilitation in ms (0: none), neck in Mohm
CONTACT = _fields("group learner added excites", "cv recovery facilitation neck")
#: where learning inputs see a spike of the cell; distance in um
SITE = _fields("delay", "distance")
#: an event; an injected spike has contact -1 and learner -1. There are millions: keep it small
EVENT = np.dtype([("step", "i8"), ("contact", "i4"), ("learner", "i4")])
#: one channel of a route; `exponent` is sign * share, `keep` the factor per tick
CHANNEL = _fields("target excess delay", "exponent lowest highest keep")
#: one cell: its own number (for its random draws), the load at its soma (nS), its threshold
CELL = _fields("number", "load threshold")
#: baseline release of one contact in one cell; quantum in nS
RELEASE = _fields("", "sites probability highest quantum")
#: what a run leaves of a cell; `fault` is 0, or 1 + the learner whose weight is no number
ENDED = _fields("spikes fault steps", "")


class Wiring(NamedTuple):
    """All that the cells of one arm share."""

    plan: Records  # (1,)
    stretches: Records
    beyond: Ints  # (stretch, contact) 1: the contact lies at or beyond the stretch
    eased: Ints  # (learner, contact) 1: an inhibitory contact that the learner drives
    groups: Records  # sorted by slot
    slots: Records
    contacts: Records
    sites: Records
    learner_site: Ints  # learning inputs are sorted by site
    site_first: Ints  # (site + 1,) range of learners at each site
    events: Records  # sorted by step, injected spikes first
    reading_step: Ints
    channels: Records
    taus_pre: Floats  # ms
    taus_post: Floats  # ms
    starts: Floats
    cell_starts: Floats
    low: Floats


class Cells(NamedTuple):
    """What differs between cells; every array has the cell first."""

    cells: Records
    release: Records  # (cell, contact)
    high: Floats  # (cell, weight, learner)
    parameters: Floats  # (cell, parameter)


class Log(NamedTuple):
    """What a run leaves; every array has the cell first."""

    variables: Floats  # (cell, reading, variable, learner)
    factor: Floats  # (cell, reading, learner)
    expressed: Floats  # (cell, reading, channel, learner)
    diameter: Floats  # (cell, reading, stretch) as a multiple
    cell_states: Floats  # (cell, reading, state)
    spike_step: Ints  # (cell, spike)
    ended: Records  # (cell,)


def table(dtype: np.dtype[Any], **columns: Any) -> Records:
    """Return a record array with the given columns; every field of `dtype` must be given."""
    if set(columns) != set(dtype.names or ()):
        raise ValueError(f"fields {sorted(columns)} are not those of {dtype.names}")
    shape = np.broadcast_shapes(*(np.shape(v) for v in columns.values()))
    made = np.zeros(shape, dtype)
    for name, value in columns.items():
        made[name] = value
    return made
