"""The arms of a study, when they are read, and routes matched by what they do to the EPSP."""

from __future__ import annotations

import numpy as np
import pytest

from plastic.engine.readings import state_of
from plastic.errors import Misfit
from plastic.protocols import Schedule
from plastic.protocols._schedule import build
from plastic.routes import Mixture
from plastic.study.grid import (
    BASELINE_READINGS,
    FOLLOW_UP_READINGS,
    INDUCTION_READINGS,
    Grid,
    grid_of,
    matched,
    reading_times,
    sensitivity,
)
from plastic.study.model import Study
from plastic.study.population import Population, bare_reader, populate
from tests.study.small import CONTROLS, routes, study

TWO_RULES = ('rules = ["pair_timing"]', 'rules = ["pair_timing", "triplet_timing"]')
#: as many cells as a median needs; routes that all strengthen the upper bundle
ODD = 5


def schedule(times: int, *, baseline: float = 6e4, follow_up: float = 6e4) -> Schedule:
    return build(
        "pairs", {"upper": [0.0]}, times=times, every=5e3, baseline=baseline,
        follow_up=follow_up, test_times={},
    )  # fmt: skip


@pytest.fixture(scope="module")
def grid() -> Grid:
    made = study(CONTROLS, TWO_RULES, ("[compare]", '[compare]\ncontrols_on = "quantal_size"'))
    return grid_of(made, populate(made))


def test_every_rule_meets_every_route_on_every_protocol_and_controls_run_on_one_route(
    grid: Grid,
) -> None:
    """2 rules x (2 routes x 1 protocol + 1 route x 4 controls), counted by hand."""
    assert len(grid.arms) == 2 * (2 + 4)
    assert len({arm.label for arm in grid.arms}) == len(grid.arms)
    controls = [arm for arm in grid.arms if arm.schedule.control]
    assert {arm.route.name for arm in controls} == {"quantal_size"}
    assert len(controls) == 2 * 4


def test_the_place_of_an_arm_is_that_of_its_labels(grid: Grid) -> None:
    for arm in grid.arms:
        rule, route, protocol = arm.place
        told = (grid.rules[rule], grid.routes[route], grid.protocols[protocol])
        assert told == (arm.rule.label, arm.route.name, arm.schedule.name)
        assert arm.label == " / ".join(told)
    assert len({arm.place for arm in grid.arms}) == len(grid.arms)


def test_a_control_without_room_keeps_its_place_on_the_axis_and_has_no_arm() -> None:
    fast = study(
        ("[compare]", '[compare]\ncontrols = ["unpaired", "reversed"]'),
        ("[compare]",
         '[protocol.fast]\npattern = { upper = ["0 ms"], lower = ["10 ms"] }\n'
         'repeat = { times = 12, every = "150 ms" }\n[compare]'),
    )  # fmt: skip
    made = grid_of(fast, populate(fast))
    assert list(made.not_applicable) == ["fast, unpaired"]
    assert "fast, unpaired" in made.protocols
    assert "fast, unpaired" not in {arm.schedule.name for arm in made.arms}
    assert "fast, reversed" in {arm.schedule.name for arm in made.arms}


@pytest.mark.parametrize("times", [1, 12, 120, 121, 250, 1000])
def test_readings_fall_on_the_ends_of_repeats_and_the_last_repeat_is_read(times: int) -> None:
    made = schedule(times)
    at, repeats, baseline = reading_times(made)
    induced = (repeats > 0) & (at <= made.epochs[1].end)
    np.testing.assert_allclose(at[induced], 6e4 + 5e3 * repeats[induced])
    assert repeats[induced][-1] == times
    assert induced.sum() <= INDUCTION_READINGS + 1
    assert induced.sum() >= min(times, INDUCTION_READINGS / 2)
    assert at[baseline] == 6e4
    assert np.all(repeats[: baseline + 1] == 0)
    assert repeats[baseline + 1] > 0


