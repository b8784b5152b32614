"""The law of reciprocity."""

from __future__ import annotations

from plastic.laws import Case, find
from plastic.laws._cells import PassiveCell
from tests.laws.faulty_cells import ONE, PLACES, OneWay
from tests.laws.trying import assert_kept, told

NUMBERS = {"tenths": 20, "node": 1}


def test_passive_cells_keep_it() -> None:
    assert_kept(PassiveCell, "reciprocity")


def test_a_cell_that_does_not_is_caught() -> None:
    broken = told("reciprocity", Case(OneWay(ONE, PLACES), numbers=NUMBERS))
    assert broken.rows[0].one != broken.rows[0].other


def test_the_same_cell_without_the_fault_keeps_it() -> None:
    assert find("reciprocity")().broken(Case(PassiveCell(ONE, PLACES), numbers=NUMBERS)) is None
