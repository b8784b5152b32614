import csv
import io

import pytest

from plastic.report.grid import Grid

GRID = Grid(
    "A [title]", ["route", "pair_timing"], [["quantal_size", "49 (40 to 58) [a]"]], ["[a] why"]
)


def test_csv_is_the_same_table():
    rows = list(csv.reader(io.StringIO(GRID.csv())))
    assert rows == [["route", "pair_timing"], ["quantal_size", "49 (40 to 58) [a]"]]


def test_columns_without_names_have_no_head():
    assert Grid("", ["", ""], [["a", "b"]]).plain() == "a  b"


def test_a_row_that_does_not_fit_is_refused():
    with pytest.raises(ValueError, match="3 entries for 2 columns"):
        Grid("t", ["a", "b"], [["1", "2", "3"]])


def numbered(count):
    return Grid("t", ["a", "b"], [[str(k), "x"] for k in range(count)], ["note"])


@pytest.mark.parametrize("most", [4, 5])
def test_a_long_table_keeps_its_ends_and_counts_what_it_leaves_out(most):
    short = numbered(20).shortened(most, "all in a file")
    assert [row[0] for row in short.rows] == ["0", "1", "... 16 more", "18", "19"]
    assert short.notes == ["note", "all in a file"]


def test_a_table_that_fits_is_not_shortened():
    assert numbered(4).shortened(4, "all in a file") == numbered(4)
