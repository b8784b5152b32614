"""Inhibition on passive trees against published rules; digits computed before this package existed.

The theorem of Koch, Poggio & Torre 1983 is from memory (sure), its closed form our own algebra.
"""

from __future__ import annotations

from itertools import pairwise

import numpy as np
import pytest
from numpy.typing import NDArray

from plastic.membrane.cable import build_tree, conductances
from plastic.membrane.inhibition import shunt_factor, shunt_level, steady_voltages, summation
from plastic.membrane.tree import Dendrite

Floats = NDArray[np.float64]


def forked() -> Floats:
    """A trunk of nodes 0 to 5 (soma 0) with two branches, 6 to 10 and 11 to 15.

    Links of 8 nS in the trunk and 3 nS in the branches, leaks of 0.2 nS, 2 nS at the soma.
    """
    G = np.diag([2.0] + [0.2] * 15)
    trunk = [(k, k + 1, 8.0) for k in range(5)]
    arms = ((5, *range(6, 11)), (5, *range(11, 16)))
    branches = [(a, b, 3.0) for arm in arms for a, b in pairwise(arm)]
    for a, b, g in (*trunk, *branches):
        G[a, a] += g
        G[b, b] += g
        G[a, b] -= g
        G[b, a] -= g
    return G


@pytest.mark.parametrize(
    ("e", "g_e", "g_i", "best", "there", "soma", "off"),
    [
        (10, 0.5, 5, 10, 4.486, 2.569, 1.503),
        (10, 5, 5, 7, 3.339, 2.559, 1.484),
        (10, 20, 1, 7, 1.448, 1.311, 1.177),
        (7, 5, 5, 2, 2.631, 2.522, 1.414),
    ],
)
def test_the_best_shunt_on_a_forked_tree_is_on_the_path(
    e: int, g_e: float, g_i: float, best: int, there: float, soma: float, off: float
) -> None:
    """At the synapse, between it and the soma, or on the trunk (Koch, Poggio & Torre 1983)."""
    F = shunt_factor(forked(), e, g_e, np.arange(16), g_i)
    outside = [n for n in range(16) if n not in range(6) and n not in range(6, e + 1)]
    assert F.argmax() == best
    assert (F[best], F[0], F[outside].max()) == pytest.approx((there, soma, off), abs=6e-4)


def test_beyond_the_excitation_a_shunt_takes_even_less_than_on_the_other_branch() -> None:
    assert shunt_factor(forked(), 7, 5.0, 8, 5.0) == pytest.approx(1.224, abs=6e-4)


def test_two_synapses_on_one_branch_are_more_sublinear_than_on_two() -> None:
    """1 nS each at neighbours of one branch and at the two tips: 0.710, 0.963 of the sum."""
    one, two = (summation(forked(), nodes, 1.0, 70.0) for nodes in ([10, 9], [10, 15]))
    assert (one, two) == pytest.approx((0.710, 0.963), abs=5e-4)


@pytest.mark.parametrize(
    ("n", "voltage", "ratio"),
    [
        (1, 6.3636, 1),
        (2, 11.6667, 0.91667),
        (5, 23.3333, 0.73333),
        (10, 35.0, 0.55),
        (50, 58.3333, 0.18333),
        (100, 63.6364, 0.1),
    ],
)
def test_n_equal_synapses_on_a_point_neuron(n: int, voltage: float, ratio: float) -> None:
    """n g E/(G + n g), G 10 nS, g 1 nS, E 70 mV (textbook formula, digits computed)."""
    G = np.array([[10.0]])
    assert steady_voltages(G, [0] * n, 1.0, 70.0) == pytest.approx([voltage], abs=6e-5)
    assert summation(G, [0] * n, 1.0, 70.0) == pytest.approx(ratio, abs=6e-6)


@pytest.mark.parametrize(
    ("reversal", "voltage"),
    [
        (-80, -68.182),
        (-70, -63.636),
        (-60, -59.091),
        (-55, -56.818),
        (-50, -54.545),
        (-40, -50.000),
    ],
)
def test_inhibition_pulls_to_its_reversal_and_turns_where_the_cell_already_is(
    reversal: float, voltage: float
) -> None:
    """Leak 10 nS at -70 mV, excitation 2 nS at 0 mV, inhibition 10 nS; turns at -58.333 mV.

    That GABA may depolarise from rest and still lower what excitation does: Gulledge & Stuart 2003
    (looked up); the digits are computed.
    """
    G = np.array([[10.0]])
    excited = steady_voltages(G, [0], 2.0, 70.0)[0] - 70
    found = steady_voltages(G, [0, 0], [2.0, 10.0], [70.0, reversal + 70.0])[0] - 70
    alone = steady_voltages(G, [0], 10.0, reversal + 70.0)[0] - 70
    assert excited == pytest.approx(-58.333, abs=6e-4)
    assert found == pytest.approx(voltage, abs=6e-4)
    assert np.sign(found - excited) == np.sign(reversal - excited)
    assert np.sign(alone + 70) == np.sign(reversal + 70)


def interaction(G: Floats, e: int, i: int) -> float:
    """k in V = EPSP + IPSP + k EPSP IPSP at the soma, for weak synapses; E_e 70, E_i -10 mV."""
    g = 1e-3
    one, other = steady_voltages(G, [e], g, 70.0)[0], steady_voltages(G, [i], g, -10.0)[0]
    both = steady_voltages(G, [e, i], g, [70.0, -10.0])[0]
    return float((both - one - other) / (one * other))


def test_the_interaction_falls_with_distance_only_if_the_excitation_is_nearer_the_soma() -> None:
    """Rule of Hao et al. 2009 (looked up): k falls with the distance between a proximal E and I,
    and stays high for a distal E with I on the trunk. In a passive cell the weak limit is
    k = -[K_ei/(K_si E_e) + K_ie/(K_se E_i)] (own algebra), whose larger term falls as K_is/K_ss
    does when I moves away beyond E, and not at all when E moves away beyond I.
    """
    places = [("d", 50.0 * k) for k in range(1, 11)]
    G = conductances(build_tree({"d": Dendrite(500, 0.6)}, places, 0), 5.0, 20_000.0, 150.0)
    K = np.linalg.inv(G)
    proximal = np.array([interaction(G, 2, i) for i in range(2, 11)])
    distal = np.array([interaction(G, e, 2) for e in range(2, 11)])
    for found, e, i in ((proximal[-1], 2, 10), (distal[-1], 10, 2)):
        assert found == pytest.approx(-K[e, i] * (1 / K[0, i] / 70 - 1 / K[0, e] / 10), rel=2e-3)
    assert np.all(np.diff(proximal) < 0)
    assert proximal[-1] < 0.7 * proximal[0]
    assert distal[-1] > 0.95 * distal[0]


def test_a_shunt_is_felt_most_at_its_place_and_less_towards_the_soma_than_away_from_it() -> None:
    """Spread of the shunt level in a dendrite with a sealed end on a soma: Gidon & Segev 2012
    (from memory, fairly sure): larger towards the sealed tip than towards the loaded soma.
    """
    places = [("d", 50.0 * k) for k in range(1, 11)]
    G = conductances(build_tree({"d": Dendrite(500, 1.0)}, places, 0), 20.0, 20_000.0, 150.0)
    level = shunt_level(G, 5, 1.0)
    assert level.argmax() == 5
    assert np.all(level[6:] > level[4::-1])
