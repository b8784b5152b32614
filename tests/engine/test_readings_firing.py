"""The chance that one input alone fires the cell: exact tails, simulated stimuli, and their seam.

Statistical tests accept |z| < 4 and name a control that must fail.
"""

from __future__ import annotations

import math

import numpy as np
import pytest
from scipy.stats import binom

from plastic.engine.readings import TRIALS
from plastic.routes import Mixture
from tests.engine.firing import (
    ADDED,
    BOTH,
    QUANTUM,
    SITES,
    WIDE,
    alone,
    braked,
    near,
    pure,
    spread_out,
    twofold,
)
from tests.engine.readers import (
    BRAKE,
    FAST,
    Opening,
    integrated,
    lands,
    network,
    reader_of,
    scene_of,
    state_at,
    z_of,
)

# ---- exact tails


@pytest.mark.parametrize("factor", [0.8, 1.0, 1.07, 1.3])
def test_without_quantal_variance_the_chance_is_the_binomial_tail(factor: float) -> None:
    """Of as many quanta as reach the threshold, by scipy; sites are whole and a fraction."""
    reader = near(cv=0.0)
    sites = 60.0 * factor
    goal = reader.threshold("weak", SITES, state_at(reader, SITES, [factor]))[0, 0]
    needed, fraction = math.ceil(goal / 0.3), sites - math.floor(sites)
    with_and_without = binom.sf([needed - 2, needed - 1], math.floor(sites), 0.5)
    extra = fraction * 0.5
    expected = extra * with_and_without[0] + (1 - extra) * with_and_without[1]
    assert alone(reader, SITES, factor) == pytest.approx(expected, rel=1e-9)
    assert 0.01 < expected < 0.99


@pytest.mark.parametrize(
    ("route", "sites", "p", "q"),
    [
        (QUANTUM, 60.0, 0.5, 0.36),
        (SITES, 72.0, 0.5, 0.3),
        (pure("release_probability"), 60.0, 0.6, 0.3),
    ],
    ids=["quantum", "sites", "probability"],
)
def test_the_chance_is_the_share_of_draws_that_pass_the_threshold(
    route: Mixture, sites: float, p: float, q: float
) -> None:
    """A factor of 1.2 by three routes: 40 000 draws with numpy. Control: the chance before it."""
    reader, rng = near(), np.random.default_rng(12)
    goal = reader.threshold("weak", route, state_at(reader, route, [1.2]))[0, 0]
    k = rng.binomial(int(sites), p, 40_000)
    drawn = q * (k + 0.3 * np.sqrt(k) * rng.standard_normal(40_000))
    hits = int((drawn >= goal).sum())
    assert abs(z_of(hits, 40_000, alone(reader, route, 1.2))) < 4
    assert abs(z_of(hits, 40_000, alone(reader, route, 1.0))) > 4


def test_one_mean_and_three_variances_are_three_chances() -> None:
    """Above threshold on average, the least variable release (more p) fires most reliably."""
    reader = near(threshold=10.8)
    by_p, by_n, by_q = (
        alone(reader, route, 1.5) for route in (pure("release_probability"), SITES, QUANTUM)
    )
    assert 0.6 < by_q < by_n < by_p < 1.0


# ---- simulated stimuli


def test_simulated_stimuli_agree_with_the_tables_where_both_hold() -> None:
    """4000 stimuli at each of four factors. Control: the tables at 1.1 times the factor."""
    reader, factors = near(), [0.8, 1.0, 1.15, 1.3]
    state = state_at(reader, QUANTUM, factors)
    assert reader.premise("weak", QUANTUM) == ""
    share = reader.simulated("weak", state, trials=4000)[0]
    others = reader.fires_alone(
        "weak", QUANTUM, state_at(reader, QUANTUM, [1.1 * f for f in factors])
    )
    for k, chance in enumerate(reader.fires_alone("weak", QUANTUM, state)[0]):
        assert abs(z_of(4000 * share[k], 4000, chance)) < 4
        assert abs(z_of(4000 * share[k], 4000, others[0, k])) > 4


