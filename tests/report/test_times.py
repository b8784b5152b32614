import csv

import numpy as np
import pytest

from plastic.protocols._schedule import build
from plastic.report.times import protocol_grid, write_times
from plastic.study.file import parse_study
from tests.report.conftest import PROTOCOLS, STUDY


@pytest.fixture(scope="module")
def schedules():
    return parse_study(STUDY).schedules()


def test_one_repeat_is_shown_with_its_set_lags(schedules):
    grid = protocol_grid(schedules["bursts"], ["controls: unpaired"])
    assert grid.title == (
        "bursts: baseline 10 min; 60 repeats, one every 10 s; follow-up 30 min"
    )  # fmt: skip
    assert [list(row) for row in grid.rows] == [
        ["0", "far", "near +10, +20, +30"], ["10", "near", "-"], ["20", "near", "-"],
        ["30", "near", "-"],
    ]  # fmt: skip
    assert "t_post - t_pre" in grid.notes[0]
    assert "presynaptic spike to presynaptic spike of near" in grid.notes[0]
    assert grid.notes[1].startswith("test pulses: far ")
    assert grid.notes[-1] == "controls: unpaired"


def recorded(count):
    """A recording of an invented study, one event every 500 ms."""
    times = {"far": np.arange(0.0, 500.0 * count, 500.0)}
    return build("recorded", times, times=1, every=500.0 * count, baseline=0.0, follow_up=0.0,
                 test_times={}, partner=())  # fmt: skip


@pytest.mark.parametrize("count", [16, 1000])
def test_a_recording_does_not_flood_the_terminal(count):
    """The control: sixteen events are all shown."""
    rows = protocol_grid(recorded(count)).rows
    first, last = [row[0] for row in rows[:8]], [row[0] for row in rows[-8:]]
    assert first == [f"{500 * k:g}" for k in range(8)]
    assert last == [f"{500 * k:g}" for k in range(count - 8, count)]
    assert [row[0] for row in rows[8:-8]] == (["... 984 more"] if count == 1000 else [])


def test_a_shortened_protocol_says_how_many_events_there_are_and_where():
    note = protocol_grid(recorded(1000)).notes[-1]
    assert note == "1000 events in a repeat; the protocol's CSV file has them all"


def test_reversed_order_shows_the_mirrored_lags(schedules):
    grid = protocol_grid(schedules["bursts, reversed"])
    assert ["40", "far", "near -30, -20, -10"] in [list(row) for row in grid.rows]


def test_test_pulses_alone_have_no_events_in_a_repeat(schedules):
    assert protocol_grid(schedules["bursts, test pulses only"]).rows == []


def test_every_event_is_written_at_its_exact_time(schedules, tmp_path):
    paths = write_times(schedules, tmp_path / "protocols")
    assert len(paths) == len(PROTOCOLS)
    with (tmp_path / "protocols" / "bursts.csv").open(newline="") as file:
        rows = list(csv.DictReader(file))
    far = [float(row["time_ms"]) for row in rows if row["input"] == "far"]
    assert far == schedules["bursts"].times["far"].tolist()
    first = next(row for row in rows if row["repeat"] == "1")
    # baseline of 10 min, then the first repeat
    assert (first["time_ms"], first["set_lags_ms"]) == ("600000.0", "near 10 20 30")
