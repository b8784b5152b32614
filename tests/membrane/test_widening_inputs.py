"""Widening under other inputs than a weak steady one: limits, frequencies, many synapses.

Theorems and digits are our own, computed before this package existed; none is a measurement.
"""

from __future__ import annotations

import cmath
import math

import numpy as np
import pytest
from numpy.typing import NDArray

from plastic.membrane.cable import (
    Dendrite,
    build_tree,
    conductances,
    g_inf,
    lambda_um,
    leaks,
)
from plastic.membrane.inhibition import steady_voltages

RM, RI, TAU, E = 20_000.0, 150.0, 20.0, 65.0
LONE = 0.63  # nS: a sphere of 20 um at 20 kohm cm^2
Floats = NDArray[np.float64]


def tip(diameter: float, length: float, load: float, g: float) -> float:
    """Steady voltage of the soma for a conductance at the tip, mV."""
    tree = build_tree({"d": Dendrite(length, diameter)}, [("d", length)], 0)
    return float(steady_voltages(conductances(tree, load, RM, RI), [1], g, E)[0])


def closed(diameter: float, length: float, load: float, g: float) -> float:
    """The same from Rall's cable in SI units: g E R_sx/(1 + g R_xx)."""
    d, lam = diameter * 1e-6, math.sqrt(diameter * 1e-6 / 4 * (RM * 1e-4) / (RI * 1e-2))
    G, L = math.pi * d**1.5 / (2 * math.sqrt(RM * 1e-4 * RI * 1e-2)), length * 1e-6 / lam
    total = load * 1e-9 * math.cosh(L) + G * math.sinh(L)
    local = (math.cosh(L) + load * 1e-9 / G * math.sinh(L)) / total
    return g * 1e-9 * E / total / (1 + g * 1e-9 * local)


@pytest.mark.parametrize(
    ("diameter", "length", "load", "g", "printed"),
    [
        pytest.param(2.0, 500, LONE, 1e-6, "-11", id="lone small soma, weak"),
        pytest.param(2.0, 500, 10.0, 1e-6, "+0.1", id="trunk on 10 nS, weak"),
        pytest.param(2.0, 500, 10.0, 1.0, "+5", id="trunk on 10 nS, 1 nS"),
        pytest.param(0.5, 200, 10.0, 1.0, "+22", id="thin basal on 10 nS, 1 nS"),
    ],
)
def test_a_fifth_wider_changes_the_four_cases_as_printed(
    diameter: float, length: float, load: float, g: float, printed: str
) -> None:
    """Percent at the soma, to the printed digits, and to 1e-9 of the continuous cable."""
    ratio = tip(1.2 * diameter, length, load, g) / tip(diameter, length, load, g)
    exact = closed(1.2 * diameter, length, load, g) / closed(diameter, length, load, g)
    assert ratio == pytest.approx(exact, rel=1e-9)
    decimals = len(printed.partition(".")[2])
    assert f"{100 * (ratio - 1):+.{decimals}f}" == printed


def slope(diameter: float, length: float, load: float, g: float = 1e-7) -> float:
    """d log V_soma / d log diameter for a tip input."""
    h = 1e-3
    up, down = (tip(diameter * math.exp(u), length, load, g) for u in (h, -h))
    return math.log(up / down) / (2 * h)


def test_a_dendrite_alone_gains_only_beyond_three_length_constants() -> None:
    """No soma: the sign turns where L coth L = 3, L = 2.98470."""
    assert 2.98470 / math.tanh(2.98470) == pytest.approx(3, abs=2e-5)
    lam = float(lambda_um(1.0, RM, RI))
    below, above = (slope(1.0, L * lam, 0.0) for L in (2.98, 2.99))
    assert below < 0 < above


@pytest.mark.parametrize("L", [0.2, 1.0, 2.0])
def test_towards_a_clamped_soma_a_wider_dendrite_never_hurts(L: float) -> None:
    """G_soma much larger than all else: S_DC tends to (L/2) tanh L."""
    lam = float(lambda_um(1.0, RM, RI))
    assert slope(1.0, L * lam, 1e8) == pytest.approx(L / 2 * math.tanh(L), abs=1e-5)


@pytest.mark.parametrize(("place", "limit"), [(1.0, 2.0), (0.5, 8 / 3)])
def test_on_a_short_dendrite_the_load_times_the_axial_resistance_decides(
    place: float, limit: float
) -> None:
    """S_DC > 0 iff G_s R_ax (eta - eta^2/2) > 1 for L << 1: 2 at the tip, 2.67 in the middle."""
    length = 10.0
    axial = 4 * RI * length * 1e-4 / (math.pi * 1e-8) / 1e9  # Gohm
    tree = build_tree({"d": Dendrite(length, 1.0)}, [("d", place * length)], 0)

    def sign(load: float) -> float:
        up, down = (
            steady_voltages(conductances(tree, load, RM, RI, math.exp(u)), [1], 1e-9, E)[0]
            for u in (0.01, -0.01)
        )
        return float(np.sign(up - down))

    assert (sign(0.99 * limit / axial), sign(1.01 * limit / axial)) == (-1, 1)


