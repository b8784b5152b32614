"""What the formulas of ions refuse: every number by its name, with what is allowed."""

from __future__ import annotations

import math
from collections.abc import Callable

import numpy as np
import pytest

from plastic.membrane.ions import (
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

CELSIUS = "from 0 C to 45 C"
SALT = "above 0 mM and finite"
CHARGE = "a whole number other than 0"
PASSING = "0 or more and finite"
VOLTS = "from -1000 mV to 1000 mV"
BUFFER = Bicarbonate(16, 26, 0.25)
ALONE = "above -94.35 mV, which bicarbonate gives with no chloride inside"

Call = Callable[[], object]
CASES: list[tuple[Call, str, str]] = [
    (lambda: nernst(140, 5, 1, 46), "temperature = 46 C", CELSIUS),
    (lambda: thermal_voltage(310.15), "temperature = 310.15 C", CELSIUS),
    (lambda: gaba_reversal(7, 130, -0.1), "temperature = -0.1 C", CELSIUS),
    (lambda: ghk_voltage([1], [5], [5], [1], math.nan), "temperature = nan C", CELSIUS),
    (lambda: ghk_current(0, 1, 140, 5, 1, [20, 50]), "temperature = 50 C", CELSIUS),
    (lambda: implied_chloride(-80, 130, 99), "temperature = 99 C", CELSIUS),
    (lambda: chloride_sentence(-80, 130, -3), "temperature = -3 C", CELSIUS),
    (lambda: nernst(0, 5, 1, 20), "inside = 0 mM", SALT),
    (lambda: nernst([140, -3], 5, 1, 20), "inside = -3 mM", SALT),
    (lambda: ghk_current(0, 1, 140, -5, 1, 20), "outside = -5 mM", SALT),
    (lambda: ghk_voltage([1, 1], [5, math.nan], [5, 5], [1, 1], 20), "inside = nan mM", SALT),
    (lambda: gaba_reversal(0, 130, 20, BUFFER), "chloride inside = 0 mM", SALT),
    (lambda: gaba_reversal(7, math.inf, 20), "chloride outside = inf mM", SALT),
    (lambda: implied_chloride(-70, 0, 20), "chloride outside = 0 mM", SALT),
    (lambda: Bicarbonate(0, 26, 0.25), "bicarbonate inside = 0 mM", SALT),
    (lambda: Bicarbonate(16, -1, 0.25), "bicarbonate outside = -1 mM", SALT),
    (lambda: Bicarbonate(16, 26, -0.25), "permeability ratio = -0.25", PASSING),
    (lambda: ghk_voltage([1, -1], [5, 5], [5, 5], [1, 1], 20), "permeability = -1", PASSING),
    (lambda: ghk_current(0, -1e-6, 140, 5, 1, 20), "permeability = -1e-06 cm/s", PASSING),
    (
        lambda: ghk_voltage([0, 0], [5, 5], [5, 5], [1, 1], 20),
        "largest permeability = 0",
        "above 0",
    ),
    (lambda: nernst(140, 5, 0, 20), "valence = 0", CHARGE),
    (lambda: ghk_current(0, 1, 140, 5, 0.5, 20), "valence = 0.5", CHARGE),
    (lambda: ghk_voltage([1, 1], [1, 140], [2, 5], [2, 1], 20), "valence = 2", "1 or -1"),
    (lambda: ghk_current(-1001, 1, 140, 5, 1, 20), "v = -1001 mV", VOLTS),
    (lambda: implied_chloride(math.nan, 130, 37), "reversal = nan mV", VOLTS),
    (lambda: implied_chloride([-80, -95], 130, 37, BUFFER), "reversal = -95 mV", ALONE),
    (lambda: effect(-70, -50, -55), "rest = -50 mV", "below the threshold, -55 mV"),
    (lambda: effect(-70, -55, -55), "rest = -55 mV", "below the threshold, -55 mV"),
    (lambda: effect(-70, -68, math.inf), "threshold = inf mV", VOLTS),
]


@pytest.mark.parametrize(("call", "number", "allowed"), CASES, ids=[f"{c[1]}" for c in CASES])
def test_a_number_out_of_range_is_named_with_what_is_allowed(
    call: Call, number: str, allowed: str
) -> None:
    with pytest.raises(ValueError, match="must be") as caught:
        call()
    assert str(caught.value) == f"{number}: must be {allowed}"


@pytest.mark.parametrize("celsius", [0.0, 45.0])
def test_the_ends_of_the_range_of_temperatures_are_allowed(celsius: float) -> None:
    assert np.isfinite(nernst(140, 5, 1, celsius))
