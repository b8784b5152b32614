"""Compiled primitives against the plain originals, scipy and closed forms."""

from __future__ import annotations

import itertools

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from numpy.typing import NDArray
from scipy.integrate import quad
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
    return propagated(tree, dt)[0]


def propagated(tree: Tree, dt: float = DT) -> tuple[Floats, Floats]:
    """Return the propagators, and what a current into each node leaves after a step."""
    size = steps.padded(tree.n_nodes)
    conductance, leak = built(tree, np.ones(len(tree.stretch_parent)), size - tree.n_nodes)
    powers, work = np.full((steps.DOUBLINGS, size, size), np.nan), np.full((4, size, size), np.nan)
    slots = table(layout.SLOT, node=np.arange(tree.n_nodes), first=0, last=0)
    spread = np.full((tree.n_nodes, size), np.nan)
    steps.propagators(conductance, leak, slots, tree.n_nodes, TAU, dt, powers, spread, work)
    return powers, spread


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
@pytest.mark.parametrize("dt", [0.01, 0.1, 1.0])
def test_a_held_current_leaves_its_integral(tree: Tree, dt: float) -> None:
    """dv/dt = A v + I / C over dt from rest: A^-1 (exp(A dt) - 1) I / C; 1 pA into each node."""
    n, spread = tree.n_nodes, propagated(tree, dt)[1]
    flow, capacitance = generator(tree), TAU * leaks(tree, LOAD, RM, RI)
    expected = np.linalg.solve(flow, expm(flow * dt) - np.eye(n)) / capacitance
    np.testing.assert_allclose(spread[:, :n].T, expected, rtol=1e-9, atol=1e-15)
    assert not spread[:, n:].any()


def jumped(powers: Floats, number: int, v: Floats) -> Floats:
    """Return the voltages a number of quiet steps later."""
    size = len(v)
    m = steps.new_membrane(size, 0, 0, len(powers))
    m.powers[:], m.v[:size] = powers, v
    here = int(steps.jump(m, number, np.uintp(0), np.uintp(size)))
    return np.asarray(m.v[here : here + size])


@every_tree
@pytest.mark.parametrize("number", [0, 1, 7, 64, 1000, 123_457])
def test_a_jump_is_the_power_of_a_step(tree: Tree, number: int) -> None:
    n, powers = tree.n_nodes, powers_of(tree)
    v = np.zeros(len(powers[0]))
    v[:n] = np.random.default_rng(1).normal(5, 3, n)
    expected = expm(generator(tree) * DT * number) @ v[:n]
    np.testing.assert_allclose(jumped(powers, number, v)[:n], expected, rtol=1e-10, atol=1e-13)


def test_a_jump_beyond_all_doublings_ends_at_rest() -> None:
    powers = powers_of(TREES["two nodes"])
    v = np.full(len(powers[0]), 50.0)
    assert not jumped(powers, 2**steps.DOUBLINGS, v).any()


@quick
@given(cuts=st.lists(st.integers(0, 5000), max_size=5))
def test_a_quiet_gap_may_be_cut_anywhere(cuts: list[int]) -> None:
    powers = PROPAGATED[0]
    parts = np.arange(1.0, 9.0)
    for a, b in itertools.pairwise([0, *sorted(cuts), 5000]):
        parts = jumped(powers, b - a, parts)
    whole = jumped(powers, 5000, np.arange(1.0, 9.0))
    np.testing.assert_allclose(parts, whole, rtol=1e-9, atol=1e-13)


def test_nodes_are_padded_to_four() -> None:
    assert [steps.padded(n) for n in (1, 2, 4, 5, 8, 9)] == [1, 4, 4, 8, 8, 12]


def test_the_highest_node_is_found() -> None:
    assert steps.highest_of(np.array([9.0, 9.0, -3.0, -1.0, -2.0]), np.uintp(2), 3) == -1.0


# ---- synapses


def groups_of(decay: Floats, rise: Floats, reversal: Floats) -> Records:
    """Return groups with these time constants, ms; a rise of 0 is a single exponential."""
    with np.errstate(divide="ignore", invalid="ignore"):
        kept = np.where(rise > 0, np.exp(-DT / rise), 0.0)
        early = np.where(rise > 0, -np.expm1(-DT / rise) * rise / DT, 0.0)
    return table(
        layout.GROUP,
        reversal=reversal,
        keep_decay=np.exp(-DT / decay),
        keep_rise=kept,
        mean_decay=-np.expm1(-DT / decay) * decay / DT,
        mean_rise=early,
        norm=1.0,
    )


#: a place with one receptor and a place with two
SLOTS = table(layout.SLOT, node=[2, 0], first=[0, 1], last=[1, 3])


