"""Nernst and Goldman-Hodgkin-Katz against the tables of textbooks.

Every row says where it comes from: "from memory" was not seen when this was written, "looked up"
was. The exact column is own arithmetic with CODATA constants, done outside this package.
"""

from __future__ import annotations

import math
from typing import NamedTuple

import numpy as np
import pytest

from plastic.membrane.ions import (
    Bicarbonate,
    effect,
    gaba_reversal,
    ghk_current,
    ghk_voltage,
    nernst,
    thermal_voltage,
)

SQUID = "Hodgkin 1964; Kandel et al.; Johnston & Wu: from memory, sure"
JOHNSTON_WU = "Johnston & Wu: from memory, fairly sure"
CONWAY = "Conway 1957 by way of Johnston & Wu: from memory, fairly sure"
HILLE = "Hille, table of ions: from memory, sure"
HEALTH_PAGE = "a health page on the plasma membrane: looked up"


class Row(NamedTuple):
    cell: str
    ion: str
    valence: int
    outside: float
    inside: float
    printed: float  # mV
    exact: dict[float, float]  # temperature in C: mV
    source: str


ROWS = [
    Row("squid", "K", 1, 20, 400, -75, {18: -75.16, 20: -75.68}, SQUID),
    Row("squid", "Na", 1, 440, 50, 55, {18: 54.56, 20: 54.94}, SQUID + "; 440/50 looked up"),
    Row("squid", "Cl", -1, 560, 52, -60, {18: -59.63, 20: -60.04}, SQUID),
    Row("squid", "Cl low", -1, 560, 40, -66, {20: -66.67}, JOHNSTON_WU),
    Row("squid", "Cl high", -1, 560, 150, -33, {20: -33.28}, JOHNSTON_WU),
    Row("squid", "Ca", 2, 10, 1e-4, 145, {20: 145.42}, JOHNSTON_WU),
    Row("frog muscle", "K", 1, 2.25, 124, -101, {20: -101.28}, CONWAY),
    Row("frog muscle", "Na", 1, 109, 10.4, 59, {20: 59.35}, CONWAY),
    Row("frog muscle", "Cl", -1, 77.5, 1.5, -99, {20: -99.65}, CONWAY),
    Row("mammalian muscle", "Na", 1, 145, 12, 67, {37: 66.60}, HILLE),
    Row("mammalian muscle", "K", 1, 4, 155, -98, {37: -97.74}, HILLE),
    Row("mammalian muscle", "Ca", 2, 1.5, 1e-4, 129, {37: 128.50}, HILLE),
    Row("mammalian muscle", "Cl", -1, 123, 4.2, -90, {37: -90.26}, HILLE),
    Row("mammal", "K", 1, 5, 140, -89.7, {37: -89.06}, JOHNSTON_WU),
    Row("mammal", "Na high", 1, 145, 5, 90, {37: 90.00}, JOHNSTON_WU),
    Row("mammal", "Na low", 1, 145, 15, 61, {37: 60.63}, JOHNSTON_WU),
    Row("mammal", "Cl", -1, 110, 4, -89, {37: -88.58}, JOHNSTON_WU),
    Row("mammal", "Ca low", 2, 2.5, 1e-4, 136, {37: 135.33}, JOHNSTON_WU),
    Row("mammal", "Ca high", 2, 5, 1e-4, 145, {37: 144.59}, JOHNSTON_WU),
]
AT = [pytest.param(row, t, id=f"{row.cell} {row.ion} {t} C") for row in ROWS for t in row.exact]


def reversal(row: Row, temperature: float) -> float:
    return float(nernst(row.inside, row.outside, row.valence, temperature))


@pytest.mark.parametrize(("row", "temperature"), AT)
def test_the_printed_reversals_hold_at_the_temperature_of_their_table(
    row: Row, temperature: float
) -> None:
    """0.7 mV: printed to 1 mV, some with a round slope."""
    assert reversal(row, temperature) == pytest.approx(row.printed, abs=0.7), row.source


@pytest.mark.parametrize(("row", "temperature"), AT)
def test_the_reversals_are_those_of_the_exact_column(row: Row, temperature: float) -> None:
    assert reversal(row, temperature) == pytest.approx(row.exact[temperature], abs=0.01)


@pytest.mark.parametrize(
    ("ion", "exact"), [("K", -76.97), ("Na", 55.87), ("Cl", -61.06)], ids=["K", "Na", "Cl"]
)
def test_room_temperature_of_25_does_not_fit_the_squid(ion: str, exact: float) -> None:
    """A control: a silent default of 25 C would fail the first test."""
    (row,) = [row for row in ROWS if (row.cell, row.ion) == ("squid", ion)]
    assert reversal(row, 25) == pytest.approx(exact, abs=0.01)
    assert reversal(row, 25) != pytest.approx(row.printed, abs=0.7)


@pytest.mark.parametrize(
    ("ion", "outside", "inside", "slope", "printed", "source"),
    [
        ("K", 5, 140, 62, -89.72, JOHNSTON_WU),
        ("Cl", 4, 110, 62, -89.24, JOHNSTON_WU + "; sides exchanged for the sign of chloride"),
        ("K", 5, 140, 58, -83.93, HEALTH_PAGE + "; printed as -84"),
    ],
)
def test_where_a_print_is_off_it_used_a_round_slope(
    ion: str, outside: float, inside: float, slope: float, printed: float, source: str
) -> None:
    """58 mV per decade at 20 C and 62 at 37 C: a university's course page, looked up."""
    decades = nernst(inside, outside, 1, 37) / (thermal_voltage(37) * math.log(10))
    assert slope * decades == pytest.approx(printed, abs=0.01), (ion, source)


