"""Compiled primitives against the plain originals, scipy and closed forms."""

from __future__ import annotations

import itertools
import math

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from numpy.typing import NDArray
from scipy.linalg import expm

from plastic import routes
from plastic.engine import layout, steps
from plastic.engine.layout import Records, table
from plastic.membrane.cable import conductances, leaks
from plastic.membrane.tree import Dendrite, Tree, build_tree

Floats = NDArray[np.float64]
RM, RI, TAU, LOAD, DT = 15_000.0, 150.0, 15.0, 6.0, 0.1
quick = settings(deadline=None, max_examples=50)


# ---- the membrane


def forked(refine: int = 0) -> Tree:
    """Return a soma with two dendrites, six nodes and two sealed stubs."""
    dendrites = {"long": Dendrite(400.0, 2.0), "thin": Dendrite(150.0, 0.7)}
    places = [("long", 60.0), ("long", 180.0), ("long", 300.0), ("thin", 90.0), ("thin", 150.0)]
    return build_tree(dendrites, places, refine)


def built(tree: Tree, multiple: Floats, padding: int = 0) -> tuple[Floats, Floats]:
    """Return conductances and leaks as the compiled membrane fills them."""
    size = tree.n_nodes + padding
    conductance, leak = np.full((size, size), np.nan), np.full(size, np.nan)
    stretches = table(
        layout.STRETCH,
        parent=tree.stretch_parent,
        child=tree.stretch_child,
        widens=0,
        length=tree.stretch_length,
        diameter=tree.stretch_diameter,
    )
    steps.membrane(stretches, multiple, RM, RI, LOAD, conductance, leak)
    return conductance, leak


@quick
@given(st.lists(st.floats(0.3, 3.0), min_size=6, max_size=6), st.integers(0, 3))
def test_the_membrane_is_that_of_the_cable(widths: list[float], padding: int) -> None:
    tree, multiple = forked(), np.array(widths)
    assert len(tree.stretch_parent) == 6
    conductance, leak = built(tree, multiple, padding)
    n = tree.n_nodes
    expected = conductances(tree, LOAD, RM, RI, multiple)
    np.testing.assert_allclose(conductance[:n, :n], expected, rtol=1e-12)
    np.testing.assert_allclose(leak[:n], leaks(tree, LOAD, RM, RI, multiple), rtol=1e-12)
    assert not conductance[n:].any()
    assert not conductance[:, n:].any()
    assert not leak[n:].any()


def generator(tree: Tree) -> Floats:
    """Return A of dv/dt = A v, from the formulas of the cable: -G / C with C = tau_m leak."""
    leak = leaks(tree, LOAD, RM, RI)
    return -conductances(tree, LOAD, RM, RI) / (TAU * leak)[:, None]


def powers_of(tree: Tree, dt: float = DT) -> Floats:
    """Return the propagators of 1, 2, 4 ... steps, padded as the engine does."""
    size = steps.padded(tree.n_nodes)
    conductance, leak = built(tree, np.ones(len(tree.stretch_parent)), size - tree.n_nodes)
    powers = np.full((steps.DOUBLINGS, size, size), np.nan)
    work = np.full((3, size, size), np.nan)
    steps.propagators(conductance, leak, tree.n_nodes, TAU, dt, powers, work)
    return powers


TREES = {
    "a point": build_tree({}, [], 0),
    "two nodes": build_tree({"stub": Dendrite(80.0, 1.0)}, [("stub", 40.0)], 0),
    "six nodes": forked(),
    "short stretches": forked(4),
}
every_tree = pytest.mark.parametrize("tree", TREES.values(), ids=TREES)


@every_tree
@pytest.mark.parametrize("dt", [0.01, 0.1, 1.0])
def test_propagators_are_matrix_exponentials(tree: Tree, dt: float) -> None:
    """scipy.linalg.expm, for 2^j steps; rounding grows with the number of doublings."""
    n, powers = tree.n_nodes, powers_of(tree, dt)
    for j in range(0, steps.DOUBLINGS, 3):
        expected = expm(generator(tree) * dt * 2**j)
        np.testing.assert_allclose(powers[j, :n, :n].T, expected, rtol=1e-10, atol=1e-13)
        assert not powers[j, n:].any()
        assert not powers[j, :, n:].any()


@every_tree
@pytest.mark.parametrize("number", [0, 1, 7, 64, 1000, 123_457])
def test_a_jump_is_the_power_of_a_step(tree: Tree, number: int) -> None:
    n, powers = tree.n_nodes, powers_of(tree)
    v = np.zeros(len(powers[0]))
    v[:n] = np.random.default_rng(1).normal(5, 3, n)
    expected = expm(generator(tree) * DT * number) @ v[:n]
    steps.jump(powers, number, v, np.zeros_like(v))
    np.testing.assert_allclose(v[:n], expected, rtol=1e-10, atol=1e-13)


def test_a_jump_beyond_all_doublings_ends_at_rest() -> None:
    powers = powers_of(TREES["two nodes"])
    v = np.full(len(powers[0]), 50.0)
    steps.jump(powers, 2**steps.DOUBLINGS, v, np.zeros_like(v))
    assert not v.any()


@quick
@given(cuts=st.lists(st.integers(0, 5000), max_size=5))
def test_a_quiet_gap_may_be_cut_anywhere(cuts: list[int]) -> None:
    powers = POWERS
    whole = np.arange(1.0, 9.0)
    parts, out = whole.copy(), np.zeros(8)
    for a, b in itertools.pairwise([0, *sorted(cuts), 5000]):
        steps.jump(powers, b - a, parts, out)
    steps.jump(powers, 5000, whole, out)
    np.testing.assert_allclose(parts, whole, rtol=1e-9, atol=1e-13)


