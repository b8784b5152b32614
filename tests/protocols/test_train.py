"""Trains: explicit spikes, rate, number and interval."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from pydantic import ValidationError

from plastic.protocols.train import Train

TETANUS = {"inputs": ["far"], "spikes": 100, "rate": "100 Hz", "trains": 4, "every": "20 s"}


@given(st.integers(1, 100), st.integers(1, 200), st.integers(1, 5))
def test_a_train_has_its_spikes_at_its_rate(spikes: int, rate: int, trains: int) -> None:
    every = 1000 * spikes / rate + 1
    train = Train.model_validate(
        {
            "inputs": ["far"], "spikes": spikes, "rate": f"{rate} Hz", "trains": trains,
            "every": f"{every!r} ms", "baseline": "0 min",
        }
    )  # fmt: skip
    times = train.schedule("t").times["far"].reshape(trains, spikes)
    expected = np.arange(trains)[:, None] * every + 1000 / rate * np.arange(spikes)
    np.testing.assert_allclose(times, expected, atol=1e-6)


def test_inputs_may_start_at_different_times_in_the_train() -> None:
    pairs = {
        **TETANUS,
        "inputs": {"far": "0 ms", "injected": "10 ms"},
        "spikes": 5,
        "rate": "20 Hz",
    }
    schedule = Train.model_validate(pairs).schedule("pairs", learns=["far"])
    assert [row["set_lag_ms"] for row in schedule.set_lags] == [10, 60, 110, 160, 210]
    assert len(schedule.injected) == 20


def test_a_bare_name_is_a_list_of_one() -> None:
    bare = Train.model_validate({**TETANUS, "inputs": "far"})
    assert bare.named_inputs() == {("inputs", "far"): "far"}
    assert bare == Train.model_validate(TETANUS)


@pytest.mark.parametrize("key", ["spikes", "rate", "trains", "every"])
def test_a_rate_and_a_number_alone_are_no_protocol(key: str) -> None:
    with pytest.raises(ValidationError, match="missing"):
        Train.model_validate({k: v for k, v in TETANUS.items() if k != key})


@pytest.mark.parametrize(
    ("changed", "said"),
    [
        ({"every": "900 ms"}, "overlaps the next repeat"),
        ({"rate": "0 Hz"}, "above 0 Hz"),
        ({"rate": "20000 Hz"}, r"at least 0\.1 ms"),
        ({"rate": "10 ms"}, "not a rate"),
        ({"inputs": []}, "names no input"),
        ({"inputs": ["far", "far"]}, "names an input twice"),
        ({"inputs": 3}, "list of inputs"),
        ({"trains": 0}, "whole number from 1"),
    ],
)
def test_what_cannot_be_delivered_is_refused(changed: dict[str, object], said: str) -> None:
    with pytest.raises(ValidationError, match=said):
        Train.model_validate({**TETANUS, **changed})
