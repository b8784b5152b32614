"""Rall's cable theory; digits without a source of their own are computed from its formulas."""

from __future__ import annotations

import math

import numpy as np
import pytest
from numpy.typing import NDArray
from scipy.linalg import expm

from plastic.membrane.cable import (
    Dendrite,
    Tree,
    build_tree,
    conductances,
    g_inf,
    input_resistance,
    lambda_um,
    leaks,
    pi_equivalent,
    stub,
    transfer_resistance,
)

RM, RI, TAU = 20_000.0, 150.0, 20.0
Floats = NDArray[np.float64]


def cylinder(
    L: float, rho: float, pieces: int, *, diameter: float = 2.0, places: tuple[float, ...] = ()
) -> tuple[Tree, Floats, Floats]:
    """Tree, G and C of a sealed cylinder of L lambda on a soma with G_inf/G_soma = rho."""
    length = L * float(lambda_um(diameter, RM, RI))
    marks = [("d", length * x) for x in (*places, 1.0)]
    tree = build_tree({"d": Dendrite(length, diameter)}, marks, pieces - 1)
    load = 0.0 if math.isinf(rho) else float(g_inf(diameter, RM, RI)) / rho
    return tree, conductances(tree, load, RM, RI), TAU * leaks(tree, load, RM, RI)


def time_constants(G: Floats, C: Floats) -> Floats:
    """All time constants, ms, the slowest first."""
    root = np.sqrt(C)
    rates = np.linalg.eigvalsh(G / root[:, None] / root[None, :])
    return np.asarray(1 / rates)


def test_the_length_constant_and_resistances_of_textbook_cables() -> None:
    """a 2 um, r_L 1 kohm mm, r_m 1 Mohm mm^2 (Dayan & Abbott); d 4 um, Rm 20 000, Ri 200 (Koch).

    Parameters from memory, fairly sure. Semi-infinite resistance; half of it for the infinite one.
    """
    assert lambda_um(4.0, 1e4, 100.0) == pytest.approx(1000, rel=1e-12)
    assert 1000 / g_inf(4.0, 1e4, 100.0) == pytest.approx(79.577, abs=5e-4)
    assert lambda_um(4.0, 2e4, 200.0) == pytest.approx(1000, rel=1e-12)
    assert 1000 / g_inf(4.0, 2e4, 200.0) == pytest.approx(159.155, abs=5e-4)


@pytest.mark.parametrize(
    ("diameter", "lam", "L", "semi", "sealed", "killed", "tip"),
    [
        (1.0, 577.350, 0.86603, 1102.658, 1576.691, 771.143, 0.714780),
        (2.0, 816.497, 0.61237, 389.848, 714.276, 212.777, 0.837919),
        (4.0, 1154.701, 0.43301, 137.832, 337.960, 56.213, 0.913055),
    ],
)
def test_finite_cylinders_with_sealed_and_killed_ends(
    diameter: float, lam: float, L: float, semi: float, sealed: float, killed: float, tip: float
) -> None:
    """500 um, Rm 20 000, Ri 150; Rall 1959, 1977 (formulas from memory, sure)."""
    assert lambda_um(diameter, RM, RI) == pytest.approx(lam, abs=5e-4)
    assert 500 / lambda_um(diameter, RM, RI) == pytest.approx(L, abs=5e-6)
    assert 1000 / g_inf(diameter, RM, RI) == pytest.approx(semi, abs=5e-4)
    assert 1000 / stub(500, diameter, RM, RI) == pytest.approx(sealed, abs=5e-4)
    coupling, shunt = pi_equivalent(500, diameter, RM, RI)  # killed: the far end at rest
    assert 1000 / (coupling + shunt) == pytest.approx(killed, abs=5e-4)
    assert coupling / (coupling + shunt) == pytest.approx(tip, abs=5e-7)


