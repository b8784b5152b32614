"""What half the time step changes: measured as two runs would, judged by the cell in the middle."""

from __future__ import annotations

from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest
import xarray as xr

import plastic
from plastic.errors import StudyError
from plastic.study.half_step import (
    FINE,
    MOST_CELLS,
    ArmChange,
    Change,
    StepCheck,
    check_dt,
    counts_moved,
    spikes_moved,
)
from plastic.study.model import Study
from tests.study.small import study, text

#: sites as they are written down, so that no table of EPSPs decides on them
FIXED = (
    ('baseline_epsp = { target = "8 mV", cv = 0.1 }', ""),
    ('baseline_epsp = { target = "18 mV", cv = 0.1 }', ""),
    ('routes = ["quantal_size", "release_probability"]', 'routes = ["quantal_size"]'),
)
NOTHING = Change(0.0, 0.0)
STILL = ArmChange("r", "q", "p", NOTHING, NOTHING, NOTHING, 1.0, 0, 100, 0, 0.0)


def with_step(made: Study, dt: float) -> Study:
    """Return the study at another step, ms, unchecked."""
    return made.model_copy(update={"dt": dt})


@pytest.fixture(scope="module")
def small() -> Study:
    return study(*FIXED)


@pytest.fixture(scope="module")
def checked(small: Study) -> StepCheck:
    return check_dt(small)


@pytest.fixture(scope="module")
def runs(small: Study) -> tuple[xr.Dataset, xr.Dataset]:
    """The only arm at both steps, by the road of results."""
    found = [plastic.run(with_step(small, dt)) for dt in (small.dt, small.dt / 2)]
    whole, half = (one.isel(rule=0, route=0, protocol=0) for one in found)
    return whole, half


@pytest.mark.parametrize(
    ("of", "name"), [("factor", "factor"), ("epsp", "epsp_peak")], ids=["factor", "EPSP"]
)
def test_a_change_is_that_between_two_runs_in_percent_of_the_baseline(
    checked: StepCheck, runs: tuple[xr.Dataset, xr.Dataset], of: str, name: str
) -> None:
    """The baseline ends with the fifth reading; results hold seven digits."""
    whole, half = (one[name].transpose("cell", "input", "reading").values for one in runs)
    moved = 100 * np.nanmax(np.abs(half - whole) / whole[:, :, 4:5], axis=(1, 2))
    (arm,) = checked.arms
    found: Change = getattr(arm, of)
    assert found.largest == pytest.approx(moved.max(), abs=3e-5)
    assert found.middle == pytest.approx(np.median(moved), abs=3e-5)
    assert found.middle > 3e-3


def test_spikes_and_verdicts_are_those_of_the_two_runs(
    checked: StepCheck, runs: tuple[xr.Dataset, xr.Dataset]
) -> None:
    whole, half = runs
    (arm,) = checked.arms
    assert arm.spikes >= int(whole["spikes"].sum())  # before and after the induction too
    assert arm.came_or_went >= abs(int(half["spikes"].sum() - whole["spikes"].sum()))
    other = (whole["verdict"] != half["verdict"]) | (
        whole["verdict_induced"] != half["verdict_induced"]
    )
    assert arm.verdicts == int(other.sum())


def test_a_fifth_of_the_fastest_time_constant_is_fine(checked: StepCheck, small: Study) -> None:
    assert (checked.dt, checked.cells) == (small.dt, small.cells)
    assert checked.fine


def test_a_step_longer_than_a_synapse_is_not_fine(small: Study) -> None:
    """The control; no study with this step could be loaded."""
    coarse = check_dt(with_step(small, 5.0))
    assert not coarse.fine
    assert coarse.arms[0].epsp.middle > FINE


def test_quanta_do_not_depend_on_the_step(checked: StepCheck) -> None:
    """Other draws would change every EPSP and with it which volleys fire the cell."""
    (arm,) = checked.arms
    assert arm.spikes > 20
    assert arm.came_or_went <= 0.05 * arm.spikes


