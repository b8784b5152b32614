"""Spikes of the cell in a log: when, in which repeats, how long after an input."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from plastic.engine.layout import Log
from plastic.protocols import Schedule

Floats = NDArray[np.float64]

#: ms after the last event of a repeat within which a spike still belongs to it
AFTERMATH = 50.0


def spike_times(log: Log, dt: float) -> list[Floats]:
    """Return the times of the spikes of every cell, ms; no more than the log has room for."""
    room = log.spike_step.shape[1]
    return [
        np.asarray(log.spike_step[c, : min(int(ended["spikes"]), room)] * dt, dtype=float)
        for c, ended in enumerate(log.ended)
    ]


def spikes_of_repeats(schedule: Schedule, log: Log, dt: float) -> tuple[Floats, Floats]:
    """Return the share of repeats with a spike of the cell, and its spikes during induction."""
    if not len(schedule.repeat_starts) or not schedule.pattern:
        return np.zeros(len(log.ended)), np.zeros(len(log.ended))
    span = max((float(t[-1]) for t in schedule.pattern.values() if len(t)), default=0.0)
    starts = schedule.repeat_starts
    fired, count = np.zeros(len(log.ended)), np.zeros(len(log.ended))
    for c, at in enumerate(spike_times(log, dt)):
        low = np.searchsorted(at, starts)
        high = np.searchsorted(at, starts + span + AFTERMATH)
        fired[c] = (high > low).mean()
        count[c] = ((at >= starts[0]) & (at < schedule.repeat_ends[-1])).sum()
    return fired, count


def first_lags(schedule: Schedule, log: Log, name: str, dt: float) -> Floats:
    """Return the median realised lag (ms), per cell: from the input's first event in a repeat.

    To the spike nearest to it, before or after; a repeat without one within twice `AFTERMATH` has
    no lag, and a cell has one when at least half of its repeats do.
    """
    own = schedule.pattern.get(name, np.zeros(0))
    lags = np.full(len(log.ended), np.nan)
    if not len(own) or not len(schedule.repeat_starts):
        return lags
    events = schedule.repeat_starts + own[0]
    for c, at in enumerate(spike_times(log, dt)):
        if not len(at):
            continue
        after = np.clip(np.searchsorted(at, events), 0, len(at) - 1)
        gaps = np.stack([at[np.maximum(after - 1, 0)], at[after]]) - events
        gap = gaps[np.argmin(np.abs(gaps), axis=0), np.arange(len(events))]
        near = gap[np.abs(gap) <= 2 * AFTERMATH]
        if 2 * len(near) >= len(events):
            lags[c] = np.median(near)
    return lags
