"""The figures of a cell sheet: readable on paper, in grey, and made of the numbers beside them."""

from __future__ import annotations

from dataclasses import replace
from pathlib import Path

import pytest
from matplotlib.figure import Figure

from plastic.analysis.cell_sheet import CellSheet, cell_sheet
from plastic.analysis.summation import Combination
from plastic.report.figures.cell import MARKS, MOST_LINES, cell_pictures, write_cell_figures
from plastic.report.figures.picture import write_rows
from plastic.report.figures.style import MM, SMALLEST, WIDTHS, line
from tests.analysis.cells import bundle, full_sheet, study
from tests.report.figures import looking

KINDS = ("cell_inputs", "cell_time_course", "cell_summation")
EVERY = [(name, width) for name in KINDS for width in WIDTHS]


@pytest.fixture(scope="module")
def sheet() -> CellSheet:
    return full_sheet()


@pytest.fixture(scope="module")
def figures(sheet: CellSheet) -> dict[tuple[str, int], Figure]:
    return {(p.name, width): p.figure(width) for p in cell_pictures(sheet) for width in WIDTHS}


@pytest.mark.parametrize(("name", "width"), EVERY)
def test_a_figure_is_readable_on_paper(
    figures: dict[tuple[str, int], Figure], name: str, width: int
) -> None:
    figure = figures[name, width]
    assert looking.outside(figure) == []
    assert looking.overlapping(figure) == []
    assert min(text.get_fontsize() for text in looking.texts_of(figure)) >= SMALLEST
    assert figure.get_size_inches()[0] / MM == pytest.approx(width)
    assert figure.get_size_inches()[1] / MM < 230


@pytest.mark.parametrize("name", KINDS)
def test_every_plotted_number_is_in_the_csv(
    sheet: CellSheet, figures: dict[tuple[str, int], Figure], name: str, tmp_path: Path
) -> None:
    (picture,) = [p for p in cell_pictures(sheet) if p.name == name]
    write_rows(tmp_path / "numbers.csv", picture.rows)
    by_rank = name != "cell_time_course"  # there y is a line of the figure, not a number
    values = looking.plotted_numbers(figures[name, 85], y=not by_rank)
    rules = {0.0, 1.0}  # ends of the lines that cross a panel
    missing = set(looking.missing(values, tmp_path / "numbers.csv").tolist()) - rules
    assert missing == set()
    assert len(values) > 10


def test_axes_say_quantity_and_unit(figures: dict[tuple[str, int], Figure]) -> None:
    said = {
        name: " ".join(text.get_text() for text in looking.texts_of(figures[name, 85]))
        for name in KINDS
    }
    assert "peak of the EPSP or IPSP (mV)" in said["cell_inputs"]
    assert "+20 % diameter: change at the soma (%)" in said["cell_inputs"]
    assert "time (ms)" in said["cell_time_course"]
    assert "potential from rest (mV)" in said["cell_time_course"]
    assert "peak at the soma, from rest (mV)" in said["cell_summation"]
    assert all("nominal cell" in words for words in said.values())


def test_marks_are_told_apart_without_colour() -> None:
    """Within a panel no two marks share marker and filling."""
    panels = (
        ("where it lands", "at the soma", "ceiling at the soma"),
        ("whole dendrite", "only on the path", "only beyond the contact"),
        ("linear sum", "inhibition blocked", "with inhibition"),
    )
    for marks in panels:
        assert len({(line(MARKS[m][0]).marker, MARKS[m][1]) for m in marks}) == len(marks)
    assert {m for marks in panels for m in marks} == set(MARKS)


def test_lines_are_told_apart_without_colour(figures: dict[tuple[str, int], Figure]) -> None:
    for axes in figures["cell_time_course", 85].axes:
        found = [pattern for pattern, _ in looking.looks(axes)]
        assert len(found) == len(set(found)) == 3


def test_what_does_not_apply_is_said(figures: dict[tuple[str, int], Figure]) -> None:
    told = [t.get_text() for t in figures["cell_inputs", 85].axes[1].texts]
    assert told == ["does not apply", "does not apply"]  # the soma, and a shunt


@pytest.mark.parametrize("width", WIDTHS)
def test_one_input_makes_readable_figures_too(width: int) -> None:
    for picture in cell_pictures(cell_sheet(study(bundle("a", 320.0, 2.0)))):
        figure = picture.figure(width)
        assert looking.outside(figure) == [], picture.name
        assert looking.overlapping(figure) == [], picture.name


def test_many_inputs_leave_their_pairs_to_the_table(sheet: CellSheet) -> None:
    names = [f"input_{k}" for k in range(12)]
    pairs = [(a, b) for i, a in enumerate(names) for b in names[i + 1 :]]
    chosen = [*((n,) for n in names), *pairs, tuple(names)]
    many = replace(
        sheet, combinations=[Combination(c, 5.0 * len(c), 4.0, 3.0, 15.0) for c in chosen]
    )
    assert len(chosen) > MOST_LINES
    (picture,) = [p for p in cell_pictures(many) if p.name == "cell_summation"]
    assert len({row["line"] for row in picture.rows}) == 13
    for width in WIDTHS:
        figure = picture.figure(width)
        assert looking.outside(figure) == []
        assert looking.overlapping(figure) == []
        assert figure.get_size_inches()[1] / MM < 230
        assert "pairs are in the table" in " ".join(t.get_text() for t in figure.texts).replace(
            "\n", " "
        )


def test_everything_is_written(sheet: CellSheet, tmp_path: Path) -> None:
    paths = write_cell_figures(sheet, tmp_path / "new" / "folder")
    assert sorted(p.name for p in paths) == sorted(
        [f"{kind}.csv" for kind in KINDS]
        + [f"{kind}-{w}mm.{end}" for kind in KINDS for w in WIDTHS for end in ("png", "svg")]
    )
    assert all(p.stat().st_size > 0 for p in paths)