# ---- a sinusoidal current at the tip


def sinusoid(diameter: float, length: float, load: float, hertz: float, pieces: int = 120) -> float:
    """Amplitude at the soma per current at the tip; the soma has the time constant of the rest."""
    tree = build_tree({"d": Dendrite(length, diameter)}, [("d", length)], pieces - 1)
    G, C = conductances(tree, load, RM, RI), TAU * leaks(tree, load, RM, RI)
    matrix = G + 2j * math.pi * hertz / 1000 * np.diag(C)
    return float(abs(np.linalg.solve(matrix, np.eye(len(G))[tree.node_of["d", length]])[0]))


def fast_slope(diameter: float, length: float, load: float, hertz: float) -> float:
    """Re S_DC with L -> q L and B -> q B, q^2 = 1 + i w tau."""
    q = cmath.sqrt(1 + 2j * math.pi * hertz / 1000 * TAU)
    L = q * length / float(lambda_um(diameter, RM, RI))
    B = q * load / float(g_inf(diameter, RM, RI))
    top = L / 2 * (B * cmath.sinh(L) + cmath.cosh(L)) - 1.5 * cmath.sinh(L)
    return (top / (B * cmath.cosh(L) + cmath.sinh(L))).real


@pytest.mark.parametrize(
    ("diameter", "load", "hertz", "printed"),
    [
        (2.0, 10.0, 0, 0.031),
        (2.0, 10.0, 10, 0.053),
        (2.0, 10.0, 50, 0.394),
        (2.0, 10.0, 100, 0.754),
        (2.0, LONE, 0, -0.596),
        (2.0, LONE, 10, -0.588),
        (2.0, LONE, 50, -0.418),
        (2.0, LONE, 100, -0.076),
        (2.0, LONE, 111.6, 0.0),
        (4.0, 10.0, 54.2, 0.0),
    ],
)
def test_fast_signals_favour_widening(
    diameter: float, load: float, hertz: float, printed: float
) -> None:
    """500 um; the closed form has the printed digits, the finely cut network the closed form."""
    h = 1e-3
    up, down = (sinusoid(diameter * math.exp(u), 500, load, hertz) for u in (h, -h))
    exact = fast_slope(diameter, 500, load, hertz)
    assert exact == pytest.approx(printed, abs=6e-4)
    assert math.log(up / down) / (2 * h) == pytest.approx(exact, abs=2e-4)


# ---- synapses all along the dendrite


def spread_slope(diameter: float, length: float, load: float, total: float) -> float:
    """d log V_soma / d log diameter under `total` nS spread evenly over the dendrite."""
    pieces, h = 200, 1e-3
    places = [("d", length * (k + 1) / pieces) for k in range(pieces)]
    share = np.full(pieces + 1, total / pieces)
    share[[0, -1]] /= 2
    tree = build_tree({"d": Dendrite(length, diameter)}, places, 0)
    up, down = (
        steady_voltages(
            conductances(tree, load, RM, RI, math.exp(u)), np.arange(pieces + 1), share, E
        )[0]
        for u in (h, -h)
    )
    return math.log(up / down) / (2 * h)


@pytest.mark.parametrize(
    ("diameter", "length", "load", "printed"),
    [
        (2.0, 500, 0.0, (-1.000, -0.611, -0.239, -0.073)),
        (2.0, 500, LONE, (-0.657, -0.423, -0.145, -0.013)),
        (2.0, 500, 10.0, (-0.030, 0.073, 0.285, 0.416)),
        (2.0, 500, 20.0, (0.034, 0.139, 0.380, 0.571)),
        (4.0, 500, 10.0, (-0.184, -0.144, -0.035, 0.110)),
        (0.5, 200, 10.0, (0.056, 0.533, 0.794, 0.728)),
    ],
)
def test_synapses_all_along_gain_only_on_a_loaded_dendrite(
    diameter: float, length: float, load: float, printed: tuple[float, ...]
) -> None:
    """Weak, 1, 5 and 20 nS in all. Without a soma always a loss: dendritic constancy (idea of
    Cuntz, Bird et al., looked up); digits of the closed form, computed.
    """
    found = [spread_slope(diameter, length, load, g) for g in (1e-6, 1.0, 5.0, 20.0)]
    assert found == pytest.approx(printed, abs=6e-4)


@pytest.mark.parametrize("total", [0.1, 1.0, 20.0])
def test_without_a_soma_the_loss_is_one_minus_the_saturation(total: float) -> None:
    """S = -(1 - V/E), whatever the length; V/E = gamma/(gamma + pi d/Rm)."""
    for length in (200.0, 500.0):
        membrane = math.pi * 2e-4 * length * 1e-4 / RM * 1e9  # nS
        expected = -membrane / (membrane + total)
        assert spread_slope(2.0, length, 0.0, total) == pytest.approx(expected, abs=1e-5)