@pytest.mark.parametrize(
    ("load", "threshold", "factors"),
    [(8.0, 12.0, [1.9, 2.1, 2.3]), (12.0, 14.0, [3.7, 3.9, 4.2])],
    ids=["far is enough", "far is never enough"],
)
def test_simulated_stimuli_agree_with_the_boundary_over_two_contacts(
    load: float, threshold: float, factors: list[float]
) -> None:
    """10 000 stimuli each. Control: the boundary at a factor that is larger by 0.06."""
    reader = twofold(threshold, load)
    state = state_at(reader, ADDED, factors)
    share = reader.simulated("weak", state, trials=10_000)[0]
    others = reader.fires_alone("weak", ADDED, state_at(reader, ADDED, [f + 0.06 for f in factors]))
    for k, chance in enumerate(reader.fires_alone("weak", ADDED, state)[0]):
        assert 0.005 < chance < 0.99
        assert abs(z_of(10_000 * share[k], 10_000, chance)) < 4
        assert abs(z_of(10_000 * share[k], 10_000, others[0, k])) > 4


def test_two_contacts_of_few_sites_agree_with_simulated_stimuli_too() -> None:
    """Three sites of 3 nS: every count is a bump of its own. 20 000 stimuli each.

    Control: the boundary at a factor that is larger by 0.12.
    """
    scene = scene_of(
        lands("weak", 320.0, quantal_cv=0.3), lands("weak", 80.0, added=True, quantal_cv=0.3)
    )
    reader, factors = reader_of(scene, sites=3.0, quantum=3.0), [1.6, 2.0, 2.5, 3.0, 4.0]
    share = reader.simulated("weak", state_at(reader, ADDED, factors), trials=20_000)[0]
    for shift, holds in ((0.0, True), (0.12, False)):
        state = state_at(reader, ADDED, [f + shift for f in factors])
        for k, chance in enumerate(reader.fires_alone("weak", ADDED, state)[0]):
            assert (abs(z_of(20_000 * share[k], 20_000, chance)) < 4) == holds


def test_inhibition_that_fails_half_the_time_gives_the_mean_of_two_chances() -> None:
    """The law of total probability, 6000 stimuli. Controls: always and never the brake."""
    reader = braked(0.5)
    always = alone(braked(1.0), QUANTUM, 1.0)
    never = alone(reader, QUANTUM, 1.0, inhibition=False)
    share = reader.simulated("weak", state_at(reader, QUANTUM, [1.0]), trials=6000)[0, 0]
    assert abs(z_of(6000 * share, 6000, (never + always) / 2)) < 4
    assert min(abs(z_of(6000 * share, 6000, one)) for one in (never, always)) > 4


def test_lifting_the_inhibition_leaves_the_input_alone() -> None:
    """With a brake that is certain, random or absent, lifted, the chance is one and exact."""
    lifted = [alone(braked(p), QUANTUM, 1.0, inhibition=False) for p in (1.0, 0.5)]
    plain = near()
    assert lifted == [alone(plain, QUANTUM, 1.2)] * 2
    assert alone(braked(1.0), QUANTUM, 1.0) < 0.8 * lifted[0]


@pytest.mark.parametrize("inhibition", [True, False])
def test_two_halves_of_an_input_at_one_place_are_the_whole_input(inhibition: bool) -> None:
    """Two bundles of 30 sites are one of 60, with their brake and without.

    Control: one bundle of 30 sites, which is what its first contact alone would be.
    """
    halves = [lands("weak", 100.0, quantal_cv=0.3, share=0.5)] * 2
    scene = scene_of(*halves, lands("brake", 0.0, BRAKE), drives=[("weak", "brake", 1.0)])
    reader = reader_of(
        scene,
        threshold=9.5,
        sites=[30.0, 30.0, 1.0],
        probability=[0.5, 0.5, 1.0],
        quantum=[0.36, 0.36, 2.0],
    )
    share = alone(reader, QUANTUM, 1.0, inhibition=inhibition)
    whole = alone(braked(1.0), QUANTUM, 1.0, inhibition=inhibition)
    assert abs(z_of(TRIALS * share, TRIALS, whole)) < 4
    assert alone(near(sites=30.0), QUANTUM, 1.2) < 0.01 < share


