"""The EPSP in percent of its value at the end of the baseline."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from plastic.measures.epsp_percent_of_baseline import EpspPercentOfBaseline
from tests.measures.readouts import invented, single

value = EpspPercentOfBaseline.value


def test_the_end_of_the_baseline_is_one_hundred_and_the_rest_in_proportion() -> None:
    seen = replace(single(peak=[7.0, 8.0, 12.0, 4.0]), baseline=1)
    assert value(seen)[0, 0] == pytest.approx([87.5, 100.0, 150.0, 50.0])
    assert value(replace(seen, baseline=2))[0, 0, 2] == 100.0


def test_every_cell_and_input_has_its_own_baseline() -> None:
    seen = invented()
    assert value(seen)[:, :, seen.baseline] == pytest.approx(np.full((3, 2), 100.0))


def test_a_gain_of_the_rig_is_not_seen() -> None:
    seen = invented()
    assert value(replace(seen, peak=3.7 * seen.peak)) == pytest.approx(value(seen))


def test_nothing_at_baseline_has_no_percentage() -> None:
    assert np.isnan(value(single(peak=[0.0, 5.0]))).all()
    assert value(single(peak=[5.0, 0.0]))[0, 0].tolist() == [100.0, 0.0]
