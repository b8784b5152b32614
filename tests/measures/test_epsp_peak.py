"""The height of the EPSP is what the reading saw."""

from __future__ import annotations

from dataclasses import replace

import numpy as np

from plastic.measures.epsp_peak import EpspPeak
from tests.measures.readouts import invented, single


def test_the_peak_is_what_the_reading_saw_in_millivolts() -> None:
    assert EpspPeak.value(single(peak=[8.0, 9.5])).tolist() == [[[8.0, 9.5]]]
    assert EpspPeak.unit == "mV"


def test_the_peak_is_measured_and_not_computed_from_release() -> None:
    """Saturation and inhibition are in the reading: release may change beside it."""
    seen = invented()
    other = replace(seen, probability=seen.probability / 2, fires=1 - seen.fires)
    assert np.array_equal(EpspPeak.value(seen), EpspPeak.value(other))
    assert not np.array_equal(EpspPeak.value(seen), EpspPeak.value(invented(seed=2)))
