import csv

import pytest

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
