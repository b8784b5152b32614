"""The base of protocols: partner, test pulses, patterns; and the catalogue as a whole."""

from __future__ import annotations

import inspect

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from pydantic_core import PydanticCustomError

from plastic import protocols
from plastic.errors import UnknownName
from plastic.protocols._interface import Protocol, Pulses, checked_pattern
from plastic.protocols.pairing import Pairing
from tests.protocols.cases import BURSTS, bursts


@pytest.mark.parametrize("name", protocols.names())
def test_every_protocol_of_the_catalogue_is_one_documented_final_class(name: str) -> None:
    cls = protocols.find(name)
    assert issubclass(cls, Protocol)
    assert cls.__bases__ == (Protocol,)
    assert not inspect.isabstract(cls)
    assert cls.summary().endswith(("?", "."))


def test_the_catalogue_offers_the_nearest_name() -> None:
    assert protocols.names() == ["pairing", "spike_times", "test_pulses", "train"]
    with pytest.raises(UnknownName, match="did you mean 'pairing'"):
        protocols.find("pairings")


def test_the_base_itself_is_no_protocol() -> None:
    with pytest.raises(TypeError, match="abstract"):
        Protocol()  # type: ignore[abstract]


def test_the_partner_is_by_default_what_does_not_learn() -> None:
    protocol = Pairing.model_validate(BURSTS)
    assert protocol.schedule("b", learns=["far"]).partner == ("near",)
    assert protocol.schedule("b", learns=["near"]).partner == ("far",)
    assert protocol.schedule("b").partner == ("near",)


def test_when_all_learn_the_first_is_paired_with_the_others() -> None:
    both = Pairing.model_validate(BURSTS).schedule("b", learns=["far", "near"])
    assert both.partner == ("near",)


def test_an_input_alone_has_no_partner() -> None:
    assert bursts(pattern={"far": ["0 ms"]}).partner == ()


def test_a_given_partner_is_kept_and_must_be_in_the_pattern() -> None:
    three = {"far": ["0 ms"], "near": ["10 ms"], "injected": ["12 ms"]}
    assert bursts(pattern=three).partner == ("near", "injected")
    assert bursts(pattern=three, partner=["injected"]).partner == ("injected",)
    with pytest.raises(UnknownName, match="'nearby'; did you mean 'near'"):
        bursts(pattern=three, partner=["nearby"])


@given(st.integers(1, 50), st.integers(1, 4), st.integers(100, 2000))
def test_pulses_are_evenly_spaced_and_shared_out_in_turn(n: int, turns: int, every: int) -> None:
    names = [f"input{k}" for k in range(turns)]
    pulses = Pulses.model_validate({"inputs": names, "every": f"{every} ms"})
    found = pulses.times(1000.0, 1000.0 + n * every)
    together = np.sort(np.concatenate(list(found.values())))
    np.testing.assert_allclose(together, 1000.0 + every * (np.arange(n) + 0.5))
    assert max(map(len, found.values())) - min(map(len, found.values())) <= 1


@pytest.mark.parametrize(
    ("pattern", "repeated", "said", "path"),
    [
        ({}, True, "names no input", ("p",)),
        ({"far": []}, True, "at least one time", ("p", "far")),
        ({"far": [0.0, 0.0]}, True, "at least 0.1 ms after the one before", ("p", "far", 1)),
        ({"far": [5.0, 1.0]}, True, "after the one before, at 5 ms", ("p", "far", 1)),
        ({"far": [0.0, 0.05]}, True, "at least 0.1 ms", ("p", "far", 1)),
        ({"far": [100.0]}, True, "overlaps the next repeat", ("p", "far")),
        ({"far": [0.0, 99.95]}, True, "overlaps the next repeat", ("p", "far")),
    ],
)
def test_what_is_no_pattern_is_refused(
    pattern: dict[str, list[float]], repeated: bool, said: str, path: tuple[str | int, ...]
) -> None:
    with pytest.raises(PydanticCustomError) as caught:
        checked_pattern(pattern, 100.0, repeated, key="p")
    assert said in caught.value.message()
    assert caught.value.context is not None
    assert caught.value.context["path"] == path


def test_a_single_repeat_has_no_next_one_to_run_into() -> None:
    with pytest.raises(PydanticCustomError, match="overlaps"):
        checked_pattern({"far": [0.0, 99.95]}, 100.0, True)
    assert checked_pattern({"far": [0.0, 99.95]}, 100.0, False) is None