POWERS = powers_of(TREES["six nodes"])


def test_nodes_are_padded_to_four() -> None:
    assert [steps.padded(n) for n in (1, 2, 4, 5, 8, 9)] == [1, 4, 4, 8, 8, 12]


def test_the_highest_node_is_found() -> None:
    assert steps.highest_of(np.array([-3.0, -1.0, -2.0])) == -1.0


# ---- synapses


@quick
@given(z=st.one_of(st.floats(0, 1), st.floats(0, 1e3)))
def test_the_relaxed_share_is_its_closed_form(z: float) -> None:
    expected = -math.expm1(-z) / z if z > 0 else 1.0
    assert steps.relaxed(z) == pytest.approx(expected, rel=1e-12)


def test_the_relaxed_share_is_smooth_where_its_two_forms_meet() -> None:
    grid = np.linspace(0.2, 0.35, 3001)
    expected = -np.expm1(-grid) / grid
    found = np.array([steps.relaxed(z) for z in grid])
    np.testing.assert_allclose(found, expected, rtol=1e-12)


def groups_of(decay: Floats, rise: Floats, reversal: Floats) -> Records:
    """Return groups with these time constants, ms; a rise of 0 is a single exponential."""
    with np.errstate(divide="ignore"):
        kept = np.where(rise > 0, np.exp(-DT / rise), 0.0)
    return table(
        layout.GROUP, reversal=reversal, keep_decay=np.exp(-DT / decay), keep_rise=kept, norm=1.0
    )


#: a place with one receptor and a place with two
SLOTS = table(layout.SLOT, node=[2, 0], first=[0, 1], last=[1, 3])


@quick
@given(
    slow=st.lists(st.floats(0, 500), min_size=3, max_size=3),
    faster=st.floats(0, 1),
    v0=st.floats(-20, 60),
)
def test_half_a_step_of_open_synapses_is_exact(slow: list[float], faster: float, v0: float) -> None:
    """dv/dt = sum of g (E - v) / C over dt/2, with g = slow - fast; a node without any rests."""
    reversal, half_over_c = np.array([70.0, -5.0, 60.0]), np.array([0.01, 0.02, 0.03])
    groups = groups_of(np.full(3, 3.0), np.full(3, 0.5), reversal)
    fast = np.array(slow) * faster
    keep, push, v = np.full(2, np.nan), np.full(2, np.nan), np.array([v0, 3.0, 2.0])
    steps.respond(groups, SLOTS, half_over_c, np.array(slow), fast, keep, push)
    steps.synaptic_half(v, SLOTS, keep, push)
    g = np.array(slow) - fast
    expected = []
    for start, own, h in ((v0, [1, 2], 0.01), (2.0, [0], 0.03)):
        total = float(g[own].sum())
        end = float(g[own] @ reversal[own]) / total if total > 0 else start
        expected.append(end + (start - end) * math.exp(-total * h))
    assert v[[0, 2]].tolist() == [pytest.approx(x, rel=1e-10, abs=1e-10) for x in expected]
    assert v[1] == 3.0


def test_conductances_fade_as_differences_of_exponentials() -> None:
    """Closed form at every step; the third has no rise."""
    decay, rise = np.array([3.0, 7.0, 4.0]), np.array([0.5, 1.0, 0.0])
    groups = groups_of(decay, rise, np.zeros(3))
    peak = np.array([2.0, 1.0, 0.5])
    slow, fast = peak.copy(), peak * (rise > 0)
    for k in range(1, 60):
        assert steps.fade(groups, slow, fast)
        early = np.exp(-k * DT / np.where(rise > 0, rise, 1e-3))
        expected = peak * (np.exp(-k * DT / decay) - early)
        np.testing.assert_allclose(slow - fast, expected, rtol=1e-11)


def test_a_conductance_that_has_faded_is_over() -> None:
    groups = table(layout.GROUP, reversal=[70.0], keep_decay=0.5, keep_rise=0.1, norm=1.0)
    slow, fast = np.array([3e-6]), np.array([1e-6])
    assert steps.fade(groups, slow, fast)
    assert not steps.fade(groups, slow, fast)
    assert (slow[0], fast[0]) == (0.0, 0.0)


# ---- routes


@pytest.mark.parametrize("name", routes.names())
@quick
@given(
    factor=st.one_of(st.just(0.0), st.floats(0, 20)),
    share=st.one_of(st.sampled_from([0.0, 0.5, 1.0]), st.floats(0, 1.5)),
)
def test_a_channel_is_what_its_route_says(name: str, factor: float, share: float) -> None:
    route = routes.find(name)()
    found = steps.powered(
        factor, route.sign * share, route.form == "excess", route.lowest, route.highest
    )
    assert found == pytest.approx(float(route.multiple(factor, share)), rel=1e-13, abs=1e-13)


@pytest.mark.parametrize("name", routes.names())
@pytest.mark.parametrize("share", [0.0, 0.5, 1.0])
def test_a_negative_factor_is_taken_as_none(name: str, share: float) -> None:
    """A rule may let its weight change sign; a physical variable does not."""
    route = routes.find(name)()
    limits = (route.form == "excess", route.lowest, route.highest)
    below, zero = (steps.powered(f, route.sign * share, *limits) for f in (-0.4, 0.0))
    assert below == zero