def test_what_is_open_is_the_mean_over_the_step() -> None:
    """The integral of the conductances over the step, by quadrature; the third has no rise."""
    decay, rise = np.array([3.0, 7.0, 4.0]), np.array([0.5, 1.0, 0.0])
    reversal, slow = np.array([70.0, -5.0, 60.0]), np.array([2.0, 1.0, 0.5])
    fast, total, drive = slow * [0.4, 1.0, 0.0], np.full(2, np.nan), np.full(2, np.nan)
    steps.mean_open(groups_of(decay, rise, reversal), SLOTS, slow, fast, total, drive)
    mean = []
    for g in range(3):
        early = rise[g] if rise[g] > 0 else 1.0
        course = lambda t, g=g, early=early: (  # noqa: E731
            slow[g] * np.exp(-t / decay[g]) - fast[g] * np.exp(-t / early)
        )
        mean.append(quad(course, 0, DT, epsabs=0, epsrel=1e-12)[0] / DT)
    np.testing.assert_allclose(total, [mean[0], mean[1] + mean[2]], rtol=1e-11)
    pulled = np.array(mean) * reversal
    np.testing.assert_allclose(drive, [pulled[0], pulled[1] + pulled[2]], rtol=1e-11)


def stepped(turned: Floats, spread: Floats, total: Floats, drive: Floats, v: Floats) -> Floats:
    """Return the voltages after a step with one slot per node of `total`."""
    n, size = len(total), len(v)
    slots = table(layout.SLOT, node=np.arange(n), first=0, last=0)
    both, which = np.concatenate([v, np.full(size, np.nan)]), np.zeros(n, np.int64)
    matrix, current = np.zeros((n, n)), np.zeros(n)
    here, there = np.uintp(0), np.uintp(size)
    count = steps.hold_currents(
        turned, slots, spread, total, drive, both, here, which, matrix, current
    )
    steps.advance(turned, spread, which, current, count, both, here, there)
    assert both[:size].tolist() == v.tolist()
    return both[size:]


@quick
@given(
    open_here=st.lists(st.one_of(st.just(0.0), st.floats(1e-3, 3e3)), min_size=6, max_size=6),
    seed=st.integers(0, 1000),
)
def test_the_currents_of_open_slots_solve_their_equations(
    open_here: list[float], seed: int
) -> None:
    """I = drive - g (theta end + (1 - theta) start), end = quiet + sum of spread I: numpy's."""
    powers, spread = PROPAGATED
    draw, total = np.random.default_rng(seed), np.array(open_here)
    v = np.append(draw.normal(5, 10, 6), [0.0, 0.0])
    quiet, drive = powers[0].T @ v, total * draw.normal(30, 40, 6)
    x = total * spread.diagonal()
    theta, own = (1 + x) / (2 + x), spread[:, :6].T
    wanted = drive - total * (theta * quiet[:6] + (1 - theta) * v[:6])
    current = np.linalg.solve(np.eye(6) + (total * theta)[:, None] * own, wanted)
    found = stepped(powers[0], spread, total, drive, v)
    np.testing.assert_allclose(found[:6], quiet[:6] + own @ current, rtol=1e-9, atol=1e-9)
    assert not found[6:].any()


PROPAGATED = propagated(TREES["six nodes"])


@pytest.mark.parametrize("g", [1e-3, 1.0, 30.0, 1e3, 1e7])
@pytest.mark.parametrize("size", [1, 4])
def test_an_open_node_goes_to_its_reversal_without_ringing(size: int, g: float) -> None:
    """A node without a leak: what is left is 1 / (1 + x + x^2 / 2), x = g dt / C; never below 0."""
    spread, v = np.zeros((1, size)), np.zeros(size)
    spread[0, 0], v[0] = 0.02, 3.0
    found = stepped(np.eye(size), spread, np.array([g]), np.array([70.0 * g]), v)[0]
    x = 0.02 * g
    left = (70.0 - found) / (70.0 - 3.0)
    assert left == pytest.approx(1 / (1 + x + x * x / 2), rel=1e-6, abs=1e-12)


def test_conductances_fade_as_differences_of_exponentials() -> None:
    """Closed form at every step; the third has no rise."""
    decay, rise = np.array([3.0, 7.0, 4.0]), np.array([0.5, 1.0, 0.0])
    groups = groups_of(decay, rise, np.zeros(3))
    peak = np.array([2.0, 1.0, 0.5])
    slow, fast = peak.copy(), peak * (rise > 0)
    for k in range(1, 60):
        assert steps.fade(groups, slow, fast, np.zeros(3))
        early = np.exp(-k * DT / np.where(rise > 0, rise, 1e-3))
        expected = peak * (np.exp(-k * DT / decay) - early)
        np.testing.assert_allclose(slow - fast, expected, rtol=1e-11)


def test_a_conductance_that_has_faded_is_over() -> None:
    groups = groups_of(np.array([DT]), np.array([0.3 * DT]), np.array([70.0]))  # e-fold in a step
    slow, fast, ends = np.array([5.0]), np.array([1.0]), np.array([1.0])
    assert steps.fade(groups, slow, fast, ends)
    assert not steps.fade(groups, slow, fast, ends)
    assert (slow[0], fast[0], ends[0]) == (0.0, 0.0, 0.0)


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
