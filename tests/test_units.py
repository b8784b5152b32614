"""Quantities at the border: text with a unit becomes a float in the internal unit."""

from __future__ import annotations

import math

import pytest
from hypothesis import given
from hypothesis import strategies as st

from plastic.units import INTERNAL, QuantityError, example, number_in

#: text, dimension, value in the internal unit; the prefixes of the SI (BIPM brochure, 9th edition)
SI = [
    ("10 ms", "time", 10.0),
    ("10 s", "time", 1e4),
    ("5 min", "time", 3e5),
    ("2 h", "time", 7.2e6),
    ("250 us", "time", 0.25),
    ("-68 mV", "potential", -68.0),
    ("-0.068 V", "potential", -68.0),
    ("0.3 nS", "conductance", 0.3),
    ("300 pS", "conductance", 0.3),
    ("1/Mohm", "conductance", None),
    ("0.2 nA", "current", 200.0),
    ("0.1 nF", "capacitance", 100.0),
    ("0.32 mm", "length", 320.0),
    ("320 µm", "length", 320.0),
    ("320 micrometer", "length", 320.0),
    ("0.15 Gohm", "resistance", 150.0),
    ("150 MΩ", "resistance", 150.0),
    ("150 MOhm", "resistance", 150.0),
    ("20 Hz", "rate", 20.0),
    ("0.02 kHz", "rate", 20.0),
    ("0.5 m/s", "velocity", 500.0),
    ("7 mM", "concentration", 7.0),
    ("100 uM", "concentration", 0.1),
    ("0.13 mol/L", "concentration", 130.0),
    ("0.13 M", "concentration", 130.0),
    ("32 degC", "temperature", 32.0),
    ("-5 °C", "temperature", -5.0),
    ("300 K", "temperature", 26.85),
    ("15 kohm cm^2", "membrane resistance", 15e3),
    ("15 kohm*cm^2", "membrane resistance", 15e3),
    ("1.5 ohm m^2", "membrane resistance", 15e3),
    ("1 uF/cm^2", "membrane capacitance", 1.0),
    ("0.01 F/m^2", "membrane capacitance", 1.0),
    ("1.5 ohm m", "axial resistivity", 150.0),
    ("0.5", "number", 0.5),
]


@pytest.mark.parametrize(("text", "dimension", "value"), [row for row in SI if row[2] is not None])
def test_a_quantity_is_read_in_the_internal_unit(text: str, dimension: str, value: float) -> None:
    assert number_in(text, dimension) == pytest.approx(value, rel=1e-12)


@pytest.mark.parametrize("dimension", INTERNAL)
def test_the_example_of_every_dimension_can_be_read(dimension: str) -> None:
    assert math.isfinite(number_in(example(dimension), dimension))


@pytest.mark.parametrize(
    ("dimension", "other"), [(a, b) for a in INTERNAL for b in INTERNAL if a != b]
)
def test_a_quantity_of_another_dimension_is_refused(dimension: str, other: str) -> None:
    with pytest.raises(QuantityError, match=f"not a {dimension}"):
        number_in(example(other), dimension)


@given(st.floats(-1e9, 1e9, allow_nan=False))
def test_scaling_the_unit_scales_the_number(value: float) -> None:
    seconds, milliseconds = number_in(f"{value!r} s", "time"), number_in(f"{value!r} ms", "time")
    assert math.isclose(seconds, 1000 * milliseconds, rel_tol=1e-12)


@pytest.mark.parametrize("text", ["nan ms", "inf ms", "1e400 ms"])
def test_a_number_that_is_not_finite_is_refused(text: str) -> None:
    with pytest.raises(QuantityError):
        number_in(text, "time")


def test_a_plain_nan_is_refused() -> None:
    with pytest.raises(QuantityError, match="not a finite number"):
        number_in(math.nan, "number")


@pytest.mark.parametrize("text", ["", "ms", "ten ms", "10 parsnips", "1 2 ms"])
def test_text_that_is_no_quantity_is_refused_with_an_example(text: str) -> None:
    with pytest.raises(QuantityError, match="write it like '10 ms'"):
        number_in(text, "time")


@pytest.mark.parametrize("thing", [True, None, [10], {"ms": 10}])
def test_a_thing_that_is_no_text_is_refused(thing: object) -> None:
    with pytest.raises(QuantityError, match="no quantity"):
        number_in(thing, "time")


def test_a_bare_number_needs_its_unit() -> None:
    with pytest.raises(QuantityError, match=r"10 is without a unit \(write it like '10 ms'\)"):
        number_in(10, "time")
    with pytest.raises(QuantityError, match="in no unit, not a time"):
        number_in("10", "time")


def test_zero_needs_no_unit() -> None:
    assert number_in(0, "time") == 0.0


def test_zero_needs_its_unit_where_scales_differ_in_their_zero() -> None:
    with pytest.raises(QuantityError, match=r"0 is without a unit \(write it like '32 degC'\)"):
        number_in(0, "temperature")
    assert number_in("0 degC", "temperature") == 0.0
    assert number_in("0 K", "temperature") == pytest.approx(-273.15, rel=1e-12)


@pytest.mark.parametrize("text", ["32 C", "32 degC/s", "32 degC mM"])
def test_what_only_looks_like_a_temperature_is_refused(text: str) -> None:
    """C is the coulomb."""
    with pytest.raises(QuantityError, match="not a temperature"):
        number_in(text, "temperature")


def test_a_refusal_keeps_its_numbers() -> None:
    with pytest.raises(QuantityError) as caught:
        number_in("5 mV", "time")
    assert (caught.value.text, caught.value.dimension) == ("5 mV", "time")
    assert "in mV" in caught.value.reason
