"""Reversal potentials and constant-field currents: algebra, limits, inverses."""

from __future__ import annotations

import math
from decimal import Decimal, localcontext

import numpy as np
import pytest
from hypothesis import assume, given, settings
from hypothesis import strategies as st
from scipy import constants

from plastic.membrane.ions import (
    NONE,
    Bicarbonate,
    chloride_sentence,
    effect,
    gaba_reversal,
    ghk_current,
    ghk_voltage,
    implied_chloride,
    nernst,
    thermal_voltage,
)

concentrations = st.floats(1e-4, 1e3)
temperatures = st.floats(0, 45)
valences = st.sampled_from([-3, -2, -1, 1, 2, 3])
#: permeability, inside, outside, valence of several monovalent ions
ions = st.lists(
    st.tuples(st.floats(1e-3, 1e3), concentrations, concentrations, st.sampled_from([-1, 1])),
    min_size=1,
    max_size=4,
)
#: course values of a cortical slice (invented, of the usual size)
BUFFER = Bicarbonate(16.0, 26.0, 0.25)
many = settings(max_examples=150, deadline=None)


def exact_flux(v: float, inside: float, outside: float, z: int, slope: float) -> float:
    """u (inside - outside e^-u)/(1 - e^-u) in sixty digits, where nothing cancels."""
    with localcontext() as context:
        context.prec = 60
        u = z * Decimal(v) / Decimal(slope)
        shrunk = (-u).exp()
        return float(u * (Decimal(inside) - Decimal(outside) * shrunk) / (1 - shrunk))


@pytest.mark.parametrize("celsius", [0.0, 6.3, 20.0, 37.0, 45.0])
def test_the_slope_is_that_of_boltzmann_and_the_elementary_charge(celsius: float) -> None:
    """R/F = k/e; the constants are scipy's (CODATA)."""
    kelvin = constants.convert_temperature(celsius, "Celsius", "Kelvin")
    assert thermal_voltage(celsius) == pytest.approx(1e3 * constants.k / constants.e * kelvin, 1e-9)


@given(concentrations, valences, temperatures)
@many
def test_an_e_fold_of_concentration_is_one_slope(c: float, z: int, t: float) -> None:
    expected = float(thermal_voltage(t)) / z
    assert nernst(c, c * math.e, z, t) == pytest.approx(expected, rel=1e-12)


@given(concentrations, concentrations, temperatures)
@many
def test_twice_the_valence_halves_the_reversal(i: float, o: float, t: float) -> None:
    assert nernst(i, o, 2, t) == nernst(i, o, 1, t) / 2


@given(concentrations, concentrations, valences, temperatures)
@many
def test_the_reversal_flips_its_sign_with_the_charge_and_with_the_sides(
    i: float, o: float, z: int, t: float
) -> None:
    assert nernst(i, o, -z, t) == -nernst(i, o, z, t)
    assert nernst(o, i, z, t) == -nernst(i, o, z, t)


@given(concentrations, valences, temperatures)
@many
def test_equal_sides_have_no_potential(c: float, z: int, t: float) -> None:
    assert nernst(c, c, z, t) == 0


def several(found: list[tuple[float, float, float, int]]) -> tuple[np.ndarray, ...]:
    return tuple(np.array(column, float) for column in zip(*found, strict=True))


@given(ions, temperatures)
@many
def test_the_voltage_lies_between_the_reversals_of_its_ions(
    found: list[tuple[float, float, float, int]], t: float
) -> None:
    p, i, o, z = several(found)
    e, v = nernst(i, o, z, t), ghk_voltage(p, i, o, z, t)
    assert e.min() - 1e-9 <= v <= e.max() + 1e-9


@given(ions, temperatures)
@many
def test_at_the_voltage_the_currents_of_all_ions_cancel(
    found: list[tuple[float, float, float, int]], t: float
) -> None:
    """What the equation was derived from; the currents are another formula."""
    p, i, o, z = several(found)
    currents = ghk_current(ghk_voltage(p, i, o, z, t), p, i, o, z, t)
    turnover = constants.physical_constants["Faraday constant"][0] * float((p * (i + o)).sum())
    assert abs(currents.sum()) <= 1e-10 * turnover


@given(ions, temperatures, st.floats(1e-6, 1e6))
@many
def test_only_the_ratios_of_permeabilities_matter(
    found: list[tuple[float, float, float, int]], t: float, scale: float
) -> None:
    p, i, o, z = several(found)
    assert ghk_voltage(scale * p, i, o, z, t) == pytest.approx(
        ghk_voltage(p, i, o, z, t), rel=1e-9, abs=1e-9
    )


