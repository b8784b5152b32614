"""What a cell does, compiled and in plain Python, is what is written down."""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import replace
from typing import Any

import numpy as np
import pytest

from plastic import rules
from plastic.engine.layout import Log
from plastic.engine.loop import run_reference
from tests.engine.scenes import SPREAD, Trial, has_top, pure, scene, top_of

both_roads = pytest.mark.parametrize(
    "road", [Trial.compiled, Trial.reference], ids=["compiled", "plain"]
)


def lone_pair(**settings: Any) -> Trial:
    """Return one spike of `far` and one injected spike 12 ms later."""
    return Trial(
        rules.find("pair_timing")(a_plus=0.5),
        None,
        scene(learners=("far",), drives=(), **settings),
        {"far": np.array([100.0])},
        np.array([112.0]),
        end=200.0,
        readings=np.array([112.0, 114.0, 114.1, 200.0]),
        cells=1,
    )


@both_roads
def test_a_pair_is_timed_where_the_input_lands(road: Callable[[Trial], Log]) -> None:
    """`far` arrives after 1 ms, the spike after 300 um at 150 um/ms: a lag of 12 + 2 - 1 ms."""
    weights = road(lone_pair()).variables[0, :, 0, 0]
    expected = 1.0 + 0.5 * math.exp(-13.0 / 16.8)
    # a reading at the very instant sees what was before it
    np.testing.assert_allclose(weights, [1.0, 1.0, expected, expected], rtol=1e-12)


@both_roads
@pytest.mark.parametrize("above", [False, True])
def test_a_spike_below_the_floor_teaches_nothing(road: Callable[[Trial], Log], above: bool) -> None:
    """After 300 um with a length constant of 300 um, 1/e of the spike is left."""
    floor = math.exp(-1.0) + (-1e-6 if above else 1e-6)
    log = road(lone_pair(back_propagation=replace(SPREAD, floor=floor)))
    assert (log.variables[0, -1, 0, 0] > 1.0) == above


@both_roads
def test_a_refractory_cell_swallows_an_injected_spike(road: Callable[[Trial], Log]) -> None:
    """With 3 ms: of spikes at 50, 52, 53 and 55 ms the second and the last are swallowed."""
    trial = replace(lone_pair(), times={}, injected=np.array([50.0, 52.0, 53.0, 55.0]))
    log = road(trial)
    assert log.spike_step[0, : log.ended["spikes"][0]].tolist() == [500, 530]


@both_roads
@pytest.mark.parametrize(("delay", "ticks"), [(0.0, 4), (2000.0, 2)])
def test_what_is_expressed_follows_late_and_slowly(
    road: Callable[[Trial], Log], delay: float, ticks: int
) -> None:
    """Learned at 0.114 s; at 4.5 s the ticks of 1, 2, 3 and 4 s have passed."""
    route = pure("quantal_size", delay=delay, tau=2500.0)
    trial = replace(lone_pair(), route=route, end=4500.0, readings=np.array([4500.0]))
    log = road(trial)
    factor = 1.0 + 0.5 * math.exp(-13.0 / 16.8)
    expected = factor + (1.0 - factor) * math.exp(-ticks * 1000.0 / 2500.0)
    assert log.factor[0, 0, 0] == pytest.approx(factor, rel=1e-12)
    assert log.expressed[0, 0, 0, 0] == pytest.approx(expected, rel=1e-12)


@both_roads
def test_a_release_has_the_strength_of_just_before_the_instant(
    road: Callable[[Trial], Log],
) -> None:
    """The spike reaches `far` at the very time of its second event, which still is the old one."""
    trial = lone_pair(deterministic=True, refractory=0.0, reset=-66.0)
    learns = replace(trial, route=pure("quantal_size"), immediate=True, end=300.0)
    stays = replace(learns, route=None)
    once, twice, later = ({"far": np.array(at)} for at in ([100.0], [100.0, 113.0], [100.0, 113.1]))
    top = top_of(replace(stays, times=twice))
    assert top > 1.01 * top_of(replace(stays, times=once))  # the second event is the highest
    assert has_top(road, replace(learns, times=twice), top)
    assert not has_top(road, replace(learns, times=later), top_of(replace(stays, times=later)))


def test_the_plain_loop_takes_every_step() -> None:
    log = lone_pair().reference()
    assert log.ended["steps"].tolist() == [2000]
    assert log.ended["fault"].tolist() == [0]


def test_spikes_that_find_no_room_are_counted() -> None:
    trial = replace(lone_pair(), injected=np.array([10.0, 20.0, 30.0]))
    log = run_reference(trial.rule, trial.wiring(), trial.population(), None, spikes=2)
    assert log.spike_step.tolist() == [[100, 200]]
    assert log.ended["spikes"].tolist() == [3]
