"""Every figure at both widths: readable on paper, in grey, and made of the numbers beside it."""

import numpy as np
import pytest
from PIL import Image

from plastic.report.figures import pictures_of, write_figures
from plastic.report.figures.picture import Picture
from plastic.report.figures.style import MM, SMALLEST, WIDTHS
from tests.report.conftest import fake_dataset
from tests.report.figures import looking

KINDS = (
    "matrix-bursts", "learning_curve_induced-bursts", "learning_curve_expressed-bursts",
    "learning_curve_epsp-bursts", "time_course-bursts", "controls-bursts", "before_after-bursts",
    "lag_window", "rate_dependence",
)  # fmt: skip
EVERY = [(name, width) for name in KINDS for width in WIDTHS]


@pytest.fixture(scope="module")
def bursts():
    data = fake_dataset()
    return data.sel(protocol=[p for p in data["protocol"].values if p.startswith("bursts")])


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
    from plastic.report.figures.picture import write_rows

    write_rows(tmp_path / "numbers.csv", pictures[name].rows)
    by_rank = name.startswith(("before_after", "matrix"))  # there y is a place, not a number
    values = looking.plotted_numbers(figures[name, 85], y=not by_rank)
    assert looking.missing(values, tmp_path / "numbers.csv").tolist() == []
    if not name.startswith("matrix"):
        assert len(values) > 20


def test_the_matrix_shows_the_counts_of_its_csv(pictures, figures):
    shown = {t.get_text() for t in figures["matrix-bursts", 85].axes[0].texts}
    counts = {str(row["shown"]) for row in pictures["matrix-bursts"].rows}
    for count in counts:
        assert any(text.startswith(count) for text in shown), count


@pytest.mark.parametrize("name", [k for k in KINDS if not k.startswith(("matrix", "lag"))])
def test_lines_are_told_apart_without_colour(figures, name):
    for axes in figures[name, 85].axes:
        found = looking.looks(axes)
        assert len(set(found)) == len({line.get_label() for line in named(axes)})


def named(axes):
    return [line for line in axes.get_lines() if not line.get_label().startswith("_")]


def test_the_matrix_gets_lighter_with_the_count_in_grey(pictures, figures):
    rows = pictures["matrix-bursts"].rows
    patches = figures["matrix-bursts", 85].axes[0].patches
    order = {(row["route"], row["rule"]): k for k, row in enumerate(sorted_rows(rows))}
    pairs = [
        (float(row["median_repeats_expressed"]), looking.grey(patches[k].get_facecolor()[:3]))
        for row in rows
        if np.isfinite(float(row["median_repeats_expressed"]))
        for k in [order[row["route"], row["rule"]]]
    ]
    counts, greys = zip(*sorted(pairs), strict=True)
    assert len(set(counts)) > 4
    assert all(np.diff(greys)[np.diff(counts) > 0] > 0)
    assert min(greys) > 0.5  # black text on it keeps a contrast above 7:1


def sorted_rows(rows):
    """Return rows in the order in which cells are drawn: along the routes, then the rules."""
    routes = list(dict.fromkeys(row["route"] for row in rows))
    rules = list(dict.fromkeys(row["rule"] for row in rows))
    return sorted(rows, key=lambda r: (routes.index(r["route"]), rules.index(r["rule"])))


def test_never_is_hatched_and_says_why(figures):
    axes = figures["matrix-bursts", 180].axes[0]
    hatched = [patch for patch in axes.patches if patch.get_hatch()]
    never = [t for t in axes.texts if t.get_text().startswith("never 100 %")]
    assert len(never) >= 2
    assert len(hatched) >= len(never)
    foot = " ".join(text.get_text() for text in figures["matrix-bursts", 180].texts)
    assert "no gain from the route" in foot
    assert "illustrative here" in foot


@pytest.mark.parametrize("width", WIDTHS)
def test_the_text_of_a_cell_stays_in_its_cell(figures, width):
    figure = figures["matrix-bursts", width]
    axes, renderer = figure.axes[0], figure.canvas.get_renderer()
    figure.draw(renderer)
    cells = [patch.get_window_extent(renderer) for patch in axes.patches]
    for text in axes.texts:
        box = text.get_window_extent(renderer)
        assert any(
            c.x0 <= box.x0 and box.x1 <= c.x1 and c.y0 <= box.y0 and box.y1 <= c.y1 for c in cells
        ), text.get_text()