@pytest.mark.parametrize(
    ("L", "tip", "coth", "tanh", "ratio"),
    [
        (0.25, 0.969544, 4.082988, 0.244919, 0.0062927),
        (0.5, 0.886819, 2.163953, 0.462117, 0.0247045),
        (0.75, 0.772390, 1.574434, 0.635149, 0.0539201),
        (1.0, 0.648054, 1.313035, 0.761594, 0.0919997),
        (1.5, 0.425096, 1.104791, 0.905148, 0.1856496),
        (2.0, 0.265802, 1.037315, 0.964028, 0.2884004),
        (3.0, 0.099328, 1.004970, 0.995055, 0.4769576),
    ],
)
def test_attenuation_and_equalisation_of_a_sealed_cylinder(
    L: float, tip: float, coth: float, tanh: float, ratio: float
) -> None:
    """1/cosh L, R_in = R_inf coth L (killed: tanh L), tau_1/tau_0 = 1/(1 + (pi/L)^2); Rall."""
    _, G, _ = cylinder(L, math.inf, 1)
    unit = 1000 / float(g_inf(2.0, RM, RI))
    assert input_resistance(G, 0) / unit == pytest.approx(coth, abs=5e-7)
    assert transfer_resistance(G, 0, 1) / input_resistance(G, 0) == pytest.approx(tip, abs=5e-7)
    assert 1000 / G[0, 0] / unit == pytest.approx(tanh, abs=5e-7)
    _, G, C = cylinder(L, math.inf, 200)
    slow = time_constants(G, C)
    assert slow[0] == pytest.approx(TAU, rel=1e-9)
    assert slow[1] / slow[0] == pytest.approx(ratio, rel=1e-3)


@pytest.mark.parametrize(
    ("L", "rho", "taus", "peeled"),
    [
        (1.0, math.inf, (1.83999, 0.49409, 0.22265), 1.0000),
        (1.0, 5, (2.48697, 0.65041, 0.28005), 1.1839),
        (1.0, 2, (3.20554, 0.74412, 0.30054), 1.3725),
        (1.5, 2, (5.43466, 1.51854, 0.64688), 1.9190),
        (0.6, 4, (1.21059, 0.26798, 0.10806), 0.7974),
    ],
)
def test_time_constants_of_a_cylinder_on_a_soma(
    L: float, rho: float, taus: tuple[float, ...], peeled: float
) -> None:
    """alpha cot(alpha L) = -rho; Rall 1969 (formula from memory, sure; digits computed).

    L estimated from the two slowest by the sealed formula pi/sqrt(tau_0/tau_1 - 1) is too large
    when a soma is present.
    """
    _, G, C = cylinder(L, rho, 200)
    slow = time_constants(G, C)[:4]
    assert slow[0] == pytest.approx(TAU, rel=1e-9)
    assert slow[1:] == pytest.approx(taus, rel=1e-3)
    assert math.pi / math.sqrt(slow[0] / slow[1] - 1) == pytest.approx(peeled, abs=1e-3)


def test_two_nodes_alone_do_not_have_ralls_time_constants() -> None:
    """Control: one stretch is exact at steady state, not in time."""
    _, G, C = cylinder(1.0, 5, 1)
    assert abs(time_constants(G, C)[1] / 2.48697 - 1) > 0.05


def test_two_daughters_of_the_three_halves_power_are_one_cylinder_for_the_soma() -> None:
    """Rall 1959, 1962 (from memory, sure): d^(3/2) adds at equal length in lambda."""
    daughter = 2 * 2 ** (-2 / 3)
    assert daughter == pytest.approx(1.259921, abs=5e-7)

    def soma_and_tip(diameters: tuple[float, ...]) -> tuple[float, float, float]:
        lengths = [0.4 * float(lambda_um(d, RM, RI)) for d in diameters]
        pairs = zip(lengths, diameters, strict=True)
        dendrites = {f"d{i}": Dendrite(*pair) for i, pair in enumerate(pairs)}
        tree = build_tree(dendrites, [(f"d{i}", x) for i, x in enumerate(lengths)], 2)
        G = conductances(tree, 3.0, RM, RI)
        tip = tree.node_of["d0", lengths[0]]
        return input_resistance(G, 0), transfer_resistance(G, tip, 0), input_resistance(G, tip)

    one, two = soma_and_tip((2.0,)), soma_and_tip((daughter, daughter))
    assert two[:2] == pytest.approx(one[:2], rel=1e-10)
    assert two[2] > 1.2 * one[2]  # the tip of one daughter is not the tip of the cylinder
    assert abs(soma_and_tip((1.0, 1.0))[0] / one[0] - 1) > 0.01  # control: law broken


