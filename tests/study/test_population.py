"""Simulated cells: their spread, their baseline EPSPs, the limits of what can change in them."""

from __future__ import annotations

import math

import numpy as np
import pytest
from numpy.typing import NDArray

from plastic.engine.readings import State, state_of
from plastic.membrane.cable import conductances, input_resistance
from plastic.routes import Mixture
from plastic.rules import Rule, find
from plastic.rules._interface import Changes, weight
from plastic.study.population import (
    LEAST_DRIVE,
    MOST_RECRUITED,
    Population,
    bare_reader,
    ceilings,
    populate,
    weight_at,
)
from tests.study.small import UNIFORM, routes, study

Floats = NDArray[np.float64]

#: nothing is recruited: no table of EPSPs is needed, and many cells cost nothing
FIXED = (
    ('baseline_epsp = { target = "8 mV", cv = 0.1 }\n', ""),
    ('baseline_epsp = { target = "18 mV", cv = 0.1 }\n', ""),
    ("[compare]", "[compare]\namplitude_cv = 0.2"),
    ("probability = 0.5", "probability = { mean = 0.5, cv = 0.1 }"),
    ('rest_of_cell = "5 nS"', 'rest_of_cell = "5 nS"\ninput_resistance_cv = 0.3'),
)
MANY = 3000
FIELDS = ("load", "threshold", "input_resistance", "amplitude", "sites", "probability", "quantum")


@pytest.fixture(scope="module")
def many() -> Population:
    return populate(study(*FIXED, cells=MANY))


@pytest.fixture(scope="module")
def few() -> Population:
    return populate(study(cells=30))


def scores(values: Floats, mean: float, cv: float) -> tuple[float, float]:
    """Return the z scores of mean and spread of log-normal values of a mean and a CV.

    The logarithms are normal with spread s, s^2 = log(1 + cv^2): standard errors s / sqrt(n) of
    their mean and s / sqrt(2 n) of their spread (textbook).
    """
    s = math.sqrt(math.log1p(cv * cv))
    logs, n = np.log(values / mean), len(values)
    return (
        float((logs.mean() + s * s / 2) / (s / math.sqrt(n))),
        float((logs.std(ddof=1) - s) / (s / math.sqrt(2 * n))),
    )


def columns(many: Population) -> dict[str, Floats]:
    return {
        "input_resistance": many.input_resistance,
        "release": many.probability[:, many.scene.primary("upper")],
        "amplitude": many.amplitude,
    }


def nominal_resistance() -> float:
    made = study()
    tree = populate(made).scene.tree
    return float(input_resistance(conductances(tree, 5.0, 15e3, 150.0), 0))


@pytest.mark.parametrize(
    ("name", "cv"), [("input_resistance", 0.3), ("release", 0.1), ("amplitude", 0.2)]
)
def test_parameters_spread_as_the_study_says(many: Population, name: str, cv: float) -> None:
    means = {"input_resistance": nominal_resistance(), "release": 0.5, "amplitude": 1.0}
    values = columns(many)[name]
    assert max(map(abs, scores(values, means[name], cv))) < 4
    assert abs(scores(values, means[name], 1.15 * cv)[1]) > 4  # control: another spread
    assert abs(scores(values, means[name] * (1 + 0.1 * cv), cv)[0]) > 4  # and another mean


def test_parameters_are_drawn_independently(many: Population) -> None:
    """Pearson's r of independent columns has a standard error of 1 / sqrt(n)."""
    drawn = np.stack([*columns(many).values(), many.threshold])
    z = np.corrcoef(drawn)[np.triu_indices(len(drawn), 1)] * math.sqrt(MANY)
    assert np.abs(z).max() < 4
    assert np.corrcoef(drawn[0], 1 / drawn[0])[0, 1] * math.sqrt(MANY) < -4  # control


def test_thresholds_are_normal_around_their_mean(many: Population) -> None:
    z = (many.threshold - (68.0 - 57.0)) / 1.5
    assert abs(z.mean() * math.sqrt(MANY)) < 4
    assert abs((z.std(ddof=1) - 1) * math.sqrt(2 * MANY)) < 4


