"""Whether the input drives the cell."""

from __future__ import annotations

import numpy as np

from plastic.measures.fires_alone import FiresAlone
from tests.measures.readouts import invented, single


def test_it_is_the_probability_that_the_reading_found() -> None:
    assert FiresAlone.value(single(fires=[0.0, 0.25, 1.0])).tolist() == [[[0.0, 0.25, 1.0]]]
    assert FiresAlone.unit == "1"


def test_it_is_that_of_every_cell_and_input() -> None:
    assert np.array_equal(FiresAlone.value(invented()), invented().fires)
    assert not np.array_equal(FiresAlone.value(invented()), invented(seed=2).fires)
