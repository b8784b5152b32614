import io

from rich.console import Console
from rich.text import Text

from plastic.report.grid import Grid
from plastic.report.tables import printed

GRID = Grid(
    "A [title]", ["route", "pair_timing"], [["quantal_size", "49 (40 to 58) [a]"]], ["[a] why"]
)


def shown(grid, *, terminal, width=200):
    out = io.StringIO()
    printed([grid], Console(file=out, force_terminal=terminal, width=width, no_color=True))
    return out.getvalue()


def test_away_from_a_terminal_the_table_is_plain_text():
    assert shown(GRID, terminal=False) == (
        "A [title]\n"
        "route         pair_timing\n"
        "------------  -----------------\n"
        "quantal_size  49 (40 to 58) [a]\n"
        "[a] why\n\n"
    )


def test_away_from_a_terminal_no_line_is_ever_wrapped():
    wide = Grid("", ["a", "b"], [["x" * 150, "y" * 150]])
    assert f"{'x' * 150}  {'y' * 150}" in shown(wide, terminal=False, width=40)


def test_on_a_terminal_nothing_is_taken_for_markup():
    text = shown(GRID, terminal=True)
    for words in ("A [title]", "49 (40 to 58) [a]", "[a] why"):
        assert words in text


def test_on_a_narrow_terminal_nothing_is_lost():
    text = shown(Grid("", ["a", "b"], [["x" * 60, "y" * 60]]), terminal=True, width=40)
    assert text.count("x") == 60
    assert text.count("y") == 60
    assert max(len(Text.from_ansi(line)) for line in text.splitlines()) <= 40
