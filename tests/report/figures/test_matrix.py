import numpy as np
import pytest

from plastic.report.comparison import compare
from plastic.report.figures.matrix import matrix
from plastic.report.figures.style import WIDTHS
from tests.report.figures import looking


@pytest.fixture(scope="module")
def picture(bursts):
    return matrix(compare(bursts), "bursts")


@pytest.fixture(scope="module")
def figures(picture):
    return {width: picture.figure(width) for width in WIDTHS}


def test_the_matrix_shows_the_counts_of_its_csv(picture, figures):
    shown = {t.get_text().replace("\u00a0", " ") for t in figures[85].axes[0].texts}
    counts = {str(row["shown"]) for row in picture.rows}
    for count in counts:
        assert any(text.startswith(count) for text in shown), count


def test_the_matrix_gets_lighter_with_the_count_in_grey(picture, figures):
    rows = picture.rows
    patches = figures[85].axes[0].patches
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
    axes = figures[180].axes[0]
    hatched = [patch for patch in axes.patches if patch.get_hatch()]
    never = [t for t in axes.texts if t.get_text().startswith("never\u00a0100\u00a0%")]
    assert len(never) >= 2
    assert len(hatched) >= len(never)
    foot = " ".join(" ".join(text.get_text() for text in figures[180].texts).split())
    assert "commonest cause: (a) " in foot
    assert "no gain from the route" in foot
    assert "illustrative here" in foot


@pytest.mark.parametrize("width", WIDTHS)
def test_no_phrase_of_a_cell_is_broken(figures, width):
    texts = [t.get_text() for t in figures[width].axes[0].texts]
    assert sum("%" in text for text in texts) > 20
    assert [text for text in texts if text.startswith(("%", "reached", "later", "("))] == []
    assert [text for text in texts if text.endswith(("never", "already", "("))] == []


def test_where_phrases_do_not_fit_a_number_keeps_its_percent_sign(bursts):
    """Six rules side by side at 85 mm leave 7 mm to each."""
    many = bursts.isel(rule=[0, 1, 2, 0, 1, 2]).assign_coords(rule=list("abcdef"))
    axes = matrix(compare(many), "bursts").figure(85).axes[0]
    texts = [t.get_text() for t in axes.texts]
    assert "reached" in texts  # control: phrases are broken here
    assert [text for text in texts if text.startswith("%")] == []


@pytest.mark.parametrize("width", WIDTHS)
def test_the_text_of_a_cell_stays_in_its_cell(figures, width):
    figure = figures[width]
    axes, renderer = figure.axes[0], figure.canvas.get_renderer()
    figure.draw(renderer)
    cells = [patch.get_window_extent(renderer) for patch in axes.patches]
    for text in axes.texts:
        box = text.get_window_extent(renderer)
        assert any(
            c.x0 <= box.x0 and box.x1 <= c.x1 and c.y0 <= box.y0 and box.y1 <= c.y1 for c in cells
        ), text.get_text()