@pytest.mark.parametrize("x", [0.2, 0.5, 0.8, 1.0])
@pytest.mark.parametrize("load", [0.5, 10.0])
def test_the_branch_exceeds_the_soma_by_less_than_the_core_resistance(
    x: float, load: float
) -> None:
    """R_branch - R_soma < sum of core resistances on the path: Rall & Rinzel 1973 (looked up).

    Control: without leak in the dendrites the two sides are equal, so the bound is sharp.
    """
    tree = build_tree({"d": Dendrite(500, 2), "e": Dendrite(300, 1)}, [("d", 500 * x)], 1)
    core = 4 * RI * 500 * x * 1e-4 / (math.pi * 4e-8) / 1e6
    share = []
    for rm in (RM, 1e9):
        G = conductances(tree, load, rm, RI)
        excess = input_resistance(G, tree.node_of["d", 500 * x]) - input_resistance(G, 0)
        share.append(excess / core)
    assert share[0] < 0.95
    assert share[1] == pytest.approx(1, abs=1e-3)


def test_the_two_sides_of_a_steady_signal() -> None:
    """2 um x 500 um on 10 nS: the side of larger input resistance loses more (computed)."""
    tree = build_tree({"d": Dendrite(500, 2)}, [("d", 500)], 0)
    G = conductances(tree, 10.0, RM, RI)
    soma, across, tip = input_resistance(G, 0), transfer_resistance(G, 1, 0), input_resistance(G, 1)
    assert (soma, across, tip) == pytest.approx((87.72, 73.50, 274.37), abs=6e-3)
    assert (across / tip, across / soma) == pytest.approx((0.2679, 0.8379), abs=6e-5)


def centroids(G: Floats, C: Floats, source: int) -> Floats:
    """Centroid delay of every node after a current pulse at `source`: moments of G, C."""
    charge = np.linalg.solve(G, np.eye(len(G))[source])
    return np.asarray(np.linalg.solve(G, C * charge) / charge)


def test_the_centroid_delay_from_end_to_end() -> None:
    """(tau/2)(1 + L coth L) = 23.1304 ms; Agmon-Snir & Segev 1993 (theorems looked up)."""
    _, G, C = cylinder(1.0, math.inf, 100)
    assert centroids(G, C, 0)[-1] == pytest.approx(23.1304, rel=1e-3)
    assert centroids(G, C, 0)[-1] == pytest.approx(centroids(G, C, 100)[0], rel=1e-9)


@pytest.mark.parametrize(
    ("L", "delay"), [(0.2, 0.98691), (0.5, 0.92546), (1, 0.77572), (2, 0.57329), (4, 0.50268)]
)
def test_the_local_delay_at_the_end_of_a_sealed_cylinder(L: float, delay: float) -> None:
    """(tau/2)(1 + 2L/sinh 2L), in tau (own derivation; limits of Agmon-Snir & Segev 1993)."""
    _, G, C = cylinder(L, math.inf, 200)
    assert centroids(G, C, 0)[0] / TAU == pytest.approx(delay, rel=1e-3)


@pytest.mark.parametrize(
    ("L", "magnitudes"),
    [
        (500 / 816.4965809, (0.838, 0.827, 0.641, 0.422, 0.135, 0.0153)),
        (1.0, (0.648, 0.608, 0.300, 0.147, 0.0246, 0.0007)),
    ],
)
def test_fast_somatofugal_signals_are_attenuated_as_in_the_cable(
    L: float, magnitudes: tuple[float, ...]
) -> None:
    """|1/cosh(q L)|, q = sqrt(1 + i w tau), at 0, 10, 50, 100, 300, 1000 Hz (computed), 1 %."""
    _, G, C = cylinder(L, math.inf, 150)
    for hertz, printed in zip((0, 10, 50, 100, 300, 1000), magnitudes, strict=True):
        omega = 2 * math.pi * hertz / 1000
        exact = abs(1 / np.cosh(np.sqrt(1 + 1j * omega * TAU) * L))
        beyond = G[1:, 1:] + 1j * omega * np.diag(C[1:])  # the soma is clamped
        found = abs(np.linalg.solve(beyond, -G[1:, 0])[-1])
        assert found == pytest.approx(exact, rel=1e-2)
        assert exact == pytest.approx(printed, abs=6e-4 if printed > 0.1 else 6e-5)


