"""The dual-exponential and alpha time courses against their textbook closed forms."""

from __future__ import annotations

import numpy as np
import pytest
from scipy.optimize import minimize_scalar

from plastic.membrane.receptors import area, conductance, norm, peak_time

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
