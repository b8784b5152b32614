"""Every figure at both widths: readable on paper, in grey, and made of the numbers beside it."""

import pytest

from plastic.report.figures import pictures_of, write_figures
from plastic.report.figures.picture import Picture, write_rows
from plastic.report.figures.style import MM, SMALLEST, WIDTHS, canvas
from tests.report.figures import looking

KINDS = (
    "matrix-bursts", "learning_curve_induced-bursts", "learning_curve_expressed-bursts",
    "learning_curve_epsp-bursts", "time_course-bursts", "controls-bursts", "before_after-bursts",
    "lag_window", "rate_dependence",
)  # fmt: skip
EVERY = [(name, width) for name in KINDS for width in WIDTHS]


@pytest.fixture(scope="module")
def pictures(bursts):
    return {picture.name: picture for picture in pictures_of(bursts)}


@pytest.fixture(scope="module")
def figures(pictures):
    return {(name, width): pictures[name].figure(width) for name, width in EVERY}


def test_there_is_each_figure_and_no_other(pictures):
    assert sorted(pictures) == sorted(KINDS)


@pytest.mark.parametrize(("name", "width"), EVERY)
def test_no_text_is_smaller_than_a_journal_allows(figures, name, width):
    sizes = [text.get_fontsize() for text in looking.texts_of(figures[name, width])]
    assert len(sizes) > 10
    assert min(sizes) >= SMALLEST


@pytest.mark.parametrize(("name", "width"), EVERY)
def test_no_text_leaves_the_canvas(figures, name, width):
    assert looking.outside(figures[name, width]) == []


@pytest.mark.parametrize(("name", "width"), EVERY)
def test_no_text_covers_another(figures, name, width):
    assert looking.overlapping(figures[name, width]) == []


@pytest.mark.parametrize(("name", "width"), EVERY)
def test_a_figure_fits_on_a_page(figures, name, width):
    inches = figures[name, width].get_size_inches()
    assert inches[0] / MM == pytest.approx(width)
    assert inches[1] / MM < 230  # mm; the height of a journal page, common practice


@pytest.mark.parametrize("name", KINDS)
def test_every_plotted_number_is_in_the_csv(pictures, figures, name, tmp_path):
    write_rows(tmp_path / "numbers.csv", pictures[name].rows)
    by_rank = name.startswith(("before_after", "matrix"))  # there y is a place, not a number
    values = looking.plotted_numbers(figures[name, 85], y=not by_rank)
    assert looking.missing(values, tmp_path / "numbers.csv").tolist() == []
    if not name.startswith("matrix"):
        assert len(values) > 20


@pytest.mark.parametrize("name", [k for k in KINDS if not k.startswith(("matrix", "lag"))])
def test_lines_are_told_apart_without_colour(figures, name):
    for axes in figures[name, 85].axes:
        found = looking.looks(axes)
        assert len(set(found)) == len({line.get_label() for line in named(axes)})


def named(axes):
    return [line for line in axes.get_lines() if not line.get_label().startswith("_")]


def test_axes_say_quantity_and_unit(figures):
    said = {name: " ".join(t.get_text() for t in figures[name, 85].texts) for name in KINDS}
    assert "time from the start of the induction (min)" in said["time_course-bursts"]
    assert "EPSP of far (% of baseline)" in said["controls-bursts"]
    assert "EPSP of far at the soma (mV)" in said["learning_curve_epsp-bursts"]
    assert "lag, t_post − t_pre (ms)" in said["lag_window"]
    assert "rate of pairs (Hz)" in said["rate_dependence"]
    assert "12 simulated cells" in said["time_course-bursts"]
    assert not any(" n " in words or "n =" in words for words in said.values())


def test_writing_tells_its_progress_and_names_files_safely(bursts, tmp_path, monkeypatch):
    few = [Picture("matrix-a, b/c", [{"x": 1.0}], lambda rows, width: empty(width))]
    monkeypatch.setattr("plastic.report.figures.pictures_of", lambda dataset: few)
    steps = []
    paths = write_figures(bursts, tmp_path / "new", progress=lambda *s: steps.append(s))
    assert steps == [(1, 1)]
    assert {path.parent for path in paths} == {tmp_path / "new"}
    assert (tmp_path / "new" / "matrix-a_b_c.csv").read_text() == "x\n1.0\n"


def empty(width):
    return canvas(width, 20)


@pytest.mark.parametrize("width", WIDTHS)
def test_one_rule_and_one_route_make_readable_figures_too(bursts, width):
    one = bursts.isel(rule=[1], route=[0])
    found = pictures_of(one)
    assert len(found) == len(KINDS)
    for picture in found:
        figure = picture.figure(width)
        assert looking.outside(figure) == [], picture.name
        assert looking.overlapping(figure) == [], picture.name


def test_the_checks_of_this_file_can_fail(pictures, tmp_path):
    figure = pictures["lag_window"].figure(85)
    figure.text(0.5, 0.5, "one text over")
    figure.text(0.5, 0.5, "another, and small", fontsize=5)
    figure.text(0.98, 0.5, "leaves the canvas")
    assert ("one text over", "another, and small") in looking.overlapping(figure)
    assert looking.outside(figure) == ["leaves the canvas"]
    assert min(t.get_fontsize() for t in looking.texts_of(figure)) < SMALLEST
    figure.axes[0].plot([1.2345], [6.789])
    write_rows(tmp_path / "numbers.csv", pictures["lag_window"].rows)
    found = looking.missing(looking.plotted_numbers(figure), tmp_path / "numbers.csv")
    assert found.tolist() == [1.2345, 6.789]


def test_a_single_cell_is_called_one_in_every_figure(bursts):
    said = " ".join(
        text.get_text().replace("\n", " ")
        for picture in pictures_of(bursts.isel(cell=[0]))
        for text in picture.figure(180).texts
    )
    assert said.count("1 simulated cell") > 5
    assert "1 simulated cells" not in said
