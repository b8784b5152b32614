"""The compiled chances: binomial counts, their tail over a conductance, and two contacts at once.

The other roads are scipy's distributions, enumeration, and drawing with numpy; |z| < 4.
"""

from __future__ import annotations

import math

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy.stats import binom, norm

from plastic.engine.kernel import probes
from tests.engine.readers import Floats, cells_of, lands, scene_of, wiring_of, z_of

TRIALS = 40_000
#: scipy's own formula overflows for smaller probabilities than these
CHANCES = st.one_of(st.just(0.0), st.floats(1e-9, 1))


def counts(sites: float, p: float) -> Floats:
    """Return the compiled chances of 0, 1, ... quanta."""
    out = np.full(int(sites) + 2, np.nan)
    probes().count_chances(sites, p, out)
    return out


def tail(goal: float, sites: float, p: float, q: float, cv: float) -> float:
    """Return the compiled chance that one contact reaches `goal` nS."""
    out = np.zeros((1, 1))
    probes().run_tails(np.array([[goal]]), np.array([[[sites, p, q]]]), cv, out)
    return float(out[0, 0])


def drawn(
    rng: np.random.Generator, sites: float, p: float, q: float, cv: float, trials: int = TRIALS
) -> Floats:
    """Return released conductances (nS), drawn with numpy: binomial, Gaussian quanta."""
    whole = int(sites)
    k = rng.binomial(whole, p, trials) + (rng.random(trials) < (sites - whole) * p)
    return np.asarray(q * (k + cv * np.sqrt(k) * rng.standard_normal(trials)))


# ---- how many quanta


@given(st.integers(0, 60), CHANCES)
@settings(max_examples=150, deadline=None)
def test_whole_sites_are_binomial(sites: int, p: float) -> None:
    expected = binom.pmf(np.arange(sites + 2), sites, p)
    assert counts(float(sites), p) == pytest.approx(expected, rel=1e-9, abs=1e-300)


@pytest.mark.parametrize(("sites", "p"), [(330, 0.9), (1200, 0.5), (2000, 0.97), (2000, 0.001)])
def test_a_bundle_of_any_size_is_binomial(sites: int, p: float) -> None:
    """The chance of no release at all, 0.1^330, is below the smallest number."""
    found = counts(float(sites), p)
    assert found.sum() == pytest.approx(1.0, rel=1e-9)
    assert found == pytest.approx(binom.pmf(np.arange(sites + 2), sites, p), rel=1e-8, abs=1e-290)


@given(st.floats(0, 25), CHANCES)
@settings(max_examples=150, deadline=None)
def test_a_fractional_site_is_one_more_that_releases_by_chance(sites: float, p: float) -> None:
    whole = int(sites)
    extra = (sites - whole) * p
    expected = np.convolve(binom.pmf(np.arange(whole + 1), whole, p), [1 - extra, extra])
    assert counts(sites, p) == pytest.approx(expected, rel=1e-9, abs=1e-300)


# ---- the tail over one conductance


@pytest.mark.parametrize("p", [0.05, 0.5, 0.9, 1.0])
@pytest.mark.parametrize("sites", [1, 7, 60, 400])
def test_without_quantal_variance_the_tail_is_the_binomial_one(sites: int, p: float) -> None:
    for k in sorted({1, math.ceil(sites * p / 2), math.ceil(sites * p), sites}):
        expected = binom.sf(k - 1, sites, p)
        assert tail((k - 0.5) * 0.3, sites, p, 0.3, 0.0) == pytest.approx(expected, abs=1e-12)


@pytest.mark.parametrize("sites", [3.0, 20.0, 7.4])
def test_with_quantal_variance_each_count_is_a_normal_sum(sites: float) -> None:
    """Sum over k of P(k) P(normal(k q, sqrt(k) cv q) >= goal), by scipy."""
    p, q, cv, goal = 0.4, 0.3, 0.35, 0.4 * sites * 0.3 + 0.1
    k = np.arange(int(sites) + 2)
    reach = norm.sf(goal, k[1:] * q, np.sqrt(k[1:]) * cv * q)
    expected = counts(sites, p)[1:] @ reach
    assert tail(goal, sites, p, q, cv) == pytest.approx(expected, rel=1e-10)