def test_a_membrane_that_passes_one_ion_is_at_its_reversal() -> None:
    inside, outside, z = [140, 15, 10], [5, 145, 110], [1, 1, -1]
    for k in range(3):
        v = ghk_voltage(np.eye(3)[k], inside, outside, z, 37)
        assert v == pytest.approx(float(nernst(inside[k], outside[k], z[k], 37)), abs=1e-12)


def test_symmetric_solutions_have_no_voltage() -> None:
    assert ghk_voltage([1, 1, 1], [5, 145, 110], [5, 145, 110], [1, 1, -1], 20) == 0


def test_the_voltage_of_several_membranes_is_that_of_each() -> None:
    p = np.array([[1, 0.04, 0.45], [1, 20, 0.45]])
    both = ghk_voltage(p, [400, 50, 52], [20, 440, 560], [1, 1, -1], 20)
    each = [float(ghk_voltage(row, [400, 50, 52], [20, 440, 560], [1, 1, -1], 20)) for row in p]
    assert both.tolist() == each


@given(st.floats(-500, 500), concentrations, concentrations, valences, temperatures)
@many
def test_the_current_is_the_constant_field_formula_without_loss_of_digits(
    v: float, i: float, o: float, z: int, t: float
) -> None:
    """The formula as it is printed, in sixty digits. At the reversal its relative error is 1/0."""
    e = float(nernst(i, o, z, t))
    assume(abs(v) > 1e-30)  # nearer, sixty digits are not enough
    assume(abs(v - e) > 1e-3)
    exact = 96485.33212 * z * exact_flux(v, i, o, z, float(thermal_voltage(t)))
    assert ghk_current(v, 1.0, i, o, z, t) == pytest.approx(exact, rel=1e-9)


@pytest.mark.parametrize("u", [0.0, 1e-300, 1e-16, -1e-13, 1e-9, -1e-7, 9.9e-7])
@pytest.mark.parametrize(("inside", "outside"), [(140.0, 5.0), (1e-4, 2.0), (100.0, 100.0)])
def test_around_no_voltage_the_current_is_its_expansion(
    u: float, inside: float, outside: float
) -> None:
    """P z F [(i - o) + (i + o) u/2 + (i - o) u^2/12], by hand."""
    series = (inside - outside) * (1 + u**2 / 12) + (inside + outside) * u / 2
    v = u * float(thermal_voltage(37)) / 2
    found = ghk_current(v, 1e-6, inside, outside, 2, 37)
    assert found == pytest.approx(2e-6 * 96485.33212 * series, rel=1e-9, abs=1e-312)


def test_the_printed_formula_itself_would_lose_the_current_around_no_voltage() -> None:
    """A control: what the two tests above would do with the formula in plain floats."""
    u = np.array([0.0, 1e-12])
    with np.errstate(invalid="ignore"):
        plain = u * (140 - 5 * np.exp(-u)) / (1 - np.exp(-u))
    assert not np.isfinite(plain[0])
    assert plain[1] != pytest.approx(135, rel=1e-9)


@given(st.floats(-300, 300), concentrations, concentrations, valences, temperatures)
@many
def test_the_current_is_outward_above_the_reversal_and_inward_below(
    v: float, i: float, o: float, z: int, t: float
) -> None:
    e = float(nernst(i, o, z, t))
    assume(abs(v - e) > 1e-6)
    assert np.sign(ghk_current(v, 1.0, i, o, z, t)) == np.sign(v - e)


@given(st.floats(-300, 300), concentrations, concentrations, valences, temperatures)
@many
def test_the_current_flips_with_charge_and_voltage(
    v: float, i: float, o: float, z: int, t: float
) -> None:
    assert ghk_current(-v, 1.0, i, o, -z, t) == -ghk_current(v, 1.0, i, o, z, t)


def test_equal_sides_are_an_ohmic_resistor() -> None:
    v = np.array([-90.0, -1e-12, 0.0, 1e-9, 40.0])
    expected = 96485.33212 * 4 * 3.0 * v / float(thermal_voltage(20))
    assert ghk_current(v, 1.0, 3.0, 3.0, 2, 20) == pytest.approx(expected, rel=1e-12)


def test_the_current_is_finite_as_far_as_voltages_go() -> None:
    v = np.array([-1000.0, 1000.0])
    found = ghk_current(v, 1.0, 140.0, 5.0, 3, 0.0)
    expected = 96485.33212 * 9 * v / float(thermal_voltage(0)) * np.array([5.0, 140.0])
    assert found == pytest.approx(expected, rel=1e-12)