def test_axes_say_quantity_and_unit(figures):
    said = {name: " ".join(t.get_text() for t in figures[name, 85].texts) for name in KINDS}
    assert "time from the start of the induction (min)" in said["time_course-bursts"]
    assert "EPSP of far (% of baseline)" in said["controls-bursts"]
    assert "EPSP of far at the soma (mV)" in said["learning_curve_epsp-bursts"]
    assert "lag, t_post − t_pre (ms)" in said["lag_window"]
    assert "rate of pairs (Hz)" in said["rate_dependence"]
    assert "12 simulated cells" in said["time_course-bursts"]
    assert not any(" n " in words or "n =" in words for words in said.values())


def test_the_induction_is_shaded_from_its_start_to_its_end(figures):
    axes = figures["time_course-bursts", 85].axes[0]
    box = axes.patches[0].get_path().get_extents(axes.patches[0].get_patch_transform())
    assert (box.x0, box.x1) == (0.0, 10.0)


def test_the_threshold_line_stands_at_the_criterion(figures, bursts):
    lines = {k: figures[f"learning_curve_{k}-bursts", 85].axes[0].get_lines()
             for k in ("induced", "epsp")}  # fmt: skip
    levels = {k: next(li for li in found if li.get_label().startswith(("crit", "spike")))
              for k, found in lines.items()}  # fmt: skip
    assert set(levels["induced"].get_ydata()) == {0.5}
    above = float(bursts["threshold"].median()) + 68.0
    assert list(levels["epsp"].get_ydata()) == pytest.approx([above, above])


def test_files_have_the_size_of_the_page(pictures, tmp_path):
    paths = pictures["lag_window"].save(tmp_path)
    assert sorted(path.name for path in paths) == [
        "lag_window-180mm.png", "lag_window-180mm.svg", "lag_window-85mm.png",
        "lag_window-85mm.svg", "lag_window.csv",
    ]  # fmt: skip
    for width in WIDTHS:
        with Image.open(tmp_path / f"lag_window-{width}mm.png") as image:
            assert abs(image.width - width / 25.4 * 300) <= 1
            assert image.info["dpi"][0] == pytest.approx(300, abs=0.5)
        drawn = (tmp_path / f"lag_window-{width}mm.svg").read_text(encoding="utf-8")
        assert "triplet timing</text>" in drawn  # text stays text
        assert float(drawn.split('width="')[1].split("pt")[0]) == pytest.approx(
            width / 25.4 * 72, abs=0.01
        )


def test_the_same_numbers_give_the_same_file(pictures, tmp_path):
    for folder in ("one", "two"):
        (tmp_path / folder).mkdir()
        pictures["lag_window"].save(tmp_path / folder)
    for path in (tmp_path / "one").iterdir():
        assert path.read_bytes() == (tmp_path / "two" / path.name).read_bytes()


def test_writing_tells_its_progress_and_names_files_safely(bursts, tmp_path, monkeypatch):
    few = [Picture("matrix-a, b/c", [{"x": 1.0}], lambda rows, width: empty(width))]
    monkeypatch.setattr("plastic.report.figures.pictures_of", lambda dataset: few)
    steps = []
    paths = write_figures(bursts, tmp_path / "new", progress=lambda *s: steps.append(s))
    assert steps == [(1, 1)]
    assert {path.parent for path in paths} == {tmp_path / "new"}
    assert (tmp_path / "new" / "matrix-a_b_c.csv").read_text() == "x\n1.0\n"


def empty(width):
    from plastic.report.figures.style import canvas

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


@pytest.mark.parametrize("width", WIDTHS)
def test_what_does_not_differ_is_not_blown_up(bursts, width):
    flat = bursts.copy(deep=True)
    flat["failure_rate"][:] = 0.0
    flat["failure_rate"][..., -1] = 3e-9
    flat["paired_pulse_ratio"][:] = 1.0
    picture = next(p for p in pictures_of(flat) if p.name.startswith("before_after"))
    figure = picture.figure(width)
    assert looking.outside(figure) == []
    assert looking.overlapping(figure) == []
    for axes in figure.axes:
        if axes.get_title() in ("failure rate", "paired-pulse ratio"):
            assert np.diff(axes.get_xlim())[0] >= 0.0199


def test_the_checks_of_this_file_can_fail(pictures, tmp_path):
    from plastic.report.figures.picture import write_rows

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
