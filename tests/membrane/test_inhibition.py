"""Steady excitation and inhibition: closed forms against nodal solutions on random cells."""

from __future__ import annotations

from collections import Counter

import numpy as np
import pytest
from numpy.typing import NDArray
from scipy.linalg import solve_banded

from plastic.membrane.cable import build_tree, conductances, input_resistance
from plastic.membrane.inhibition import (
    path_nodes,
    shunt_factor,
    shunt_level,
    steady_voltages,
    summation,
)
from plastic.membrane.tree import Dendrite
from tests.membrane.fine_cable import FineCable
from tests.membrane.random_cells import RM, RandomCell, random_cell

Floats = NDArray[np.float64]
POINT = np.array([[10.0]])


def cells(count: int, seed: int = 20) -> list[tuple[RandomCell, int, float, float]]:
    """Random cells, the node of an excitation in each, and conductances over three decades."""
    rng = np.random.default_rng(seed)
    made = []
    for _ in range(count):
        cell = random_cell(rng)
        g_e, g_i = np.exp(rng.uniform(np.log(0.05), np.log(50), 2))
        made.append((cell, cell.node(int(rng.integers(len(cell.places)))), g_e, g_i))
    return made


def by_solving(G: Floats, e: int, g_e: float, i: int, g_i: float, at: int = 0) -> float:
    """F from two nodal solutions of the excited cell, the second with the shunt in its matrix."""
    excited = G.copy()
    excited[e, e] += g_e
    shunted = excited.copy()
    shunted[i, i] += g_i
    drive = g_e * 65 * np.eye(len(G))[e]
    return float(np.linalg.solve(excited, drive)[at] / np.linalg.solve(shunted, drive)[at])


def best_sites(G: Floats, e: int, g_e: float, g_i: float, at: int = 0) -> set[int]:
    """Nodes where the shunt takes most, by solving for each; equal ones to a rounding error."""
    F = np.array([by_solving(G, e, g_e, i, g_i, at) for i in range(len(G))])
    return set(np.flatnonzero(np.isclose(F, F.max(), rtol=1e-11, atol=0)).tolist())


# ---- voltages


def test_the_voltages_are_those_of_a_fine_cable_with_synapses() -> None:
    """Two excitations and an inhibition on 2 um x 500 um; 400 finite volumes, their error 1e-5."""
    fine = FineCable(500, 2, 10, pieces=400)
    bands, drive = fine.bands(), np.zeros(401)
    for node, g, E in ((400, 3.0, 65.0), (160, 1.0, 65.0), (80, 5.0, -8.0)):
        bands[1, node] += g
        drive[node] += g * E
    expected = solve_banded((1, 1), bands, drive)[[0, 80, 160, 400]]
    places = [("d", x) for x in (100.0, 200.0, 500.0)]
    tree = build_tree({"d": Dendrite(500, 2)}, places, 0)
    found = steady_voltages(conductances(tree, 10, RM, 150), [3, 2, 1], [3, 1, 5], [65, 65, -8])
    assert found == pytest.approx(expected, rel=5e-5)


def test_a_point_neuron_has_the_weighted_mean_of_its_reversals() -> None:
    """Millman: sum g E/(leak + sum g), textbook."""
    found = steady_voltages(POINT, [0, 0, 0], [2, 3, 5], [70, -10, 15])
    assert found == pytest.approx([(2 * 70 - 3 * 10 + 5 * 15) / 20], rel=1e-14)


def test_inhibition_that_reverses_at_rest_is_silent_alone() -> None:
    for cell, e, _, g_i in cells(30):
        assert steady_voltages(cell.matrix, [e, 0], g_i, 0.0).tolist() == [0] * cell.tree.n_nodes


@pytest.mark.parametrize("g_i", [0.0, 1.0, 10.0, 300.0])
def test_silent_inhibition_divides_at_a_point(g_i: float) -> None:
    """V/V_e = (G + g_e)/(G + g_e + g_i) (textbook)."""
    alone, both = (steady_voltages(POINT, [0, 0], [4, g], [65, 0])[0] for g in (0.0, g_i))
    assert both / alone == pytest.approx(14 / (14 + g_i), rel=1e-14)
    assert shunt_factor(POINT, 0, 4.0, 0, g_i) == pytest.approx((14 + g_i) / 14, rel=1e-14)


@pytest.mark.parametrize("E_i", [-15.0, -10.0, -5.0])
def test_excitation_and_inhibition_interact_in_proportion_to_both(E_i: float) -> None:
    """(both - EPSP - IPSP)/(EPSP IPSP) tends to -(1/E_e + 1/E_i), with an error linear in g."""
    errors = []
    for g in (0.05, 0.025, 0.0125):
        one, other = (steady_voltages(POINT, [0], g, E)[0] for E in (70, E_i))
        k = (steady_voltages(POINT, [0, 0], g, [70, E_i])[0] - one - other) / (one * other)
        errors.append(k + 1 / 70 + 1 / E_i)
    assert abs(errors[0]) < 0.02 * abs(1 / 70 + 1 / E_i)
    assert errors[0] / errors[1] == pytest.approx(2, rel=0.02)
    assert errors[1] / errors[2] == pytest.approx(2, rel=0.02)


# ---- summation


@pytest.mark.parametrize("n", [1, 2, 10, 100])
def test_synapses_at_one_place_saturate_together(n: int) -> None:
    """(1 + g K)/(1 + n g K), K the input resistance of the place, wherever it is."""
    for cell, e, g, _ in cells(20):
        K = input_resistance(cell.matrix, e) / 1000
        expected = (1 + g * K) / (1 + n * g * K)
        assert summation(cell.matrix, [e] * n, g, 65.0) == pytest.approx(expected, rel=1e-10)