def test_two_nodes_pass_fast_signals_far_too_well() -> None:
    """At 1 kHz 2.7 and 20 times too much: a passive coupling must not carry the spike."""
    for L, times in ((500 / 816.4965809, 2.7), (1.0, 20)):
        _, G, C = cylinder(L, math.inf, 1)
        omega = 2 * math.pi
        found = abs(-G[1, 0] / (G[1, 1] + 1j * omega * C[1]))
        exact = abs(1 / np.cosh(np.sqrt(1 + 1j * omega * TAU) * L))
        assert found / exact == pytest.approx(times, rel=0.05)


#: X/lambda, peak relative to X = 0, time to peak, half-width, 10-90 rise, all times in tau
RALL_SHAPES = [
    (0.0, 1.000, 0.118, 0.333, 0.066),
    (0.143, 0.727, 0.157, 0.429, 0.083),
    (0.367, 0.463, 0.227, 0.618, 0.114),
    (0.743, 0.246, 0.385, 1.066, 0.178),
    (1.117, 0.175, 0.628, 1.294, 0.294),
    (1.493, 0.162, 0.707, 1.305, 0.318),
]


def crossing(t: Floats, v: Floats, level: float) -> float:
    """First time a rising stretch reaches `level`."""
    return float(np.interp(level, v, t))


def test_epsp_shape_changes_with_distance_as_in_a_fine_cylinder() -> None:
    """Idea of Rall 1967 (from memory, sure); own digits with 100 compartments, within 2 %.

    L 1.5, G_inf/G_soma 5, alpha current peaking at 0.04 tau, recorded at the soma. By reciprocity
    the soma's response to a current at X is that at X to the same current into the soma.
    """
    places = tuple(row[0] / 1.5 for row in RALL_SHAPES[1:])
    tree, G, C = cylinder(1.5, 5, 15, places=places)
    lam = float(lambda_um(2.0, RM, RI))
    nodes = [int(np.argmin(np.abs(tree.node_distance - row[0] * lam))) for row in RALL_SHAPES]
    dt, peak = 0.001 * TAU, 0.04 * TAU
    half = expm(-G / C[:, None] * dt / 2)
    steps, v = 4000, np.zeros(len(G))
    seen = np.zeros((steps + 1, len(nodes)))
    for s in range(steps):
        t = (s + 0.5) * dt
        v = half @ v
        v[0] += dt / C[0] * t / peak * math.exp(1 - t / peak)
        v = half @ v
        seen[s + 1] = v[nodes]
    t = np.arange(steps + 1) * dt / TAU
    found = []
    for column in seen.T:
        top = int(column.argmax())
        rising, falling = column[: top + 1], column[top:][::-1]
        times = [crossing(t[: top + 1], rising, f * column[top]) for f in (0.1, 0.5, 0.9)]
        late = crossing(t[top:][::-1], falling, 0.5 * column[top])
        found.append([column[top], t[top], late - times[1], times[2] - times[0]])
    shapes = np.array(found)
    shapes[:, 0] /= shapes[0, 0]
    expected = np.array([row[1:] for row in RALL_SHAPES])
    assert shapes == pytest.approx(expected, rel=0.02)
    assert np.all(np.diff(shapes[:, 0]) < 0)
    assert np.all(np.diff(shapes[:, 1:], axis=0) > 0)


def test_calibre_scaling() -> None:
    """d -> s d: lambda s^0.5, semi-infinite input resistance s^-1.5 (exact, passive)."""
    assert lambda_um(1.1, RM, RI) / lambda_um(1.0, RM, RI) == pytest.approx(1.0488, abs=5e-5)
    assert g_inf(1.0, RM, RI) / g_inf(1.1, RM, RI) == pytest.approx(0.8668, abs=5e-5)
    L = float(lambda_um(1.0, RM, RI))
    for s, tip in ((1.0, 0.6481), (1.1, 0.6711), (1.2, 0.6914)):
        coupling, shunt = pi_equivalent(L, s, RM, RI)
        assert coupling / (coupling + shunt) == pytest.approx(tip, abs=5e-5)