def test_every_epoch_is_read_in_order_of_time() -> None:
    made = schedule(12)
    at, repeats, baseline = reading_times(made)
    assert np.all(np.diff(at) > 0)
    assert (at[0], at[-1]) == (0.0, made.end)
    assert baseline + 1 == BASELINE_READINGS
    assert len(at) == BASELINE_READINGS + 12 + FOLLOW_UP_READINGS
    assert np.all(repeats[baseline + 1 + 12 :] == 12)


def test_without_baseline_or_follow_up_there_is_one_reading_before_and_none_after() -> None:
    at, repeats, baseline = reading_times(schedule(3, baseline=0.0, follow_up=0.0))
    assert at.tolist() == [0.0, 5e3, 1e4, 1.5e4]
    assert repeats.tolist() == [0, 1, 2, 3]
    assert baseline == 0


def slope(population: Population, route: Mixture) -> float:
    """Return d ln EPSP / d ln factor at baseline, one-sided, the median over cells."""
    reader, step = bare_reader(population), 1.002
    factors = np.ones((ODD, 2, len(route.shares), 1))
    factors[:, 1] = step
    state = state_of(population.scene, reader.wiring, reader.cells, route, factors)
    peak = reader.shape("upper", route, state).peak
    return float(np.median(np.log(peak[:, 1] / peak[:, 0])) / np.log(step))


def sensitive(entry: str) -> tuple[Study, Population]:
    made = study(routes(entry), ("[compare]", '[compare]\nmatch = "sensitivity"'), cells=ODD)
    return made, populate(made)


@pytest.mark.parametrize(
    "entry",
    [
        '"quantal_size"',
        '"release_probability"',
        '"spine_neck"',
        '"added_contact"',
        "{ quantal_size = 0.3, release_probability = 0.7 }",
    ],
)
def test_matched_routes_all_move_the_epsp_as_much_as_the_factor(entry: str) -> None:
    """With another, smaller step than the one that the exponent was found with, hence 10 %."""
    made, population = sensitive(entry)
    route = grid_of(made, population).mixtures[0]
    assert route.matched
    assert slope(population, route) == pytest.approx(1.0, abs=0.1)
    assert abs(slope(population, made.compare.routes[0]) - 1) > 0.15  # control: unmatched


def test_a_matched_share_is_the_share_over_the_sensitivity_of_its_channel() -> None:
    made, population = sensitive("{ quantal_size = 0.3, release_probability = 0.7 }")
    plain = made.compare.routes[0]
    found = matched(population, "upper", plain)
    for channel, share in plain.shares.items():
        expected = share / sensitivity(population, "upper", plain, channel)
        assert found.shares[channel] == pytest.approx(expected)


def test_a_route_that_does_not_strengthen_cannot_be_matched() -> None:
    """A weak bundle at the tip gains by width only if G_soma R_axial + L coth L > 3 (cable theory).

    Here G_soma R_axial is 0.3 (2 nS, 143 Mohm) and L coth L 1.1.
    """
    made = study(
        ("[compare]", '[compare]\nmatch = "sensitivity"'), routes('"dendrite_width"'),
        ('at = "240 um"', 'at = "300 um"'), ('target = "8 mV"', 'target = "0.5 mV"'),
        ('rest_of_cell = "5 nS"', 'rest_of_cell = "2 nS"'), cells=ODD,
    )  # fmt: skip
    with pytest.raises(Misfit, match="a channel that strengthens the input") as caught:
        grid_of(made, populate(made))
    assert "dendrite_width at baseline" in caught.value.got


def test_without_matching_the_routes_stay_as_they_are(grid: Grid) -> None:
    assert [dict(m.shares) for m in grid.mixtures] == [
        {"quantal_size": 1.0},
        {"release_probability": 1.0},
    ]
    assert not any(m.matched for m in grid.mixtures)
