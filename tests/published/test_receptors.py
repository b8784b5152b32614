"""Time courses against textbook closed forms, block and kinetics against publications."""

from __future__ import annotations

import numpy as np
import pytest
from scipy.optimize import minimize_scalar
from scipy.special import lambertw

from plastic.membrane.receptors import (
    GABA_A_Q10,
    KINETICS,
    MAGNESIUM,
    area,
    at_temperature,
    conductance,
    norm,
    peak_time,
)

#: rise, decay, time to peak, f, area (textbook closed forms; digits computed)
TABLE = [
    (0.2, 2, 0.51169, 1.435055, 2.58310),
    (0.5, 3, 1.07506, 1.717163, 4.29291),
    (0.5, 5, 1.27921, 1.435055, 6.45775),
    (0.5, 8, 1.47871, 1.283227, 9.62420),
    (2, 75, 7.44728, 1.134652, 82.82957),
    (2, 100, 7.98372, 1.105215, 108.31107),
    (5, 50, 12.79214, 1.435055, 64.57748),
]


@pytest.mark.parametrize(("rise", "decay", "top", "f", "total"), TABLE)
def test_peak_time_norm_and_area_of_the_dual_exponential(
    rise: float, decay: float, top: float, f: float, total: float
) -> None:
    assert peak_time(rise, decay) == pytest.approx(top, abs=1e-5)
    assert norm(rise, decay) == pytest.approx(f, abs=1e-6)
    assert area(rise, decay) == pytest.approx(total, abs=1e-5)


@pytest.mark.parametrize(("rise", "decay", "top", "f", "total"), TABLE)
def test_the_course_is_the_normalised_difference_of_exponentials(
    rise: float, decay: float, top: float, f: float, total: float
) -> None:
    """f (e^(-t/decay) - e^(-t/rise)), and its maximum by a numerical search (scipy)."""
    t = np.linspace(0, 6 * decay, 200)
    plain = f * (np.exp(-t / decay) - np.exp(-t / rise))
    assert conductance(t, rise, decay) == pytest.approx(plain, abs=1e-6)
    found = minimize_scalar(
        lambda x: -float(conductance(x, rise, decay)), bounds=(0, 5 * top), method="bounded"
    )
    assert found.x == pytest.approx(top, rel=1e-4)
    assert -found.fun == pytest.approx(1, abs=1e-8)


def test_the_other_closed_form_of_the_norm() -> None:
    """(tau_d/tau_r)^(tau_r/(tau_d - tau_r)) tau_d/(tau_d - tau_r)."""
    for rise, decay, *_ in TABLE:
        other = (decay / rise) ** (rise / (decay - rise)) * decay / (decay - rise)
        assert norm(rise, decay) == pytest.approx(other, rel=1e-12)


@pytest.mark.parametrize("tau", [0.5, 2.0, 40.0])
def test_equal_constants_are_the_alpha_function(tau: float) -> None:
    """g = (t/tp) e^(1 - t/tp); peak at tp, area e tp (textbook; Rall 1967, from memory)."""
    t = np.linspace(0, 20 * tau, 300)
    assert conductance(t, tau, tau) == pytest.approx(t / tau * np.exp(1 - t / tau), rel=1e-12)
    assert peak_time(tau, tau) == tau
    assert area(tau, tau) == pytest.approx(np.e * tau, rel=1e-14)


# ---- magnesium: Jahr & Stevens 1990; formula with 3.57 mM and 0.062/mV looked up second hand

JAHR_STEVENS = MAGNESIUM["jahr_stevens"]
VOLTAGES = (-80, -70, -60, -50, -40, -20, 0, 20, 40)


#: mM, V_half, B at each voltage
BLOCKED = [
    (0.1, -57.66, "20023 31759 46385 61660 74935 91175 97275 99196 99766"),
    (0.5, -31.71, "04768 08515 14751 24337 37419 67386 87715 96105 98841"),
    (1.0, -20.53, "02442 04447 07963 13854 23016 50814 78118 92502 97708"),
    (1.2, -17.58, "02044 03734 06725 11818 19945 46263 74843 91135 97262"),
    (2.0, -9.35, "01236 02274 04146 07443 13004 34061 64093 86050 95519"),
]


@pytest.mark.parametrize(("mg", "half", "shares"), BLOCKED)
def test_the_block_has_the_values_of_its_formula(mg: float, half: float, shares: str) -> None:
    """1/(1 + [Mg]/3.57 e^(-0.062 V)), digits computed from it."""
    digits = [float(f"0.{one}") for one in shares.split()]
    assert JAHR_STEVENS.unblocked(VOLTAGES, mg) == pytest.approx(digits, abs=1e-5)
    assert JAHR_STEVENS.half(mg) == pytest.approx(half, abs=6e-3)


def test_depolarisation_to_minus_twenty_frees_eleven_times_more_than_rest() -> None:
    """B(-40)/B(-70) and B(-20)/B(-70) at 1 mM (computed from the formula)."""
    at = JAHR_STEVENS.unblocked([-70.0, -40.0, -20.0], 1.0)
    assert at[1:] / at[0] == pytest.approx([5.175, 11.43], rel=5e-4)


@pytest.mark.parametrize(("mg", "voltage"), [(1.0, -26.96), (1.2, -25.81), (2.0, -23.03)])
def test_the_inward_current_is_largest_below_zero_and_has_a_negative_slope_at_rest(
    mg: float, voltage: float
) -> None:
    """Of B(V) V, reversal 0: the minimum is at -(1 + W)/0.062, W = lambertw(3.57/(e [Mg]))."""

    def current(v: float) -> float:
        return float(JAHR_STEVENS.unblocked(v, mg)) * v

    found = minimize_scalar(current, bounds=(-80, 0), method="bounded", options={"xatol": 1e-9})
    exact = -(1 + lambertw(3.57 / mg / np.e).real) / 0.062
    assert found.x == pytest.approx(exact, abs=1e-5)
    assert exact == pytest.approx(voltage, abs=6e-3)
    for v in (-60.0, -70.0):
        assert current(v + 0.1) < current(v)


def test_the_other_published_blocks_lie_near_it() -> None:
    """K0 and slope from memory: same sign and size, 1 to 6 % free at -70 mV and 1 mM."""
    for block in MAGNESIUM.values():
        assert 0.01 < float(block.unblocked(-70.0, 1.0)) < 0.06
        assert float(block.unblocked(40.0, 1.0)) > 0.97


# ---- measured time courses: ranges only


@pytest.mark.parametrize(
    ("name", "low", "high"),
    [
        ("ampa", 2, 6),  # patches 2-3 ms at 22 C (from memory, fairly sure); 5.3: pulse kinetics
        ("nmda", 50, 150),  # at 32-37 C (from memory, fairly sure)
        ("gaba_a", 4.2, 7.2),  # at 34-35 C, Otis & Mody 1992 (looked up)
    ],
)
def test_the_default_decay_is_within_the_measured_range(name: str, low: float, high: float) -> None:
    assert low <= KINETICS[name].decay <= high


def test_gaba_a_decays_with_a_temperature_coefficient_of_about_two() -> None:
    """Q10 2.1 of the decay rate from 22 to 37 C, Otis & Mody 1992 (looked up)."""
    slow = at_temperature(KINETICS["gaba_a"].decay, GABA_A_Q10, 34.5, 22.0)
    assert slow == pytest.approx(KINETICS["gaba_a"].decay * 2.1**1.25, rel=1e-12)
