"""Nothing but test pulses."""

from __future__ import annotations

import numpy as np
import pytest
from pydantic import ValidationError

from plastic.protocols.test_pulses import TestPulses

ALONE = {"test": {"inputs": ["far"], "every": "30 s"}, "baseline": "1 min", "follow_up": "1 min"}


def test_the_pulses_go_on_evenly_through_all_epochs() -> None:
    schedule = TestPulses.model_validate({**ALONE, "duration": "2 min"}).schedule("alone")
    np.testing.assert_array_equal(schedule.times["far"], 15e3 + 30e3 * np.arange(8))
    assert len(schedule.repeat_starts) == 4
    assert schedule.partner == ()
    assert schedule.set_lags == []


def test_the_table_puts_each_pulse_into_its_epoch() -> None:
    rows = TestPulses.model_validate({**ALONE, "duration": "1 min"}).schedule("alone").table()
    assert [r["epoch"] for r in rows] == [
        "baseline", "baseline", "induction", "induction", "follow_up", "follow_up",
    ]  # fmt: skip


@pytest.mark.parametrize("duration", ["45 s", "20 s"])
def test_the_duration_is_a_whole_number_of_intervals(duration: str) -> None:
    with pytest.raises(ValidationError, match="whole number of test intervals"):
        TestPulses.model_validate({**ALONE, "duration": duration})


def test_test_pulses_need_to_be_described() -> None:
    with pytest.raises(ValidationError, match="missing; a table such as"):
        TestPulses.model_validate({})