@pytest.mark.parametrize("sites", [4.0, 25.0, 7.4])
def test_the_tail_is_the_share_of_draws_that_reach(sites: float) -> None:
    """40 000 draws, |z| < 4. Control: without quantal variance the share is another one."""
    p, q, cv, goal = 0.5, 0.4, 0.5, 0.68 * sites * 0.4
    hits = int((drawn(np.random.default_rng(4), sites, p, q, cv) >= goal).sum())
    assert abs(z_of(hits, TRIALS, tail(goal, sites, p, q, cv))) < 4
    assert abs(z_of(hits, TRIALS, tail(goal, sites, p, q, 0.0))) > 4


def test_nothing_is_always_reached_and_out_of_reach_never() -> None:
    assert [tail(g, 5, 0.5, 0.4, 0.3) for g in (0.0, -1.0, math.inf)] == [1.0, 1.0, 0.0]
    assert tail(0.1, 5, 0.5, 0.0, 0.3) == 0.0


def test_a_reading_does_not_depend_on_the_readings_beside_it() -> None:
    """The same release twice in a row is computed once: that must not be seen."""
    release = np.array([[20.0, 0.5, 0.4], [20.0, 0.5, 0.4], [20.0, 0.6, 0.4], [19.5, 0.6, 0.4]])
    goals, order = np.array([4.0, 4.0, 4.0, 4.0, 5.0]), [0, 1, 2, 3, 0]
    out = np.zeros((1, 5))
    probes().run_tails(goals[None], release[order][None], 0.3, out)
    single = [tail(g, *release[k], 0.3) for g, k in zip(goals, order, strict=True)]
    assert out[0].tolist() == single
    assert len(set(single)) == 4


# ---- two contacts

GRID = np.linspace(0.0, 12.0, 25)


def both(
    own: tuple[float, float, float],
    extra: tuple[float, float, float],
    cv: float,
    goals: Floats,
    nodes: int = 9,
) -> float:
    """Return the compiled chance that the two contacts fire the cell."""
    roots, weights = np.polynomial.hermite_e.hermegauss(nodes)
    out = np.zeros((1, 1))
    pair = np.array([[own]]), np.array([[extra]])
    probes().run_two_contacts(*pair, cv, GRID, goals[None], roots, weights / weights.sum(), out)
    return float(out[0, 0])


def straight(slope: float = 0.8, start: float = 6.0) -> Floats:
    """Return own conductances needed along GRID when the added one counts 1/slope as much."""
    return np.maximum(start - slope * GRID, 0.0)


def test_two_contacts_without_quantal_variance_are_two_binomials() -> None:
    """Enumeration of all pairs of counts over a curved boundary given at its nodes."""
    own, extra, goals = (20.0, 0.4, 0.5), (9.0, 0.3, 0.5), 6.0 * np.exp(-GRID / 3.0)
    k = np.arange(10)
    wanted = np.ceil(6.0 * np.exp(-0.5 * k / 3.0) / 0.5 - 1e-9)
    expected = binom.pmf(k, 9, 0.3) @ binom.sf(wanted - 1, 20, 0.4)
    assert both(own, extra, 0.0, goals) == pytest.approx(expected, rel=1e-9)


@pytest.mark.parametrize(
    ("own", "extra"),
    [
        ((20.0, 0.4, 0.5), (9.0, 0.3, 0.5)),
        ((4.0, 0.5, 1.0), (4.0, 0.5, 1.0)),
        ((7.4, 0.5, 0.5), (2.3, 0.5, 1.0)),
    ],
)
def test_two_contacts_fire_as_often_as_draws_over_the_boundary(
    own: tuple[float, float, float], extra: tuple[float, float, float]
) -> None:
    """40 000 draws, |z| < 4. Control: a boundary 5 % farther is told apart."""
    rng, cv = np.random.default_rng(5), 0.3
    g, a = drawn(rng, *own, cv), np.maximum(drawn(rng, *extra, cv), 0.0)
    hits = int((g + 0.8 * a >= 6.0 * 0.8).sum())
    assert abs(z_of(hits, TRIALS, both(own, extra, cv, straight(start=4.8)))) < 4
    assert abs(z_of(hits, TRIALS, both(own, extra, cv, straight(start=4.8 * 1.05)))) > 4


