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