@pytest.mark.parametrize(("reset", "least"), [("-74 mV", -68.0), ("-62 mV", -62.0)])
def test_no_threshold_is_within_2_mv_of_rest_or_reset(reset: str, least: float) -> None:
    wide = study(
        *FIXED, ('sd = "1.5 mV"', 'sd = "9 mV"'), ('reset = "-74 mV"', f'reset = "{reset}"'),
        cells=400,
    )  # fmt: skip
    thresholds = populate(wide).threshold - 68.0
    assert thresholds.min() == pytest.approx(least + LEAST_DRIVE)
    assert (thresholds > least + LEAST_DRIVE + 0.01).mean() > 0.5


@pytest.mark.parametrize("name", FIELDS)
@pytest.mark.parametrize("cells", [1, 7, 120])
def test_a_cell_is_the_same_whatever_the_number_of_cells(
    few: Population, name: str, cells: int
) -> None:
    other = getattr(populate(study(cells=cells)), name)
    n = min(cells, 30)
    np.testing.assert_array_equal(other[:n], getattr(few, name)[:n])


def test_a_cell_is_the_same_in_any_slice(few: Population) -> None:
    rule, route = find("pair_timing")(), study().compare.routes[0]
    whole = few.with_rule(rule, route, hold=True)
    part = few.with_rule(rule, route, hold=True, chosen=slice(11, 14))
    for one, other in zip(whole, part, strict=True):
        np.testing.assert_array_equal(one[11:14], other)
    assert part.cells["number"].tolist() == [11, 12, 13]


def test_another_seed_gives_other_cells(few: Population) -> None:
    other = populate(study(cells=30, seed=4))
    assert not np.any(other.threshold == few.threshold)


def epsp_with(population: Population, name: str, more: int) -> Floats:
    """Return the EPSP (mV) with some more sites than were recruited, per cell."""
    reader = bare_reader(population)
    release = reader.cells.release.copy()
    release["sites"][:, reader.own_contacts(name)] += more
    return reader.shape(name, None, state(population, release)).peak[:, 0]


def state(population: Population, release: Floats | None = None) -> State:
    """Return what a factor of 1 makes of the cells: the baseline."""
    reader, route = bare_reader(population), study().compare.routes[0]
    cells = reader.cells if release is None else reader.cells._replace(release=release)
    ones = np.ones((len(population.load), 1, 1, 1))
    return state_of(population.scene, reader.wiring, cells, route, ones)


@pytest.mark.parametrize(("name", "target"), [("upper", 8.0), ("lower", 18.0)])
def test_sites_are_recruited_until_the_epsp_meets_its_target(name: str, target: float) -> None:
    """To the nearest whole site: one fewer is too small, one more too large, neither is nearer."""
    same = UNIFORM[2:4]
    made = populate(study(*same, cells=40))
    fewer, chosen, more = (epsp_with(made, name, k) - target for k in (-1, 0, 1))
    assert np.all(fewer < 0)
    assert np.all(more > 0)
    assert np.all(np.abs(chosen) <= np.minimum(-fewer, more))
    assert np.unique(made.sites[:, made.scene.primary(name)]).size > 10  # control: cells differ
    assert made.short == {}


def test_baseline_epsps_spread_as_the_study_says() -> None:
    made = populate(study(('"8 mV", cv = 0.1', '"8 mV", cv = 0.25'), cells=400))
    found = epsp_with(made, "upper", 0)
    assert max(map(abs, scores(found, 8.0, 0.25))) < 4
    assert abs(scores(found, 8.0, 0.15)[1]) > 4


def test_the_sites_of_a_bundle_are_whole_and_what_a_target_cannot_reach_is_counted() -> None:
    far = ("baseline_epsp = { target = \"8 mV\"", 'baseline_epsp = { target = "60 mV"')  # fmt: skip
    made = populate(study(far, cells=6))
    assert made.short == {"upper": 6}
    assert np.all(made.sites[:, made.scene.primary("upper")] == MOST_RECRUITED * 60)
    lower = made.sites[:, made.scene.primary("lower")]
    np.testing.assert_array_equal(lower, np.rint(lower))