def test_an_added_contact_that_is_absent_adds_nothing() -> None:
    own, goals = (20.0, 0.4, 0.5), straight(start=4.3)
    assert both(own, (0.0, 0.4, 0.5), 0.3, goals) == pytest.approx(tail(4.3, *own, 0.3), abs=1e-4)


def test_an_added_contact_that_is_enough_alone_needs_no_other() -> None:
    chance = both((0.0, 0.4, 0.5), (12.0, 0.5, 1.0), 0.0, straight(start=4.8))
    assert chance == pytest.approx(binom.sf(5, 12, 0.5), rel=1e-9)  # 6 nS and more


def test_where_the_own_contact_is_never_enough_only_the_added_one_opens_the_way() -> None:
    """Out of reach below 4 nS of the added contact; beyond, own 2 nS are needed."""
    goals = np.where(GRID < 4.0, np.inf, 2.0)
    chance = both((10.0, 0.5, 0.5), (8.0, 0.5, 1.0), 0.0, goals)
    assert chance == pytest.approx(binom.sf(3, 8, 0.5) * binom.sf(3, 10, 0.5), rel=1e-9)
    assert both((10.0, 0.5, 0.5), (8.0, 0.5, 1.0), 0.3, np.full(25, np.inf)) == 0.0


@pytest.mark.parametrize("fraction", [0.25, 0.5, 0.9])
def test_between_nodes_the_boundary_is_linear_in_what_stays_finite(fraction: float) -> None:
    """One certain quantum of the added contact between two nodes; the own needs so many quanta.

    From 8 to 2 nS in the logarithm; from out of reach to 2 nS in the inverse; from 8 to 0 nS
    in itself.
    """
    a, own = 5.0 + 0.5 * fraction, (100.0, 0.05, 0.25)
    ends = {(8.0, 2.0): 8.0 * 0.25**fraction, (math.inf, 2.0): 2.0 / fraction}
    ends |= {(8.0, 0.0): 8.0 * (1 - fraction)}
    for (low, high), goal in ends.items():
        goals = np.where(GRID <= 5.0, low, high)
        needed = math.ceil(goal / 0.25 - 1e-9)
        chance = both(own, (1.0, 1.0, a), 0.0, goals)
        assert chance == pytest.approx(binom.sf(needed - 1, 100, 0.05), rel=1e-9)


# ---- simulated stimuli


def chances(numbers: list[int], trials: int, cv: float = 0.3) -> Floats:
    """Return the share of simulated stimuli that fire two-compartment cells of these numbers."""
    scene = scene_of(lands("weak", 300.0, quantal_cv=cv))
    w, cells = wiring_of(scene), cells_of(scene, load=[8.0] * len(numbers))
    release = np.tile([60.0, 0.5, 1.0], (len(numbers), 1, 1, 1))
    out = np.zeros((len(numbers), 1))
    probes().run_chances(
        w.plan, w.stretches, w.groups, w.slots, np.array(numbers),
        cells.cells["load"].copy(), cells.cells["threshold"].copy(),
        np.ones((len(numbers), 1, len(w.stretches))), np.zeros(1, np.int64),
        w.contacts["group"].copy(), np.zeros(1, np.int64), release, np.array([cv]),
        trials, 800, out,
    )  # fmt: skip
    return out[:, 0]


def test_simulated_stimuli_belong_to_their_cell_alone() -> None:
    both_cells, alone = chances([3, 8], 300), [chances([k], 300)[0] for k in (3, 8)]
    assert both_cells.tolist() == alone
    assert both_cells[0] != both_cells[1]
    assert 0 < both_cells.min() < both_cells.max() < 1
