"""The passive cell that the laws about cells look at."""

from __future__ import annotations

import numpy as np

from plastic.laws._cells import PassiveCell, impulses
from tests.laws.faulty_cells import ONE, PLACES


def test_a_point_decays_with_its_time_constant() -> None:
    """By hand: 1 pC on C = tau g = 15 ms 2 nS = 30 pF is 1000/30 mV."""
    found = impulses(PassiveCell({}, (), load=2.0), 15.0)
    np.testing.assert_allclose(found, [[1000 / 30 * np.exp(-1)]], rtol=1e-12)


def test_charge_is_where_it_was_put_at_first() -> None:
    cell = PassiveCell(ONE, PLACES)
    np.testing.assert_allclose(impulses(cell, 0.0), np.diag(1000 / cell.capacitance))
