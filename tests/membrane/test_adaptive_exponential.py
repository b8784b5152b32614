"""The adaptive exponential neuron: closed forms by root finding, the reference by scipy."""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from numpy.typing import NDArray
from scipy.integrate import solve_ivp
from scipy.optimize import brentq, minimize_scalar

from plastic.errors import UnknownName
from plastic.membrane.adaptive_exponential import (
    PATTERN_CURRENT,
    AdaptiveExponential,
    adaptive_exponential,
)

Floats = NDArray[np.float64]
every_pattern = pytest.mark.parametrize("name", PATTERN_CURRENT)


@dataclass(frozen=True)
class Printed:
    """The printed equations, by another road than the package."""

    cell: AdaptiveExponential

    def slopes(self, v: float, w: float, current: float) -> tuple[float, float]:
        c = self.cell
        spiking = c.leak * c.slope * np.exp((v - c.threshold) / c.slope)
        dv = (-c.leak * (v - c.rest) + spiking - w + current) / c.capacitance
        return dv, (c.a * (v - c.rest) - w) / c.tau_w

    def holding(self, v: float) -> float:
        """Current at which V = v is a fixed point."""
        return -self.slopes(v, self.cell.a * (v - self.cell.rest), 0.0)[0] * self.cell.capacitance

    def growth(self, v: float) -> float:
        """Largest real part of the eigenvalues of a numerical Jacobian at a fixed point, 1/ms."""
        w, h = self.cell.a * (v - self.cell.rest), 1e-5
        columns = [
            np.subtract(self.slopes(v + a, w + b, 0), self.slopes(v - a, w - b, 0)) / (2 * h)
            for a, b in ((h, 0.0), (0.0, h))
        ]
        return float(np.linalg.eigvals(np.array(columns).T).real.max())

    def spikes(self, current: float, duration: float) -> Floats:
        """Spike times by scipy, ms."""
        c, t, y, found = self.cell, 0.0, [self.cell.rest, 0.0], []

        def peak(_: float, y: Floats) -> float:
            return float(y[0] - c.peak)

        def right(_: float, y: Floats) -> tuple[float, float]:
            return self.slopes(min(y[0], c.peak + 1), y[1], current)

        peak.terminal = True  # type: ignore[attr-defined]
        while True:
            s = solve_ivp(right, (t, duration), y, "DOP853", events=peak, rtol=1e-9, atol=1e-10)
            if s.status != 1:
                return np.array(found)
            t, y = float(s.t[-1]), [c.reset, s.y[1, -1] + c.b]
            found.append(t)


cells = st.builds(
    AdaptiveExponential,
    capacitance=st.floats(50, 400),
    leak=st.floats(3, 40),
    a=st.floats(-2, 30),
    tau_w=st.floats(20, 400),
    slope=st.floats(0.5, 4),
)


@given(cells)
@settings(max_examples=60, deadline=None)
def test_the_saddle_node_is_the_largest_current_that_can_be_held(cell: AdaptiveExponential) -> None:
    printed = Printed(cell)
    top = minimize_scalar(
        lambda v: -printed.holding(v),
        bounds=(cell.rest, cell.threshold + 10 * cell.slope),
        method="bounded",
        options={"xatol": 1e-9},
    )
    assert cell.saddle_node == pytest.approx(-top.fun, rel=1e-9)


@given(cells)
@settings(max_examples=60, deadline=None)
def test_rest_loses_its_stability_at_the_rheobase(cell: AdaptiveExponential) -> None:
    """The lower fixed point, followed upwards until an eigenvalue crosses to the right."""
    printed = Printed(cell)
    fold = cell.threshold + cell.slope * math.log1p(cell.a / cell.leak)
    edge = fold - 1e-4 * cell.slope
    if printed.growth(edge) > 0:  # lost before the fold
        low = cell.threshold - 30 * cell.slope
        lost = float(brentq(printed.growth, low, edge, xtol=1e-10))
    else:
        lost = fold
    assert cell.rheobase == pytest.approx(printed.holding(lost), abs=2e-4, rel=1e-6)