ROUTES = [
    "quantal_size",
    "release_probability",
    "release_sites",
    "spine_neck",
    "added_contact",
    "dendrite_width",
]
ENTRIES = [
    *(f'"{name}"' for name in ROUTES),
    "{ quantal_size = 0.25, release_probability = 0.75 }",
    "{ dendrite_width = 0.5, release_probability = 0.5 }",
]


@pytest.mark.parametrize("entry", ENTRIES)
def test_at_the_ceiling_nothing_moves_any_more_and_just_below_it_something_does(
    entry: str,
) -> None:
    made = study(routes(entry))
    population, route = populate(made), made.compare.routes[0]
    at, reader = ceilings(population, route), bare_reader(population)

    def moved(by: float) -> Floats:
        factors = np.broadcast_to(by * at[:, :, None, None], (len(at), 1, len(route.shares), 1))
        s = state_of(population.scene, reader.wiring, reader.cells, route, factors.copy())
        parts = (s.sites, s.probability, s.quantum, s.width)
        return np.concatenate([p.reshape(len(at), -1) for p in parts], axis=1)

    np.testing.assert_allclose(moved(1.0), moved(1.5), rtol=1e-12)
    assert np.all(np.any(np.abs(moved(0.98) - moved(1.0)) > 1e-6, axis=1))


def test_pure_routes_have_the_ceilings_they_declare(few: Population) -> None:
    """By hand: 4 quanta, 10 times the sites, a tenth of the neck, 10 added bundles."""
    told = {"quantal_size": 4.0, "release_sites": 10.0, "spine_neck": 10.0, "added_contact": 11.0}
    for name, expected in told.items():
        route = study(routes(f'"{name}"')).compare.routes[0]
        np.testing.assert_allclose(ceilings(few, route), expected)
    release = study().compare.routes[1]
    np.testing.assert_allclose(ceilings(few, release)[:, 0], 0.9 / few.probability[:, 0])


class Squared(Rule):
    """A weight that counts by its square, and at most 3: a factor of at most 9."""

    w = weight(1.0, low=0.0, high=3.0)

    def at_pre(self) -> Changes:
        return {"w": 0.0}

    def factor(self, w: float) -> float:
        return w * w


def test_weight_at_inverts_the_factor_and_stays_in_the_bounds() -> None:
    factors = np.array([1.0, 1.7, 4.0, 8.9, 9.0, 50.0])
    expected = np.minimum(np.sqrt(factors), 3.0)
    np.testing.assert_allclose(weight_at(Squared(), factors), expected, rtol=1e-12)


def test_amplitudes_spread_and_weights_are_held_at_the_ceiling(few: Population) -> None:
    rule = find("pair_timing")(w_max=10.0)
    route = Mixture.pure("quantal_size", study().compare.routes[0].channels["quantal_size"])
    held, free = (few.with_rule(rule, route, hold=hold) for hold in (True, False))
    np.testing.assert_allclose(held.high, 4.0)
    np.testing.assert_allclose(free.high, 10.0)
    for k, name in enumerate(rule.parameters):
        scale = few.amplitude if name in ("a_plus", "a_minus") else np.ones(30)
        np.testing.assert_allclose(held.parameters[:, k], rule.number(name) * scale, rtol=1e-12)


def test_a_silent_input_next_to_another_does_not_change_its_epsp() -> None:
    """Passive cable theory: a place where nothing opens is no change of the cable."""
    idle = (
        "[protocol.pairs]",
        '[input.idle]\nlocation = { on = "branch", at = "61 um" }\n'
        'release = { sites = 1, probability = 0.5, quantum = "0.1 nS" }\n'
        'receptor = { reversal = "0 mV", rise = "0.5 ms", decay = "3 ms" }\n[protocol.pairs]',
    )
    plain = populate(study(*UNIFORM))
    beside = populate(study(*UNIFORM, idle))
    peaks = [bare_reader(p).peaks("lower")[0] for p in (plain, beside)]
    np.testing.assert_allclose(peaks[1], peaks[0], rtol=0.02, atol=0.01)