@given(concentrations, concentrations, temperatures)
@many
def test_without_bicarbonate_gaba_reverses_with_chloride(i: float, o: float, t: float) -> None:
    assert gaba_reversal(i, o, t) == nernst(i, o, -1, t)
    assert gaba_reversal(i, o, t, Bicarbonate(16, 26, 0)) == nernst(i, o, -1, t)


@given(concentrations, concentrations, concentrations, concentrations, st.floats(0, 10))
@many
def test_gaba_reverses_between_chloride_and_bicarbonate(
    i: float, o: float, more_i: float, more_o: float, ratio: float
) -> None:
    ends = sorted([float(nernst(i, o, -1, 37)), float(nernst(more_i, more_o, -1, 37))])
    found = gaba_reversal(i, o, 37, Bicarbonate(more_i, more_o, ratio))
    assert ends[0] - 1e-9 <= found <= ends[1] + 1e-9


@given(st.floats(1, 150), st.floats(1, 150), temperatures, st.floats(0, 1))
@many
def test_the_implied_chloride_is_the_one_that_gave_the_reversal(
    i: float, o: float, t: float, ratio: float
) -> None:
    salt = Bicarbonate(16, 26, ratio)
    assert implied_chloride(gaba_reversal(i, o, t, salt), o, t, salt) == pytest.approx(i, rel=1e-11)


@given(st.floats(-94, 200), st.sampled_from([NONE, BUFFER]))
@many
def test_the_reversal_of_an_implied_chloride_is_the_one_asked_for(
    e: float, salt: Bicarbonate
) -> None:
    inside = implied_chloride(e, 130, 37, salt)
    assert gaba_reversal(inside, 130, 37, salt) == pytest.approx(e, abs=1e-9)


def test_implied_chloride_by_hand() -> None:
    """130 x 10^(-80/61.540), with bicarbonate 136.5 x the same - 4; 61.540 mV is a decade."""
    fold = 10 ** (-80 / 61.540)
    assert implied_chloride(-80, 130, 37) == pytest.approx(130 * fold, rel=1e-4)
    assert implied_chloride(-80, 130, 37, BUFFER) == pytest.approx(136.5 * fold - 4, rel=1e-3)


def test_a_sentence_tells_the_chloride_of_a_reversal() -> None:
    alone = "E_inh = -80 mV implies 6.52 mM internal chloride (130 mM outside, 37 C)"
    with_buffer = (
        "; with bicarbonate (16 mM inside, 26 mM outside, permeability ratio 0.25): 2.84 mM"
    )
    assert chloride_sentence(-80, 130, 37) == alone
    assert chloride_sentence(-80, 130, 37, BUFFER) == alone + with_buffer


def test_a_sentence_tells_when_no_chloride_gives_the_reversal() -> None:
    """The lowest is 61.540 mV x log10(4/136.5) = -94.35 mV."""
    said = chloride_sentence(-95, 130, 37, BUFFER)
    assert said.startswith("E_inh = -95 mV implies 3.72 mM internal chloride")
    assert said.endswith(
        ": none, the reversal must be above -94.35 mV, "
        "which bicarbonate gives with no chloride inside"
    )


@pytest.mark.parametrize(
    ("reversal", "name"),
    [
        (-90.0, "hyperpolarising"),
        (-69.1, "hyperpolarising"),
        (-69.0, "shunting"),
        (-68.0, "shunting"),
        (-67.0, "shunting"),
        (-66.9, "depolarising below threshold"),
        (-55.0, "depolarising below threshold"),
        (-54.9, "depolarising above threshold"),
        (0.0, "depolarising above threshold"),
    ],
)
def test_a_reversal_is_named_by_rest_and_threshold(reversal: float, name: str) -> None:
    assert effect(reversal, rest=-68, threshold=-55) == name


@given(st.floats(-200, 200), st.floats(-100, -60), st.floats(0.01, 60))
@many
def test_every_reversal_has_a_name(e: float, rest: float, above: float) -> None:
    names = ("hyperpolarising", "shunting", "depolarising")
    assert effect(e, rest, rest + above).startswith(names)


def test_how_near_to_rest_is_a_shunt_can_be_said() -> None:
    assert effect(-70, -68, -55, within=3) == "shunting"
    assert effect(-68.001, -68, -55, within=0) == "hyperpolarising"
