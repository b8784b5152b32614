"""Recorded times as an induction."""

from __future__ import annotations

from pathlib import Path
from typing import Any

import numpy as np
import pytest
from pydantic import ValidationError

from plastic.protocols.spike_times import SpikeTimes


def recorded(folder: Path, **changed: Any) -> SpikeTimes:
    (folder / "far.csv").write_text("0.5\n1.25\n", encoding="utf-8")
    (folder / "cell.csv").write_text("0.51\n", encoding="utf-8")
    table = {"files": {"far": "far.csv", "injected": "cell.csv"}, "unit": "s", **changed}
    return SpikeTimes.model_validate(table, context={"base": folder})


def test_times_count_from_the_start_of_the_induction(tmp_path: Path) -> None:
    schedule = recorded(tmp_path, baseline="1 min").schedule("rec", learns=["far"])
    np.testing.assert_allclose(schedule.times["far"], [60_500, 61_250])
    np.testing.assert_allclose(schedule.injected, [60_510])


def test_a_recording_is_one_repeat_to_the_next_full_second(tmp_path: Path) -> None:
    it = recorded(tmp_path).induction()
    assert (it.times, it.every) == (1, 2000.0)


def test_an_event_at_a_full_second_is_still_inside_the_repeat(tmp_path: Path) -> None:
    it = recorded(tmp_path)
    (tmp_path / "far.csv").write_text("0.5\n2\n", encoding="utf-8")
    again = SpikeTimes.model_validate(
        {"files": {"far": "far.csv"}, "unit": "s"}, context={"base": tmp_path}
    )
    assert again.induction().every == 3000.0
    assert it.induction().every == 2000.0  # files are read once, when the protocol is made


def test_a_recording_may_be_replayed(tmp_path: Path) -> None:
    it = recorded(tmp_path, repeat={"times": 3, "every": "5 s"})
    assert len(it.schedule("rec").times["far"]) == 6


def test_a_replay_must_fit_into_its_repeat(tmp_path: Path) -> None:
    with pytest.raises(ValidationError, match=r"the last time, 1250 ms, must .*after 1000 ms"):
        recorded(tmp_path, repeat={"times": 3, "every": "1 s"})


def test_the_unit_is_declared_and_a_unit_of_time(tmp_path: Path) -> None:
    with pytest.raises(ValidationError, match="unit of time such as"):
        recorded(tmp_path, unit="mV")
    with pytest.raises(ValidationError, match="missing; the unit of the times"):
        SpikeTimes.model_validate({"files": {"far": "far.csv"}})


def test_injected_is_no_input(tmp_path: Path) -> None:
    assert recorded(tmp_path).named_inputs() == {("files", "far"): "far"}