def test_synapses_far_apart_are_less_sublinear_than_neighbours() -> None:
    """Two equal synapses on one dendrite against one on each of two equal dendrites."""
    dendrites = {"a": Dendrite(400, 1.0), "b": Dendrite(400, 1.0)}
    tree = build_tree(dendrites, [("a", 300), ("a", 310), ("b", 310)], 0)
    for load in (0.3, 3.0, 30.0):
        for g in (0.01, 0.3, 3.0):
            G = conductances(tree, load, RM, 150)
            together, apart = (summation(G, pair, g, 65.0) for pair in ([1, 2], [1, 3]))
            assert together < apart < 1


def test_no_voltage_passes_the_reversal() -> None:
    for cell, _, g, _ in cells(30):
        everywhere = np.arange(cell.tree.n_nodes)
        V = steady_voltages(cell.matrix, everywhere, 1000 * g, 65.0)
        assert np.all((V > 0) & (V < 65))


def test_a_sum_of_nothing_is_no_number() -> None:
    assert np.isnan(summation(POINT, [0, 0], 3.0, 0.0))


# ---- shunts


def test_the_closed_form_of_the_shunt_is_that_of_the_nodal_solution() -> None:
    for cell, e, g_e, g_i in cells(40):
        n = cell.tree.n_nodes
        for at in {0, n - 1}:
            expected = [by_solving(cell.matrix, e, g_e, i, g_i, at) for i in range(n)]
            found = shunt_factor(cell.matrix, e, g_e, np.arange(n), g_i, at=at)
            assert found == pytest.approx(expected, rel=1e-10)


def test_on_the_path_the_shunt_follows_the_short_form() -> None:
    """F = 1 + g_i [K_ii - g_e K_ei^2/(1 + g_e K_ee)] where i is between e and the soma."""
    for cell, e, g_e, g_i in cells(40):
        K, i = np.linalg.inv(cell.matrix), np.array(path_nodes(cell.tree, e))
        short = 1 + g_i * (K[i, i] - g_e * K[e, i] ** 2 / (1 + g_e * K[e, e]))
        assert shunt_factor(cell.matrix, e, g_e, i, g_i) == pytest.approx(short, rel=1e-10)


def test_the_best_place_of_a_shunt_is_on_the_path() -> None:
    """Koch, Poggio & Torre 1983, on 300 random cells; not always the synapse, nor the soma."""
    kinds: Counter[str] = Counter()
    for cell, e, g_e, g_i in cells(300):
        best = best_sites(cell.matrix, e, g_e, g_i)
        assert best & set(path_nodes(cell.tree, e)) == best
        kinds["synapse" if e in best else "soma" if 0 in best else "between"] += 1
    assert sum(kinds.values()) == 300
    assert min(kinds[kind] for kind in ("synapse", "between", "soma")) > 10


def test_seen_from_elsewhere_the_best_place_may_be_off_the_path_to_the_soma() -> None:
    """Control: recorded at the last node instead of the soma, the same search leaves the path."""
    left = 0
    for cell, e, g_e, g_i in cells(60):
        best = best_sites(cell.matrix, e, g_e, g_i, at=cell.tree.n_nodes - 1)
        left += not best <= set(path_nodes(cell.tree, e))
    assert left > 5


def test_a_shunt_beyond_the_excitation_takes_less_than_the_same_at_it() -> None:
    """On one dendrite; the farther beyond, the less."""
    places = [("d", x) for x in (100.0, 200.0, 300.0, 400.0)]
    tree = build_tree({"d": Dendrite(400, 1)}, places, 0)
    for g_e in (0.01, 1.0, 100.0):
        F = shunt_factor(conductances(tree, 5, RM, 150), 1, g_e, [1, 2, 3, 4], 2.0)
        assert np.all(np.diff(F) < 0)


def test_the_shunt_level_is_the_share_of_the_input_resistance_that_is_lost() -> None:
    for cell, i, g_i, _ in cells(30):
        with_shunt = cell.matrix.copy()
        with_shunt[i, i] += g_i
        R = [[input_resistance(g, j) for j in range(len(g))] for g in (cell.matrix, with_shunt)]
        lost = 1 - np.array(R[1]) / np.array(R[0])
        level = shunt_level(cell.matrix, i, g_i)
        assert level == pytest.approx(lost, rel=1e-9, abs=1e-13)
        assert level.argmax() == i


def test_the_path_holds_both_ends_and_what_is_between() -> None:
    tree = build_tree(
        {"a": Dendrite(90, 1), "b": Dendrite(90, 1)}, [("a", 30), ("b", 40), ("b", 80)], 0
    )
    assert path_nodes(tree, tree.node_of["b", 80]) == [0, 2, 3]
    assert path_nodes(tree, 0) == [0]


def test_a_negative_conductance_is_refused_with_its_name() -> None:
    with pytest.raises(ValueError, match=r"conductance = -1.* nS: must be 0 or more"):
        steady_voltages(POINT, [0], -1.0, 65.0)
    with pytest.raises(ValueError, match=r"g_i = -2.* nS"):
        shunt_factor(POINT, 0, 1.0, 0, -2.0)
    with pytest.raises(ValueError, match=r"g_i = nan nS"):
        shunt_level(POINT, 0, float("nan"))