# ---- why tables do not hold


def test_the_premise_says_why_tables_do_not_hold() -> None:
    plain, random = "", "brake, which it recruits, releases at random"
    for reader, said in (
        (near(), plain),
        (braked(1.0), plain),
        (braked(0.5), random),
        (braked(1.0, sites=1.5), random),
        (braked(1.0, cv=0.2), random),
        (braked(0.5, deterministic=True), plain),
    ):
        assert reader.premise("weak", QUANTUM) == said
        assert reader.premise("weak", QUANTUM, inhibition=False) == plain


def test_the_premise_looks_at_places_and_at_what_the_route_moves() -> None:
    spread = reader_of(scene_of(lands("weak", 100.0), lands("weak", 300.0)))
    assert spread.premise("weak", QUANTUM) == "it lands at several places"
    said = [twofold().premise("weak", route) for route in (ADDED, WIDE, BOTH)]
    assert said == ["", "", "the dendrite widens and a contact is added"]
    two = scene_of(lands("weak", 100.0), lands("other", 300.0), learners=["weak", "other"])
    assert reader_of(two).premise("weak", WIDE) == "several inputs widen the dendrite"
    assert reader_of(two).premise("weak", QUANTUM) == ""


# ---- without chance


DETERMINISTIC = {
    "one place": (
        lambda: reader_of(scene_of(lands("weak", 100.0, quantal_cv=0.3), deterministic=True)),
        QUANTUM,
        lambda f: (network(8.0, [100.0]), [Opening(4.0 * f, 1)]),
    ),
    "two places": (
        spread_out,
        QUANTUM,
        lambda f: (network(8.0, [100.0, 300.0]), [Opening(4.5 * f, 1), Opening(4.5 * f, 2)]),
    ),
    "an added contact": (
        lambda: twofold(deterministic=True),
        ADDED,
        lambda f: (
            network(8.0, [80.0, 320.0]),
            [Opening(6.6, 2), Opening(6.6 * (f - 1), 1, FAST, 1.0)],
        ),
    ),
    "a contact and a width": (
        lambda: twofold(deterministic=True),
        BOTH,
        lambda f: (
            network(8.0, [80.0, 320.0], [min(f**0.5, 1.3)] * 2 + [1.0]),
            [Opening(6.6, 2), Opening(6.6 * (f**0.5 - 1), 1, FAST, 1.0)],
        ),
    ),
    "a random brake": (
        lambda: braked(0.5, deterministic=True),
        QUANTUM,
        lambda f: (
            network(8.0, [100.0]),
            [Opening(10.8 * f, 1), Opening(1.0, 0, BRAKE, 1.0)],
        ),
    ),
}


@pytest.mark.parametrize("case", DETERMINISTIC)
def test_without_chance_it_fires_from_the_factor_on_at_which_the_mean_does(case: str) -> None:
    """A step function, and the step is where scipy's EPSP reaches threshold (within 1 %)."""
    made, route, exact = DETERMINISTIC[case]
    reader = made()
    factors = np.linspace(0.5, 4.0, 351)
    fires = reader.fires_alone("weak", route, state_at(reader, route, list(factors)))[0]
    assert set(fires) == {0.0, 1.0}
    assert (np.diff(fires) >= 0).all()
    step = factors[np.argmax(fires)]
    below, above = (integrated(*exact(f), 60.0)[1].max() for f in (0.99 * step, 1.01 * step))
    assert below < reader.thresholds[0] < above
