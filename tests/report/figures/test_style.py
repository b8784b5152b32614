import matplotlib as mpl
import pytest
from hypothesis import given
from hypothesis import strategies as st

from plastic.report.figures.style import LINES, line, marks, style, text_width, words, wrapped
from tests.report.figures.looking import grey

TEXTS = st.text(st.characters(codec="ascii", categories=("L", "N")), min_size=1, max_size=12)


@given(st.lists(TEXTS, min_size=1, max_size=12), st.floats(10, 180))
def test_wrapping_keeps_every_word_and_the_width(parts, width):
    text = " ".join(parts)
    lines = wrapped(text, width).split("\n")
    assert " ".join(lines) == text
    for found in lines:
        assert text_width(found, 7) <= width or " " not in found


def test_a_hard_blank_is_never_broken():
    assert wrapped("a\u00a0b c", 1.0) == "a\u00a0b\nc"


def test_text_is_as_wide_as_its_size_says():
    # an em of n signs in DejaVu Sans; the width grows in proportion to the size
    assert text_width("release", 14) == pytest.approx(2 * text_width("release", 7), rel=0.01)
    assert 5.0 < text_width("release", 7) < 12.0  # mm


def test_neighbouring_series_differ_in_pattern_marker_and_lightness():
    assert len({str(one.linestyle) for one in LINES}) == len(LINES)
    assert len({one.marker for one in LINES}) == len(LINES)
    assert abs(grey(line(0).color) - grey(line(1).color)) > 0.2
    assert abs(grey(line(1).color) - grey(line(2).color)) > 0.15


def test_marks_of_two_series_do_not_fall_together():
    x = [float(k) for k in range(61)]
    assert not set(marks(x, 0)) & set(marks(x, 1))
    assert len(marks(x, 0)) == 6


def test_labels_are_written_as_people_do():
    assert words("dendrite_width+release_probability") == "dendrite width + release probability"


def test_our_settings_leave_no_trace():
    before = mpl.rcParams["font.size"]
    with style():
        assert mpl.rcParams["font.size"] == 7
    assert mpl.rcParams["font.size"] == before