@pytest.mark.parametrize(
    ("celsius", "fold", "decade"),
    [
        (6.3, 24.0811, 55.449),
        (18, 25.0894, 57.770),
        (20, 25.2617, 58.167),
        (25, 25.6926, 59.159),
        (37, 26.7267, 61.540),
    ],
)
def test_the_slope_of_a_monovalent_ion(celsius: float, fold: float, decade: float) -> None:
    """Own arithmetic; R, F and 273.15 are CODATA's, from memory, sure."""
    assert thermal_voltage(celsius) == pytest.approx(fold, abs=6e-5)
    assert thermal_voltage(celsius) * math.log(10) == pytest.approx(decade, abs=6e-4)


@pytest.mark.parametrize(("celsius", "rounded"), [(20, 58), (37, 62)])
def test_the_round_slopes_of_a_course_page(celsius: float, rounded: float) -> None:
    """Looked up; that page takes the zero of the scale at 273.16 K."""
    assert thermal_voltage(celsius) * math.log(10) == pytest.approx(rounded, abs=0.5)


#: inside and outside of K, Na, Cl
AXON = ([400, 50, 52], [20, 440, 560])
NEURON = ([140, 15, 10], [5, 145, 110])


@pytest.mark.parametrize(
    ("solutions", "ratios", "celsius", "v"),
    [
        (AXON, [1, 0.04, 0.45], 18, -59.52),
        (AXON, [1, 0.04, 0.45], 20, -59.93),
        (AXON, [1, 0.04, 0.45], 25, -60.95),
        (AXON, [1, 20, 0.45], 18, 42.09),
        (AXON, [1, 20, 0.45], 20, 42.38),
        (AXON, [1, 20, 0.45], 25, 43.10),
        (NEURON, [1, 0.05, 0.45], 37, -64.94),
        (NEURON, [1, 0.05, 0.0], 37, -65.25),
    ],
)
def test_the_voltage_of_potassium_sodium_and_chloride(
    solutions: tuple[list[float], list[float]], ratios: list[float], celsius: float, v: float
) -> None:
    """Ratios at rest and at the peak of the spike: Hodgkin & Katz 1949, from memory, sure.

    The formula is that of a university's page, looked up; the values are own arithmetic.
    """
    assert ghk_voltage(ratios, *solutions, [1, 1, -1], celsius) == pytest.approx(v, abs=0.01)


@pytest.mark.parametrize(("v", "current"), [(-100, -0.62111), (0, 13.02552), (50, 29.70640)])
def test_the_constant_field_current_of_potassium(v: float, current: float) -> None:
    """P = 1e-6 cm/s, 140/5 mM, 37 C: own arithmetic, to its last digit."""
    assert ghk_current(v, 1e-6, 140, 5, 1, 37) == pytest.approx(current, abs=6e-6)


def test_the_constant_field_current_vanishes_at_the_reversal_and_rectifies_by_concentration() -> (
    None
):
    """The slopes far out are as inside to outside, 28."""
    at = ghk_current(nernst(140, 5, 1, 37), 1e-6, 140, 5, 1, 37)
    assert at == pytest.approx(0, abs=1e-12)
    inward, outward = np.diff(
        ghk_current([[-900, -800], [800, 900]], 1e-6, 140, 5, 1, 37), axis=1
    ).ravel()
    assert outward / inward == pytest.approx(28, rel=1e-9)


#: internal chloride, E_Cl, E_GABA
GABA = [
    (4, -93.0, -75.8),
    (5, -87.1, -72.7),
    (7, -78.1, -67.3),
    (10, -68.6, -60.9),
    (15, -57.7, -52.7),
    (20, -50.0, -46.5),
    (25, -44.1, -41.4),
    (30, -39.2, -37.1),
]
#: permeability ratio 0.2 to 0.4: Kaila 1994 (review), from memory, fairly sure
KAILA = Bicarbonate(16, 26, 0.25)


@pytest.mark.parametrize(("inside", "chloride", "gaba"), GABA)
def test_the_reversals_of_chloride_and_of_gaba(inside: float, chloride: float, gaba: float) -> None:
    """130 mM outside, 37 C: own arithmetic, printed to 0.1 mV."""
    assert gaba_reversal(inside, 130, 37) == pytest.approx(chloride, abs=0.05)
    assert gaba_reversal(inside, 130, 37, KAILA) == pytest.approx(gaba, abs=0.05)
    assert gaba_reversal(inside, 130, 37, KAILA) > gaba_reversal(inside, 130, 37)


def test_gaba_depolarises_below_and_then_above_threshold_as_chloride_rises() -> None:
    """Depolarising yet below threshold: Gulledge & Stuart 2003; beyond it: Staley 1992.

    Both abstracts looked up, for the order only; rest and threshold are ours.
    """
    found = [
        effect(float(gaba_reversal(inside, 130, 37, KAILA)), rest=-68, threshold=-55)
        for inside in (5, 7, 10, 15)
    ]
    assert found == [
        "hyperpolarising",
        "shunting",
        "depolarising below threshold",
        "depolarising above threshold",
    ]
