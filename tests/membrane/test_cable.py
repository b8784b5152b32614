"""The conductance network against closed forms of the continuous cable, and against its laws."""

from __future__ import annotations

import itertools
import math

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from numpy.typing import NDArray

from plastic.membrane.cable import (
    Dendrite,
    build_tree,
    conductances,
    g_inf,
    input_resistance,
    lambda_um,
    leaks,
    load_for_input_resistance,
    pi_equivalent,
    stub,
    transfer_resistance,
)

RM, RI = 20_000.0, 150.0


def sealed_cable(
    length: float, diameter: float, x: float, load: float
) -> tuple[float, float, float]:
    """R at the soma, soma to x, and at x, Mohm: closed forms of Rall's sealed cylinder on a soma.

    R_soma,x = cosh(L-X)/(G_s cosh L + G_inf sinh L); R_x,x = R_soma,x (cosh X + B sinh X).
    SI units, written without the package.
    """
    d, lam = diameter * 1e-6, math.sqrt(diameter * 1e-6 / 4 * (RM * 1e-4) / (RI * 1e-2))
    G = math.pi * d**1.5 / (2 * math.sqrt(RM * 1e-4 * RI * 1e-2))
    L, X, load = length * 1e-6 / lam, x * 1e-6 / lam, load * 1e-9
    total = load * math.cosh(L) + G * math.sinh(L)
    at_soma = math.cosh(L) / total
    transfer = math.cosh(L - X) / total
    local = transfer * (math.cosh(X) + load / G * math.sinh(X))
    return at_soma / 1e6, transfer / 1e6, local / 1e6


spaced = st.lists(st.integers(1, 99), min_size=1, max_size=5, unique=True)


@given(
    percent=spaced,
    refine=st.integers(0, 4),
    length=st.floats(50, 1500),
    diameter=st.floats(0.3, 6),
    load=st.floats(0.05, 50),
)
@settings(max_examples=100, deadline=None)
def test_steady_state_is_that_of_the_continuous_cable_however_it_is_cut(
    percent: list[int], refine: int, length: float, diameter: float, load: float
) -> None:
    places = [("d", length * share / 100) for share in percent]
    tree = build_tree({"d": Dendrite(length, diameter)}, places, refine)
    G = conductances(tree, load, RM, RI)
    for _, x in places:
        node = tree.node_of["d", x]
        expected = sealed_cable(length, diameter, x, load)
        found = (input_resistance(G, 0), transfer_resistance(G, node, 0), input_resistance(G, node))
        assert found == pytest.approx(expected, rel=1e-9)
        attenuation = found[1] / found[2]
        assert attenuation == pytest.approx(expected[1] / expected[2], rel=1e-9)


@given(
    places=st.lists(
        st.tuples(st.sampled_from(["a", "b"]), st.integers(1, 20).map(lambda k: 10.0 * k)),
        min_size=2,
        max_size=6,
        unique=True,
    ),
    refine=st.integers(0, 2),
    load=st.floats(0.1, 30),
    widths=st.tuples(st.floats(0.3, 4), st.floats(0.3, 4)),
    multiple=st.floats(0.5, 3),
)
@settings(max_examples=60, deadline=None)
def test_transfer_resistance_is_reciprocal(
    places: list[tuple[str, float]],
    refine: int,
    load: float,
    widths: tuple[float, float],
    multiple: float,
) -> None:
    """Reciprocity of a passive structure (theory; layer-5 dendrites: Berger et al. 2001)."""
    dendrites = {"a": Dendrite(200, widths[0]), "b": Dendrite(260, widths[1])}
    tree = build_tree(dendrites, places, refine)
    G = conductances(tree, load, RM, RI, multiple)
    assert np.array_equal(G, G.T)
    for a, b in itertools.combinations([0, *tree.node_of.values()], 2):
        forth, back = transfer_resistance(G, a, b), transfer_resistance(G, b, a)
        assert abs(forth - back) <= 1e-12 * forth


@given(
    share=st.lists(st.floats(0.05, 0.95), max_size=4),
    refine=st.integers(0, 3),
    multiple=st.floats(0.5, 2),
)
@settings(max_examples=60, deadline=None)
def test_splitting_a_stretch_changes_nothing(
    share: list[float], refine: int, multiple: float
) -> None:
    dendrites = {"d": Dendrite(400, 1.2), "other": Dendrite(150, 0.8)}
    plain = build_tree(dendrites, [("d", 300)], 0)
    split = build_tree(dendrites, [("d", 300), *(("d", 400 * s) for s in share)], refine)
    G, H = (conductances(tree, 3.0, RM, RI, multiple) for tree in (plain, split))
    a, b = plain.node_of["d", 300], split.node_of["d", 300]
    assert input_resistance(H, 0) == pytest.approx(input_resistance(G, 0), rel=1e-9)
    assert input_resistance(H, b) == pytest.approx(input_resistance(G, a), rel=1e-9)
    assert transfer_resistance(H, b, 0) == pytest.approx(transfer_resistance(G, a, 0), rel=1e-9)


