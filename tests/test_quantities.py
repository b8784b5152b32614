"""Values at the border: units, ranges, known keys."""

from __future__ import annotations

import math
from typing import Annotated

import pytest
from hypothesis import given
from hypothesis import strategies as st
from pydantic import Field, ValidationError
from pydantic_core import PydanticCustomError

from plastic.quantities import Count, Names, Part, Quantity, checked_keys, key_text, lone

TIME = Quantity("time", low=0)


class Pair(Part):
    length: Annotated[float, Quantity("length", above=0)]
    names: Names = Field(default=(), description="a list of names")


def first_error(table: object) -> dict[str, object]:
    with pytest.raises(ValidationError) as caught:
        Pair.model_validate(table)
    return dict(caught.value.errors()[0]["ctx"])


@given(st.floats(0, 1e9, allow_nan=False), st.sampled_from([("ms", 1), ("s", 1e3), ("min", 6e4)]))
def test_a_written_time_is_read_back_in_ms(value: float, unit: tuple[str, float]) -> None:
    text = f"{value!r} {unit[0]}"
    assert math.isclose(TIME.read(text), value * unit[1], rel_tol=1e-12)


@pytest.mark.parametrize(
    ("text", "said"),
    [
        ("1,5 ms", "no quantity that can be read"),  # a decimal comma is never a decimal point
        ("ms", "no quantity that can be read"),
        ("10 mV", "in mV, not a time"),
        (10, "without a unit"),
        ("10", "in no unit"),
        ("nan ms", "not a finite number"),
        ("inf ms", "not a finite number"),
        (math.nan, "without a unit"),
        (True, "no quantity"),
        ([1], "no quantity"),
        ("-1 ms", "must be at least 0 ms"),
        ("1 2 ms", "no quantity that can be read"),
        ("", "no quantity that can be read"),
    ],
)
def test_what_is_no_time_is_refused_with_the_reason(text: object, said: str) -> None:
    with pytest.raises(PydanticCustomError) as caught:
        TIME.read(text)
    assert said in caught.value.message()


def test_bounds_are_inclusive_or_exclusive_as_declared() -> None:
    closed, open_ = Quantity("number", low=0, high=1), Quantity("number", above=0, below=1)
    assert (closed.read(0), closed.read(1)) == (0.0, 1.0)
    for edge in (0, 1):
        with pytest.raises(PydanticCustomError, match="above 0 and below 1"):
            open_.read(edge)


def test_a_refusal_says_what_is_usual_and_a_usual_range_refuses_nothing() -> None:
    width = Quantity("length", above=0, high=100, usual=(0.2, 10))
    assert width.read("50 um") == pytest.approx(50)
    with pytest.raises(PydanticCustomError) as caught:
        width.read("-50 um")
    assert caught.value.message() == (
        "must be above 0 um and at most 100 um; 0.2 to 10 um is usual (common practice)"
    )
    assert TIME.practice == ""


def test_a_value_is_shown_with_its_unit_as_people_write_it() -> None:
    assert Quantity("membrane resistance").shown(15_000.0) == "15000 ohm cm^2"
    assert Quantity("number").shown(0.5) == "0.5"


@pytest.mark.parametrize("value", [0, 6, 2.0, True, "2"])
def test_a_count_is_a_whole_number_in_its_range(value: object) -> None:
    assert Count(1, 5).read(2) == 2
    with pytest.raises(PydanticCustomError, match="whole number from 1 to 5"):
        Count(1, 5).read(value)


def test_a_misspelt_key_comes_with_the_known_ones() -> None:
    ctx = first_error({"lenght": "3 um"})
    assert (ctx["kind"], ctx["name"], ctx["known"]) == ("key", "lenght", ["length", "names"])


def test_a_missing_key_comes_with_what_to_write() -> None:
    ctx = first_error({})
    assert ctx["path"] == ("length",)
    assert ctx["allowed"] == "missing; a length such as '320 um'"


def test_a_name_stands_once_in_a_list_of_names() -> None:
    ctx = first_error({"length": "1 um", "names": ["far", "near", "far"]})
    assert (ctx["path"], ctx["value"]) == ((2,), "far")


def test_a_part_is_frozen() -> None:
    pair = Pair.model_validate({"length": "3 um"})
    with pytest.raises(ValidationError, match="frozen"):
        pair.length = 4.0  # type: ignore[misc]


def test_a_bare_value_stands_for_a_table_of_one() -> None:
    assert lone("mean")("-55 mV") == {"mean": "-55 mV"}
    assert lone("mean")({"mean": "-55 mV", "sd": 1}) == {"mean": "-55 mV", "sd": 1}


def test_what_is_no_table_is_left_to_its_type() -> None:
    assert checked_keys(Pair.model_fields, 3) == 3


def test_a_key_path_is_written_as_people_write_it() -> None:
    assert key_text(("input", "far", "driven_by", 0, "delay")) == "input.far.driven_by[0].delay"
    assert key_text(()) == ""
