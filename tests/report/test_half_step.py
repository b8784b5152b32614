"""The table of half the time step, and its sentence."""

from __future__ import annotations

from dataclasses import replace

import pytest

from plastic.report.half_step import sentence, step_grid
from plastic.study.half_step import ArmChange, Change, StepCheck

CALM = ArmChange(
    "pair", "quantum", "bursts", Change(0.12, 0.4), Change(0.034, 0.05), Change(0, 1), 1.0,
    verdicts=0, spikes=2000, came_or_went=3, shift=0.3,
)  # fmt: skip


def check(*arms: ArmChange) -> StepCheck:
    return StepCheck(0.1, 10, arms)


def test_every_arm_has_a_row_with_the_middle_and_the_largest() -> None:
    grid = step_grid(check(CALM, replace(CALM, route="sites")))
    assert grid.title == "Half the time step: 0.05 instead of 0.1 ms, in 10 simulated cells"
    assert [row[1] for row in grid.rows] == ["quantum", "sites"]
    assert list(grid.rows[0]) == [
        "pair", "quantum", "bursts", "0.12 (0.4)", "0.034 (0.05)", "0 (1)", "0", "2000", "3", "0.3",
    ]  # fmt: skip
    assert grid.notes[-1].startswith("dt = 0.1 ms is fine")


def test_a_fine_step_is_told_with_its_figures() -> None:
    other = replace(CALM, factor=Change(0.5, 0.6), came_or_went=0)
    assert sentence(check(CALM, other)) == (
        "dt = 0.1 ms is fine: in the cell in the middle half of it changes no factor by more than "
        "0.5 % and no EPSP by more than 0.034 % of the baseline; 3 of 4000 spikes came or went"
    )
    assert "none of 2000 spikes" in sentence(check(other))


def test_a_single_cell_that_went_astray_is_told() -> None:
    told = sentence(check(CALM, replace(CALM, route="neck", factor=Change(0.1, 11.0))))
    assert told.startswith("dt = 0.1 ms is fine")
    assert told.endswith("a factor by up to 11 % (pair / neck / bursts)")


@pytest.mark.parametrize(
    ("change", "why"),
    [
        ({"factor": Change(2.5, 3.0)}, "factor 2.5 %"),
        ({"epsp": Change(2.4, 2.4)}, "EPSP 2.4 %"),
        ({"repeats": Change(7.0, 7.0)}, "7 repeats"),
        ({"verdicts": 2}, "another verdict in 2 of the cells"),
        ({"came_or_went": 160}, "160 of 2000 spikes came or went"),
        ({"verdicts": 1, "factor": Change(3, 3)}, "factor 3 %, another verdict in 1 of the cells"),
    ],
)
def test_a_step_that_is_too_long_is_told_with_the_arm_and_the_reason(
    change: dict[str, object], why: str
) -> None:
    bad = replace(CALM, route="neck", **change)  # type: ignore[arg-type]
    assert sentence(check(CALM, bad)) == (
        "! dt = 0.1 ms may be too long for 1 of 2 arms; take half and check again: "
        f"pair / neck / bursts: {why}"
    )
