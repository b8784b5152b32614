"""Pairing: the pattern as it is written."""

from __future__ import annotations

import pytest
from pydantic import ValidationError

from plastic.protocols.pairing import Pairing
from tests.protocols.cases import BURSTS


def test_the_pattern_is_kept_as_it_is_written() -> None:
    it = Pairing.model_validate(BURSTS).induction()
    assert it.pattern == {"far": (0.0,), "near": (10.0, 20.0, 30.0)}
    assert (it.times, it.every, it.tested) == (3, 10_000.0, False)


def test_every_input_is_named_with_the_key_that_names_it() -> None:
    found = Pairing.model_validate({**BURSTS, "partner": ["near"]}).named_inputs()
    assert found == {
        ("pattern", "far"): "far",
        ("pattern", "near"): "near",
        ("test", "inputs", 0): "far",
        ("test", "inputs", 1): "near",
        ("partner", 0): "near",
    }


@pytest.mark.parametrize(
    ("changed", "said"),
    [
        ({"repeat": {"times": 0, "every": "10 s"}}, "whole number from 1"),
        ({"repeat": {"times": 2.5, "every": "10 s"}}, "whole number from 1"),
        ({"repeat": {"times": 60, "every": "20 ms"}}, "overlaps the next repeat"),
        ({"repeat": {"times": 60}}, "missing; a time such as '10 ms'"),
        ({"pattern": {"far": ["-1 ms"]}}, "at least 0 ms"),
        ({"pattern": {"far": ["nan ms"]}}, "not a finite number"),
        ({"pattern": {"far": []}}, "at least one time"),
        ({"pattern": {}}, "names no input"),
        ({"pattern": {"far": ["20 ms", "10 ms"]}}, "after the one before"),
        ({"pattern": {"far": [10]}}, "without a unit"),
    ],
)
def test_what_cannot_be_delivered_is_refused(changed: dict[str, object], said: str) -> None:
    with pytest.raises(ValidationError, match=said):
        Pairing.model_validate({**BURSTS, **changed})
