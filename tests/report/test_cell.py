"""The tables of a cell sheet: every number of the sheet, for people."""

from __future__ import annotations

import math
from dataclasses import replace

import pytest

from plastic.analysis.cell_sheet import CellSheet, cell_sheet
from plastic.report.cell import (
    QUANTITIES,
    SIDE_BY_SIDE,
    accuracy_grids,
    cell_grids,
    contact_grids,
    inhibition_grid,
    number,
    percent,
    statement,
    summation_grid,
)
from plastic.report.grid import Grid
from tests.analysis.cells import bundle, full_sheet, lone_sheet, study


@pytest.fixture(scope="module")
def sheet() -> CellSheet:
    return full_sheet()


def row_of(grid: Grid, name: str, nth: int = 0) -> list[str]:
    """The entries of the nth row of a name, without it."""
    return [list(row[1:]) for row in grid.rows if row[0].strip() == name][nth]


def test_the_tables_come_in_order(sheet: CellSheet) -> None:
    assert [grid.title for grid in cell_grids(sheet)] == [
        "An invented cell: the nominal cell", "Inputs", "Inputs", "Summation at the soma",
        "Inhibition", "Accuracy of the simulation",
    ]  # fmt: skip


def test_contacts_stand_side_by_side_and_none_is_lost(sheet: CellSheet) -> None:
    grids = contact_grids(sheet.contacts)
    labels = [label for grid in grids for label in grid.columns[1:]]
    assert labels == [c.label for c in sheet.contacts]
    assert max(len(grid.columns) for grid in grids) == SIDE_BY_SIDE + 1
    assert all(len(grid.rows) == len(QUANTITIES) for grid in grids)


def test_the_numbers_are_those_of_the_sheet(sheet: CellSheet) -> None:
    grid, one = contact_grids(sheet.contacts)[0], sheet.contacts[0]
    for name, nth, value in (
        ("peak where it lands (mV)", 0, one.local.peak),
        ("peak at the soma (mV)", 0, one.soma.peak),
        ("half-width (ms)", 0, one.local.half_width),
        ("half-width (ms)", 1, one.soma.half_width),
        ("delay from peak to peak (ms)", 0, one.soma.time - one.local.time),
        ("attenuation of the peak", 0, one.local.peak / one.soma.peak),
        ("charge at the hillock (pC)", 0, one.arriving),
        ("in elementary charges", 1, one.arriving * 6.241509e6),
        ("ceiling at the soma (mV)", 0, one.ceiling),
        ("+20 % diameter (% of the peak)", 0, one.widening.whole),
    ):
        assert float(row_of(grid, name, nth)[0]) == pytest.approx(value, rel=6e-3)


def test_reasons_and_flags_stand_under_their_contacts(sheet: CellSheet) -> None:
    notes = [note for grid in contact_grids(sheet.contacts) for note in grid.notes]
    assert any(n.startswith("a, shaft 500 µm: +20 % diameter strengthens") for n in notes)
    assert any(n.startswith("a, shaft 500 µm: ! local EPSP of") for n in notes)
    assert not any(n.startswith("brake, soma: +20 %") for n in notes)
    for c in sheet.contacts:
        for flag in c.flags:
            assert f"{c.label}: ! {flag}" in notes


def test_the_sheet_of_a_lone_small_soma_says_that_widening_weakens_and_why() -> None:
    told = "\n".join(grid.plain() for grid in cell_grids(lone_sheet()))
    assert "a, shaft 500 µm: +20 % diameter weakens: shaft itself is 69 %" in told
    assert "draws more than a lower axial resistance brings" in told
    assert "G_soma R_axial + L coth L = 1.27" in told


def test_summation_says_who_reaches_threshold(sheet: CellSheet) -> None:
    grid = summation_grid(sheet)
    for c, row in zip(sheet.combinations, grid.rows, strict=True):
        found = dict(zip(grid.columns[:6], row[:6], strict=True))
        assert found["inputs"] == " + ".join(c.inputs)
        assert float(found["to threshold"]) == pytest.approx(15.0 - c.excited, abs=6e-3)
        assert found["fires"] == ("yes" if c.excited >= 15.0 else "no")
        assert row[9] == ("yes" if c.inhibited >= 15.0 else "no")
        assert (found["sublinear"] == "-") == (len(c.inputs) == 1)
    assert {row[5] for row in grid.rows} == {"yes", "no"}  # control: both occur


def test_without_inhibition_there_are_no_columns_for_it() -> None:
    plain = cell_sheet(study(bundle("a", 320.0, 2.0)))
    assert len(summation_grid(plain).columns) == 6
    assert "Inhibition" not in [grid.title for grid in cell_grids(plain)]


def test_inhibition_is_named_with_its_chloride_and_what_was_assumed(sheet: CellSheet) -> None:
    grid = inhibition_grid(sheet)
    assert [row[:3] for row in grid.rows] == [
        ["brake", "-75", "hyperpolarising"],
        ["shunt", "-65", "shunting"],
    ]
    assert [row[4] for row in grid.rows] == ["a", "-"]
    assert grid.notes[0].startswith("brake: E_inh = -75 mV implies 7.5 mM")
    assert "130 mM outside and 32 C are assumed" in grid.notes[-1]


def test_the_accuracy_is_stated_per_input_and_in_one_sentence(sheet: CellSheet) -> None:
    (grid,) = accuracy_grids(sheet)
    exact = sheet.accuracy
    first = row_of(grid, "peak at the soma (mV)")
    assert f"({float(exact.error('peak')[0]):+.2g} %)" in first[0]
    assert first[4] == "-"  # the shunt has no potential
    assert " ms)" in row_of(grid, "time to peak (ms)")[0]
    worst = max(abs(error) for error in exact.error("peak") if not math.isnan(error))
    assert f"the peaks at the soma are within {worst:.2g} %" in statement(sheet)
    assert statement(sheet) == grid.notes[0]
    assert "NOT converged" not in grid.plain()


def test_a_limit_that_is_not_reached_is_said_loudly(sheet: CellSheet) -> None:
    rough = replace(sheet, accuracy=replace(sheet.accuracy, change=0.01))
    assert accuracy_grids(rough)[0].notes[-1].startswith("! NOT converged")


@pytest.mark.parametrize(
    ("value", "shown"),
    [(0.0, "0"), (1.0, "1.00"), (12.345, "12.3"), (320.0, "320"), (1.47e7, "1.47e+07"),
     (-0.0123, "-0.0123"), (math.nan, "-"), (99.97, "100.")],
)  # fmt: skip
def test_numbers_have_three_digits(value: float, shown: str) -> None:
    assert number(value) == shown.rstrip(".")


@pytest.mark.parametrize(
    ("value", "shown"), [(12.34, "12.3 %"), (-1e-12, "0.0 %"), (-3.21, "-3.2 %"), (math.nan, "-")]
)
def test_percentages_never_show_a_negative_nothing(value: float, shown: str) -> None:
    assert percent(value) == shown