def test_without_a_resting_point_there_is_no_rheobase() -> None:
    """a <= -g_L: what holds V falls all the way as V rises, so nothing turns round."""
    cell = AdaptiveExponential(a=-30.0)
    holding = [Printed(cell).holding(v) for v in np.linspace(-90, -40, 50)]
    assert np.all(np.diff(holding) < 0)
    with pytest.raises(ValueError, match=r"a = -30.0 nS: must be above -leak = -30.0 nS"):
        _ = cell.rheobase


@every_pattern
def test_the_reference_has_the_spikes_of_an_ode_solver(name: str) -> None:
    """150 ms under the pattern's current; largest difference found 3e-5 ms (irregular: chaos)."""
    cell, current = AdaptiveExponential.from_set(name), PATTERN_CURRENT[name]
    expected = Printed(cell).spikes(current, 150.0)
    found = adaptive_exponential(cell, lambda t: current, 150.0).spikes
    assert len(expected) >= 1
    assert found == pytest.approx(expected, abs=1e-4)


def test_a_peak_that_cuts_off_earlier_or_later_hardly_moves_the_spikes() -> None:
    """The upswing beyond V_T + 10 D takes C/g_L e^-10, less than a microsecond."""
    times = [
        adaptive_exponential(
            AdaptiveExponential.from_set("tonic", peak=peak), lambda t: 500.0, 60.0
        ).spikes
        for peak in (-30.0, 0.0, 20.0)
    ]
    assert len(times[0]) > 4
    assert times[1] == pytest.approx(times[0], abs=0.02)
    assert times[2] == pytest.approx(times[1], abs=1e-6)


def test_far_below_its_threshold_it_is_a_leaky_membrane_with_a_resonance() -> None:
    """Two coupled linear equations; their matrix exponential by the eigenvalues (numpy)."""
    cell = AdaptiveExponential(threshold=200.0)
    found = adaptive_exponential(cell, lambda t: 0.0, 300.0, start=(cell.rest - 10, 0.0))
    A = np.array(
        [[-cell.leak / cell.capacitance, -1 / cell.capacitance], [cell.a / cell.tau_w, -1 / 144.0]]
    )
    values, vectors = np.linalg.eig(A)
    at = np.linalg.solve(vectors, [-10.0, 0.0])[:, None] * np.exp(np.outer(values, found.t))
    v, w = (vectors @ at).real
    assert found.spikes.size == 0
    assert found.v - cell.rest == pytest.approx(v, abs=1e-7)
    assert found.w == pytest.approx(w, abs=1e-7)


def test_without_adaptation_a_steep_slope_is_a_leaky_neuron() -> None:
    """a = b = 0: as D falls the interval tends to tau ln[(V_inf - V_r)/(V_inf - V_T)] from above.

    V must climb by about D ln[(V_inf - V_T)/D] beyond V_T before the upswing is certain.
    """
    expected, late = 281 / 30 * math.log(30 / (30 - 20.2)), []
    for slope in (0.4, 0.1, 0.025):
        cell = AdaptiveExponential(slope=slope, a=0.0, b=0.0, peak=-48.0)
        found = np.diff(adaptive_exponential(cell, lambda t: 900.0, 25.0).spikes)
        late.append(float(found[0] - expected) / (slope * math.log(9.8 / slope)))
    assert late == pytest.approx([281 / 30 / 9.8] * 3, rel=0.2)


def test_a_spike_resets_the_voltage_and_adds_to_the_adaptation() -> None:
    cell = AdaptiveExponential()
    found = adaptive_exponential(cell, lambda t: 1000.0, 15.0)
    after = int(np.searchsorted(found.t, found.spikes[0]))
    assert found.v[after] == cell.reset
    assert found.w[after] - found.w[after - 1] == pytest.approx(cell.b, abs=1e-6)


def test_a_current_that_moves_is_followed() -> None:
    """Nothing before its onset; then as from the start."""
    cell = AdaptiveExponential()
    late = adaptive_exponential(cell, lambda t: 900.0 if t >= 50 else 0.0, 90.0).spikes
    soon = adaptive_exponential(cell, lambda t: 900.0, 40.0).spikes
    assert late - 50 == pytest.approx(soon, abs=0.1)


def test_an_unknown_pattern_is_named_with_the_nearest_one() -> None:
    with pytest.raises(UnknownName, match="did you mean 'adapting'"):
        AdaptiveExponential.from_set("adaptin")
    assert set(PATTERN_CURRENT) | {"brette_gerstner"} == set(AdaptiveExponential.sets)