def test_a_lump_of_the_axial_resistance_over_half_the_length_fails_where_the_pi_form_holds() -> (
    None
):
    """Control: coupling 2 G_inf/L with all membrane at the tip has R_dend 40 % too low."""
    G, L = float(g_inf(2, RM, RI)), 500 / float(lambda_um(2, RM, RI))
    coupling, leak = 2 * G / L, G * L
    lump = np.array([[10 + coupling, -coupling], [-coupling, leak + coupling]])
    exact = sealed_cable(500, 2, 500, 10)[2]
    assert input_resistance(lump, 1) / exact - 1 == pytest.approx(-0.405, abs=5e-4)


def test_leaks_are_the_row_sums_of_the_matrix() -> None:
    tree = build_tree({"a": Dendrite(300, 2), "b": Dendrite(90, 1)}, [("a", 100), ("a", 250)], 1)
    multiple = np.linspace(0.8, 1.3, len(tree.stretch_parent))
    G = conductances(tree, 4.0, RM, RI, multiple)
    assert leaks(tree, 4.0, RM, RI, multiple) == pytest.approx(G.sum(axis=1), rel=1e-12)


def test_a_dendrite_without_places_is_a_stub_on_the_soma() -> None:
    tree = build_tree({"a": Dendrite(300, 2)}, [], 1)
    assert leaks(tree, 4.0, RM, RI) == pytest.approx([4.0 + float(stub(300, 2, RM, RI))])


def test_a_very_long_stretch_neither_overflows_nor_couples() -> None:
    coupling, shunt = pi_equivalent(1e7, 1.0, RM, RI)
    assert coupling == 0
    assert shunt == pytest.approx(g_inf(1.0, RM, RI))


@given(target=st.floats(20, 200), width=st.floats(0.3, 2), refine=st.integers(0, 2))
@settings(max_examples=40, deadline=None)
def test_the_load_gives_the_input_resistance_asked_for(
    target: float, width: float, refine: int
) -> None:
    tree = build_tree({"a": Dendrite(300, width), "b": Dendrite(90, 1)}, [("a", 200)], refine)
    load = load_for_input_resistance(tree, target, RM, RI)
    assert input_resistance(conductances(tree, load, RM, RI), 0) == pytest.approx(target, rel=1e-9)


def test_dendrites_below_the_target_are_refused_with_the_numbers() -> None:
    tree = build_tree({"a": Dendrite(500, 2)}, [("a", 200)], 1)
    alone = 1000 / float(stub(500, 2, RM, RI))
    with pytest.raises(ValueError, match=rf"900 Mohm cannot be reached: .* {alone:.4g} Mohm"):
        load_for_input_resistance(tree, 900, RM, RI)
    with pytest.raises(ValueError, match="must be positive and finite"):
        load_for_input_resistance(tree, float("nan"), RM, RI)


def test_a_bad_multiple_or_load_is_refused() -> None:
    tree = build_tree({"a": Dendrite(500, 2)}, [("a", 200)], 0)
    with pytest.raises(ValueError, match="every value must be above 0"):
        conductances(tree, 1.0, RM, RI, 0.0)
    with pytest.raises(ValueError, match="load = -1"):
        leaks(tree, -1.0, RM, RI)
    wrong_shape: NDArray[np.float64] = np.ones(7)
    with pytest.raises(ValueError, match="broadcast"):
        leaks(tree, 1.0, RM, RI, wrong_shape)


@pytest.mark.parametrize("place", [0.0, 0.25, 0.5, 0.75, 1.0])
def test_the_conductance_for_a_wanted_soma_voltage_grows_with_distance(place: float) -> None:
    """g = V/(E R_soma,x - V R_x,x) for 2 mV, E 65 mV; ceilings E A (own numbers, computed)."""
    expected = {0.0: 0.3619, 0.25: 0.3978, 0.5: 0.4296, 0.75: 0.4552, 1.0: 0.4729}[place]
    ceiling = {0.0: 65, 0.25: 40.35, 0.5: 28.77, 0.75: 21.95, 1.0: 17.41}[place]
    tree = build_tree({"d": Dendrite(500, 2)}, [("d", 500 * place)], 1)
    node = tree.node_of["d", 500 * place]
    G = conductances(tree, 10.0, RM, RI)
    transfer, local = transfer_resistance(G, node, 0) / 1000, input_resistance(G, node) / 1000
    assert 2 / (65 * transfer - 2 * local) == pytest.approx(expected, abs=5e-5)
    assert 65 * transfer / local == pytest.approx(ceiling, abs=5e-3)
