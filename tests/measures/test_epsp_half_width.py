"""How long the EPSP lasts."""

from __future__ import annotations

import math

from plastic.measures.epsp_half_width import EpspHalfWidth
from tests.measures.readouts import single


def test_the_half_width_is_what_the_reading_saw_in_milliseconds() -> None:
    assert EpspHalfWidth.value(single(half_width=[20.0, 22.0])).tolist() == [[[20.0, 22.0]]]
    assert EpspHalfWidth.unit == "ms"


def test_an_epsp_that_outlasts_the_reading_has_no_half_width() -> None:
    assert math.isnan(EpspHalfWidth.value(single(half_width=[math.nan]))[0, 0, 0])
