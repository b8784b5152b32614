"""Spikes of a log: their times, the repeats they belong to, their lags."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
import pytest

from plastic.engine import layout
from plastic.engine.layout import Log
from plastic.protocols import Schedule
from plastic.protocols._schedule import build
from plastic.study.firing import AFTERMATH, first_lags, spike_times, spikes_of_repeats

DT = 0.1


def logged(*spikes: Sequence[float], room: int = 64) -> Log:
    """Return a log whose cells have spikes at the given times, ms."""
    steps = np.zeros((len(spikes), room), dtype=np.int64)
    for c, times in enumerate(spikes):
        steps[c, : len(times)] = np.rint(np.array(times) / DT)
    ended = np.zeros(len(spikes), layout.ENDED)
    ended["spikes"] = [len(t) for t in spikes]
    rest = {name: np.zeros(0) for name in Log._fields}
    return Log(**{**rest, "spike_step": steps, "ended": ended})


def repeated(times: int) -> Schedule:
    """Return volleys at 0 and 30 ms of a repeat, once a second from 1 s on."""
    return build(
        "pairs", {"upper": [0.0], "lower": [10.0, 30.0]}, times=times, every=1000.0,
        baseline=1000.0, follow_up=1000.0, test_times={}, partner=("lower",),
    )  # fmt: skip


@pytest.mark.parametrize(
    ("spikes", "share", "count"),
    [
        ([], 0.0, 0),
        ([1010.0, 2010.0], 1.0, 2),
        ([1010.0], 0.5, 1),
        ([1010.0, 1012.0, 1014.0], 0.5, 3),
        ([1000.0 + 30.0 + AFTERMATH - 1], 0.5, 1),
        ([1000.0 + 30.0 + AFTERMATH + 1], 0.0, 1),  # too late to belong to the repeat
        ([999.0, 2999.0, 3001.0], 0.0, 1),  # before, within, after the induction
    ],
)
def test_a_repeat_has_a_spike_when_one_falls_on_its_pattern_or_just_after(
    spikes: list[float], share: float, count: int
) -> None:
    fired, number = spikes_of_repeats(repeated(2), logged(spikes), DT)
    assert (fired[0], number[0]) == (share, count)


def test_cells_are_counted_apart_and_a_full_log_is_no_error() -> None:
    full = logged([1010.0], [2010.0, 2011.0, 2500.0], room=3)
    full.ended["spikes"][1] = 9
    fired, number = spikes_of_repeats(repeated(2), full, DT)
    assert fired.tolist() == [0.5, 0.5]
    assert number.tolist() == [1.0, 3.0]


def test_without_a_pattern_no_repeat_has_a_spike() -> None:
    silent = build(
        "rest", {}, times=2, every=1000.0, baseline=0.0, follow_up=0.0, test_times={}
    )  # fmt: skip
    assert spikes_of_repeats(silent, logged([10.0]), DT)[0].tolist() == [0.0]


def test_times_are_in_ms_and_end_where_the_log_is_full() -> None:
    full = logged([10.0, 20.0], [], [5.0, 6.0, 7.0], room=3)
    full.ended["spikes"][2] = 9
    found = spike_times(full, DT)
    assert [list(times) for times in found] == [
        pytest.approx([10.0, 20.0]), [], pytest.approx([5.0, 6.0, 7.0])
    ]  # fmt: skip


def test_a_lag_runs_from_the_first_event_of_a_repeat_to_the_next_spike() -> None:
    """Volleys of the upper input at 1000 and 2000 ms; spikes 12 and 14 ms later."""
    lags = first_lags(repeated(2), logged([1012.0, 1040.0, 2014.0], []), "upper", DT)
    assert lags[0] == pytest.approx(13.0)
    assert np.isnan(lags[1])
