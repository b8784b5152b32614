"""Parameters: one declaration, checked values, frozen instances."""

from __future__ import annotations

import math
from typing import ClassVar

import pytest
from hypothesis import given
from hypothesis import strategies as st

from plastic.errors import UnknownName
from plastic.parameters import ParameterError, Parametrised, parameter


class Spring(Parametrised):
    stiffness: float = parameter(2.0, "1", low=0, high=10, source="ours")
    length: float = parameter(5.0, "um", low=1, source="ours")
    offset: float = parameter(0.0, "mV", source="ours")
    depth: float = parameter(-1.0, "mV", high=0, source="ours")

    sets: ClassVar = {"stiff": {"stiffness": 9.0}}


class LongSpring(Spring):
    length: float = parameter(50.0, "um", low=10, source="ours")
    turns: float = parameter(3.0, "1", source="ours")


def test_an_instance_is_its_parameters() -> None:
    assert Spring(stiffness=3).values == {
        "stiffness": 3.0,
        "length": 5.0,
        "offset": 0.0,
        "depth": -1.0,
    }


def test_a_declaration_keeps_unit_bounds_and_source() -> None:
    declared = Spring.parameters["stiffness"]
    assert (declared.name, declared.unit, declared.source) == ("stiffness", "1", "ours")
    assert (declared.default, declared.low, declared.high) == (2.0, 0.0, 10.0)


@pytest.mark.parametrize(
    ("given_value", "said"),
    [
        ({"stiffness": -1}, r"Spring: stiffness = -1 is not in \[0, 10\]"),
        ({"stiffness": 11}, r"Spring: stiffness = 11 is not in \[0, 10\]"),
        ({"length": 0.5}, "Spring: length = 0.5 is not at least 1 um"),
        ({"depth": 1}, "Spring: depth = 1 is not at most 0 mV"),
        ({"offset": math.nan}, "Spring: offset = nan is not a finite number"),
        ({"offset": math.inf}, "Spring: offset = inf is not a finite number"),
        ({"offset": "much"}, "Spring: offset = 'much' is not a number"),
        ({"offset": None}, "Spring: offset = None is not a number"),
        ({"offset": [1, 2]}, r"Spring: offset = \[1, 2\] is not a number"),
    ],
)
def test_a_value_that_is_not_allowed_is_refused(given_value: dict[str, float], said: str) -> None:
    with pytest.raises(ParameterError, match=said):
        Spring(**given_value)


@given(st.floats())
def test_no_value_outside_its_bounds_is_ever_kept(value: float) -> None:
    if 0 <= value <= 10:
        assert Spring(stiffness=value).stiffness == value
    else:
        with pytest.raises(ParameterError) as caught:
            Spring(stiffness=value)
        assert (caught.value.owner, caught.value.name) == ("Spring", "stiffness")


def test_bounds_are_inclusive() -> None:
    assert (Spring(stiffness=0).stiffness, Spring(stiffness=10).stiffness) == (0.0, 10.0)


def test_an_unknown_parameter_is_refused_with_the_nearest() -> None:
    with pytest.raises(
        UnknownName, match="Spring: no parameter is called 'stifness'; did you mean"
    ):
        Spring(stifness=1)


def test_an_instance_is_frozen() -> None:
    spring = Spring()
    with pytest.raises(AttributeError, match=r"Spring\.stiffness is frozen"):
        spring.stiffness = 3  # type: ignore[misc]
    assert spring.stiffness == 2.0


def test_a_named_set_changes_the_defaults_and_may_be_changed() -> None:
    assert Spring.from_set("stiff") == Spring(stiffness=9)
    assert Spring.from_set("stiff", length=7) == Spring(stiffness=9, length=7)
    assert Spring.from_set("stiff", stiffness=1) == Spring(stiffness=1)


def test_an_unknown_set_is_refused() -> None:
    with pytest.raises(UnknownName, match=r"Spring: no parameter set is called 'soft'.*stiff"):
        Spring.from_set("soft")


def test_equal_parameters_make_equal_parts_with_equal_hashes() -> None:
    assert Spring(stiffness=3) == Spring(stiffness=3.0)
    assert hash(Spring(stiffness=3)) == hash(Spring(stiffness=3.0))
    assert Spring(stiffness=3) != Spring(stiffness=4)


def test_parts_of_different_kinds_are_never_equal() -> None:
    class Other(Parametrised):
        stiffness: float = parameter(2.0, "1", low=0, high=10, source="ours")
        length: float = parameter(5.0, "um", low=1, source="ours")
        offset: float = parameter(0.0, "mV", source="ours")
        depth: float = parameter(-1.0, "mV", high=0, source="ours")

    assert Other().values == Spring().values
    assert Other() != Spring()


def test_a_base_may_declare_and_a_part_may_redeclare() -> None:
    assert list(LongSpring.parameters) == ["stiffness", "length", "offset", "depth", "turns"]
    assert LongSpring().length == 50.0
    with pytest.raises(ParameterError, match="at least 10 um"):
        LongSpring(length=5)
    assert Spring().length == 5.0


def test_the_text_of_a_part_names_every_value() -> None:
    assert repr(Spring()) == "Spring(stiffness=2, length=5, offset=0, depth=-1)"
