"""The rise time of the EPSP, and that it tells far contacts from near ones."""

from __future__ import annotations

import pytest

from plastic.measures.epsp_rise import EpspRise
from tests.engine.readers import Opening, integrated, network, shape_of
from tests.measures.readouts import single


def test_the_rise_is_what_the_reading_saw_in_milliseconds() -> None:
    assert EpspRise.value(single(rise=[1.0, 2.5])).tolist() == [[[1.0, 2.5]]]
    assert EpspRise.unit == "ms"


def test_the_rise_of_a_far_contact_is_longer_than_that_of_a_near_one() -> None:
    """Rall 1967, here by scipy: the same conductance at 50 and at 350 um of one dendrite."""
    cell = network(8.0, [50.0, 350.0])
    near, far = (shape_of(*integrated(cell, [Opening(1.0, node)]))[1] for node in (1, 2))
    found = EpspRise.value(single(rise=[near, far]))[0, 0]
    assert found[1] > 1.2 * found[0]
    assert found == pytest.approx([near, far])