def test_a_file_is_checked_in_a_few_cells_and_nothing_is_kept(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    path = tmp_path / "many.toml"
    path.write_text(text(*FIXED, ("cells = 4", "cells = 30")))
    monkeypatch.chdir(tmp_path)
    steps: list[tuple[int, int]] = []
    found = check_dt(path, progress=lambda done, whole: steps.append((done, whole)))
    assert found.cells == MOST_CELLS
    assert steps == [(1, 1)]
    assert [one.name for one in tmp_path.iterdir()] == ["many.toml"]


def test_the_number_of_cells_may_be_chosen_and_is_checked(small: Study) -> None:
    assert check_dt(small, cells=2, workers=1).cells == 2
    with pytest.raises(StudyError, match="cells = 0: must be a whole number"):
        check_dt(small, cells=0)


# ---- spikes


@pytest.mark.parametrize(
    ("before", "after", "alone", "shift"),
    [
        ([], [], 0, 0.0),
        ([10.0, 20.0], [10.0, 20.0], 0, 0.0),
        ([10.0, 20.0], [10.3, 19.9], 0, 0.3),
        ([10.0, 20.0], [10.0], 1, 0.0),
        ([10.0], [10.0, 20.0], 1, 0.0),
        ([10.0], [], 1, 0.0),
        ([10.0], [13.0], 2, 0.0),  # 3 ms on: another spike
        ([10.0], [12.0], 0, 2.0),
    ],
)
def test_a_spike_comes_goes_or_shifts(
    before: list[float], after: list[float], alone: int, shift: float
) -> None:
    found = spikes_moved([np.array(before)], [np.array(after)])
    assert found == (alone, pytest.approx(shift))


def test_spikes_of_one_cell_are_not_those_of_another() -> None:
    one, none = np.array([10.0]), np.zeros(0)
    assert spikes_moved([one, none], [none, one])[0] == 2


# ---- the judgement


@pytest.mark.parametrize(
    ("change", "fine"),
    [
        ({}, True),
        ({"factor": Change(2.0, 50.0)}, True),  # one cell astray is told, not judged
        ({"factor": Change(2.01, 2.01)}, False),
        ({"epsp": Change(2.01, 2.01)}, False),
        ({"repeats": Change(1.0, 9.0)}, True),
        ({"repeats": Change(2.0, 2.0)}, False),
        ({"repeats": Change(2.0, 2.0), "repeats_allowed": 2.0}, True),
        ({"verdicts": 1}, False),
        ({"came_or_went": 1}, True),
        ({"came_or_went": 6}, False),
        ({"came_or_went": 6, "spikes": 120}, True),
        ({"shift": 1.9}, True),
    ],
)
def test_the_step_is_judged_by_the_cell_in_the_middle(
    change: dict[str, object], fine: bool
) -> None:
    arm = replace(STILL, **change)  # type: ignore[arg-type]
    assert arm.fine is fine
    assert StepCheck(0.1, 4, (STILL, arm)).fine is fine


def test_repeats_are_compared_in_cells_that_reach_it_at_both_steps() -> None:
    """Of two counts in four cells: 3 and 1 repeats later, one gained, one lost, two never."""
    early = {
        "repeats_to_criterion": np.array([10.0, np.inf, np.inf, np.nan]),
        "repeats_to_criterion_induced": np.array([8.0, 5.0, np.inf, np.nan]),
    }
    late = {
        "repeats_to_criterion": np.array([13.0, 40.0, np.inf, np.nan]),
        "repeats_to_criterion_induced": np.array([9.0, np.inf, np.inf, np.nan]),
    }
    assert counts_moved([early, late]) == (Change(2.0, 3.0), 9.0)


def test_a_change_leaves_out_cells_without_one() -> None:
    assert Change.of(np.array([1.0, np.nan, 3.0, 8.0])) == Change(3.0, 8.0)
    assert Change.of(np.array([np.nan])) == NOTHING
