"""The compiled loop does what the plain one does."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import replace
from typing import Any

import numpy as np
import pytest

from plastic import routes, rules
from plastic.engine.assembly import Drive
from plastic.engine.layout import Log
from plastic.membrane.spikes import BackPropagation
from plastic.routes import Mixture
from tests.engine.scenes import (
    RULES,
    SPREAD,
    Trial,
    assert_same,
    differences,
    has_top,
    mixed,
    pairings,
    pure,
    scene,
    strong,
    top_of,
)

ROUTES: dict[str, Callable[[], Mixture | None]] = {
    **{name: (lambda name=name: pure(name)) for name in routes.names()},
    "mixture": mixed,
    "none": lambda: None,
}
DYNAMICS: dict[str, dict[str, float]] = {
    "rested": {},
    "depletion": {"recovery": 120.0},
    "facilitation": {"facilitation": 200.0},
    "both": {"recovery": 300.0, "facilitation": 80.0},
}


def assert_agree(trial: Trial) -> Log:
    """Assert that both roads leave the same, and return it."""
    compiled = trial.compiled()
    assert_same(compiled, trial.reference())
    return compiled


# ---- the two roads agree


def assert_learned(trial: Trial) -> None:
    """Assert that both roads agree on a trial in which cells fire and something is learned."""
    log = assert_agree(trial)
    assert (log.ended["spikes"] >= 6).all()
    assert (np.ptp(log.factor, axis=1) > 0.05).all()


@pytest.mark.parametrize("route", ["mixture", "none"])
@pytest.mark.parametrize("rule", RULES)
def test_every_rule_is_the_plain_one(rule: str, route: str) -> None:
    assert_learned(Trial(RULES[rule](), ROUTES[route]()))


@pytest.mark.parametrize("immediate", [False, True], ids=["late", "at_once"])
@pytest.mark.parametrize("route", ROUTES)
@pytest.mark.parametrize("rule", ["pair_timing", "forgetful"])
def test_every_route_is_the_plain_one(rule: str, route: str, immediate: bool) -> None:
    """With the simplest rule, and with one that flows, sets, and changes its cell."""
    assert_learned(Trial(RULES[rule](), ROUTES[route](), immediate=immediate))


@pytest.mark.parametrize("deterministic", [False, True], ids=["stochastic", "deterministic"])
@pytest.mark.parametrize("dynamics", DYNAMICS.values(), ids=DYNAMICS)
def test_every_kind_of_release_is_the_plain_one(
    dynamics: Mapping[str, float], deterministic: bool
) -> None:
    cell = scene(dynamics=dynamics, deterministic=deterministic)
    assert_agree(Trial(strong("pair_timing"), pure("release_probability"), cell))


def paired(route: Mixture | None, **settings: Any) -> Trial:
    """Return two pairings of both inputs with an injected spike, and both alone at the end."""
    starts = np.array([100.0, 600.0, 2100.0])
    return Trial(
        strong("pair_timing"),
        route,
        scene(drives=(Drive("far", "brake", 3.0),), deterministic=True),
        {"far": starts, "mid": starts},
        starts[:2] + 15.0,
        end=2500.0,
        **settings,
    )


@pytest.mark.parametrize("immediate", [False, True], ids=["late", "at_once"])
@pytest.mark.parametrize("route", ROUTES)
def test_what_a_route_does_to_the_voltage_is_the_plain_one(route: str, immediate: bool) -> None:
    """The highest voltage, to a billionth; what is learned raises it."""
    trial = paired(ROUTES[route](), immediate=immediate)
    top = top_of(trial)
    assert has_top(Trial.reference, trial, top)
    assert (top > 1.001 * top_of(replace(trial, route=None))) == (route != "none")


@pytest.mark.parametrize("deterministic", [False, True], ids=["stochastic", "deterministic"])
@pytest.mark.parametrize("dynamics", DYNAMICS.values(), ids=DYNAMICS)
def test_the_voltage_after_every_kind_of_release_is_the_plain_one(
    dynamics: Mapping[str, float], deterministic: bool
) -> None:
    cell = scene(dynamics=dynamics, deterministic=deterministic)
    times = {"far": 100.0 + np.array([0.0, 9.0, 30.0, 160.0]), "near": np.array([400.0, 430.0])}
    trial = Trial(strong("pair_timing"), None, cell, times, end=500.0)
    assert has_top(Trial.reference, trial, top_of(trial))


@pytest.mark.parametrize(
    "settings",
    [
        {"drives": ()},
        {"refractory": 0.0},
        {"refractory": 25.0},
        {"reset": -60.0},
        {"dt": 0.05},
        {"learners": ()},
        {"learners": ("near",)},
        {"learners": ("brake", "far", "mid", "near")},
        {"back_propagation": replace(SPREAD, floor=0.7)},
        {"back_propagation": replace(SPREAD, floor=0.0, recovery=0.0)},
        {"back_propagation": replace(SPREAD, velocity=12.0)},
    ],
    ids=str,
)
def test_every_kind_of_cell_is_the_plain_one(settings: Mapping[str, Any]) -> None:
    assert_agree(Trial(strong("triplet_timing"), mixed(), scene(**settings), end=1600.0))


@pytest.mark.parametrize("rule", RULES)
def test_injected_spikes_do_what_they_do_in_plain_python(rule: str) -> None:
    """Some fall into a refractory period, some on the arrival of an input."""
    times = pairings(4, 350.0)
    injected = np.unique(
        np.concatenate([times["far"] + 1.0, times["mid"][:2], [50, 51, 700, 1500]])
    )
    log = assert_agree(Trial(RULES[rule](), pure("quantal_size"), times=times, injected=injected))
    assert (log.ended["spikes"] > 8).all()


def test_a_held_weight_is_held_on_both_roads() -> None:
    log = assert_agree(Trial(strong("pair_timing"), pure("quantal_size"), held=1.25))
    assert log.variables[0, :, 0].max() == 1.25


def test_what_has_no_share_does_nothing_at_factor_zero() -> None:
    names = {"spine_neck": 1.0, "quantal_size": 0.0, "added_contact": 0.0}
    channels = {name: routes.find(name)(delay=0.0, tau=0.0) for name in names}
    weakest = rules.find("pair_timing")(a_plus=0.0, a_minus=1.0)
    log = assert_agree(Trial(weakest, Mixture("z", names, channels)))
    assert log.factor[0, -1, 0] == 0.0


@pytest.mark.parametrize("seed", range(6))
def test_a_random_cell_is_the_plain_one(seed: int) -> None:
    """Anything may fall on anything: spikes on arrivals, readings on ticks and on both."""
    draw = np.random.default_rng(seed)
    spread = BackPropagation(
        velocity=float(draw.choice([20.0, 150.0, 5000.0])),
        length_constant=float(draw.choice([100.0, 300.0, 800.0])),
        train_loss=float(draw.choice([0.0, 0.1, 0.4])),
        floor=float(draw.choice([0.0, 0.25, 0.6])),
    )
    cell = scene(
        dynamics=DYNAMICS[str(draw.choice(list(DYNAMICS)))],
        deterministic=bool(draw.integers(2)),
        back_propagation=spread,
        seed=seed,
    )
    names = ("far", "near", "mid")
    times = {name: np.unique(np.round(draw.uniform(0, 1500, 25))) for name in names}
    injected = np.unique(np.round(np.append(times["far"][:3], draw.uniform(0, 1500, 9))))
    readings = np.sort(np.append(np.round(draw.uniform(0, 1500, 8)), [0, 1000, 1000, 1500]))
    rule = RULES[list(RULES)[seed % len(RULES)]]()
    assert_agree(Trial(rule, mixed(), cell, times, injected, 1500.0, readings))


# ---- the comparison can fail


@pytest.mark.parametrize(
    "settings",
    [
        {"tau_m": 15.0 * 1.01},
        {"ri": 150.0 * 1.02},
        {"rm": 15_000.0 * 1.01},
        {"seed": 12},
        {"deterministic": True},
        {"refractory": 12.0},
        {"drives": ()},
        {"back_propagation": replace(SPREAD, train_loss=0.151)},
        {"back_propagation": replace(SPREAD, length_constant=301.0)},
        {"back_propagation": replace(SPREAD, velocity=140.0)},
    ],
    ids=str,
)
def test_a_cell_that_is_a_little_different_is_seen(settings: Mapping[str, Any]) -> None:
    trial = Trial(strong("pair_timing"), mixed())
    found = differences(trial.compiled(), trial.changed(**settings).reference())
    assert max(found.values()) > 1e-6


@pytest.mark.parametrize("immediate", [False, True], ids=["late", "at_once"])
@pytest.mark.parametrize("name", routes.names())
def test_a_route_that_is_a_little_different_is_seen(name: str, immediate: bool) -> None:
    """A share of 0.999 instead of 1."""
    trial = paired(pure(name), immediate=immediate)
    other = Mixture(name, {name: 0.999}, {name: pure(name).channels[name]}, matched=True)
    assert not has_top(Trial.reference, replace(trial, route=other), top_of(trial), slack=1e-7)


@pytest.mark.parametrize("rule", rules.names())
def test_another_time_constant_is_seen(rule: str) -> None:
    one = strong(rule)
    name = next(n for n, declared in one.parameters.items() if declared.unit == "ms")
    other = type(one)(**one.values | {name: 1.01 * one.values[name]})
    compiled, plain = Trial(one, None).compiled(), Trial(other, None).reference()
    found = differences(compiled, plain)
    assert max(found["variables"], found["cell_states"]) > 1e-6
    assert found["spike_step"] == 0  # the rule alone
