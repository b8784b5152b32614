"""Jumping over quiet changes nothing: the cell that takes every step is the same cell."""

from __future__ import annotations

import math
from dataclasses import replace

import numpy as np
import pytest

from plastic.engine.layout import Log
from tests.engine.scenes import (
    RULES,
    Forgetful,
    Trial,
    assert_same,
    differences,
    mixed,
    pairings,
    pure,
    scene,
    strong,
)

every_rule = pytest.mark.parametrize("rule", RULES)

#: ten pairings at 0.1 Hz
SLOW = pairings(10, 10_000.0)


def both(trial: Trial) -> tuple[Log, Log]:
    """Return the log of the cell that jumps and of the one that takes every step."""
    return trial.compiled(), trial.changed(clocked=True).compiled()


@every_rule
def test_jumping_changes_no_bit_of_what_is_learned(rule: str) -> None:
    trial = Trial(RULES[rule](), mixed(), times=SLOW, end=101_000.0)
    jumping, clocked = both(trial)
    assert (jumping.variables == clocked.variables).all()
    assert (jumping.cell_states == clocked.cell_states).all()
    assert_same(jumping, clocked, tolerance=0.0)
    assert (jumping.ended["spikes"] >= 10).all()
    assert (np.ptp(jumping.factor, axis=1) > 0.05).all()


@every_rule
def test_a_slow_pairing_takes_thirty_times_fewer_steps(rule: str) -> None:
    trial = Trial(RULES[rule](), None, times=SLOW, end=101_000.0, cells=1)
    jumping, clocked = (int(log.ended["steps"][0]) for log in both(trial))
    assert clocked == 1_010_000
    assert 0 < 30 * jumping <= clocked


@every_rule
def test_a_cell_driven_by_injected_spikes_may_jump(rule: str) -> None:
    injected = np.array([500.0, 501.0, 2_000.0, 2_004.0, 2_008.0, 7_000.0, 7_050.0])
    times = {"mid": np.array([490.0, 1_990.0, 7_020.0])}
    trial = Trial(RULES[rule](), pure("quantal_size"), times=times, injected=injected, end=9_000.0)
    jumping, clocked = both(trial)
    assert_same(jumping, clocked, tolerance=0.0)
    assert jumping.spike_step[0, :6].tolist() == [5000, 20000, 20040, 20080, 70000, 70500]


@pytest.mark.parametrize("tau_m", [2.0, 15.0, 80.0])
def test_what_is_left_of_a_voltage_after_a_jump_is_exact(tau_m: float) -> None:
    """Volleys so near each other that each finds what the last one left, below threshold."""
    times = {"near": 10.0 + 71.3 * np.arange(60), "far": 40.0 + 97.7 * np.arange(40)}
    cell = scene(tau_m=tau_m, drives=(), reset=-66.0)
    jumping, clocked = both(Trial(strong("pair_timing"), None, cell, times, end=4_500.0))
    assert_same(jumping, clocked, tolerance=0.0)
    assert (jumping.ended["steps"] < clocked.ended["steps"]).all()


# ---- expression is late, and knows nothing of jumps


def test_a_window_that_closes_after_a_tick_is_not_expressed_at_that_tick() -> None:
    """A jump from about 970 ms to the end of the window, at 1005.5 ms, crosses a tick."""
    trial = Trial(
        strong("sliding_threshold"),
        pure("quantal_size", delay=0.0),
        times={"mid": np.array([905.0])},
        injected=np.array([908.0, 914.0, 920.0]),
        end=2_500.0,
        readings=np.array([1_100.0, 2_100.0]),
    )
    jumping, clocked = both(trial)
    assert_same(jumping, clocked, tolerance=0.0)
    early, late = jumping.expressed[0, :, 0, 0]
    assert early == 1.0
    assert late > 1.0  # the control: something was learned, and is expressed at the next tick


def test_a_weight_that_is_forgotten_is_expressed_as_it_was_at_each_tick() -> None:
    """Two pairings, then nothing for ten seconds: w falls back to 1 with 2.5 s."""
    trial = Trial(
        Forgetful(),
        pure("quantal_size", delay=0.0),
        times=pairings(2, 30.0),
        end=10_500.0,
        readings=np.arange(0.5, 11.0) * 1000,
    )
    jumping, clocked = both(trial)
    assert_same(jumping, clocked, tolerance=0.0)
    sparse = replace(trial, readings=np.array([10_500.0])).compiled()
    np.testing.assert_allclose(sparse.expressed[:, -1], jumping.expressed[:, -1], rtol=1e-12)
    assert np.ptp(jumping.expressed[0, :, 0]) > 0.1


def test_a_dendrite_that_widens_slowly_is_as_wide_after_a_jump() -> None:
    """It follows in moves of 1e-4; the last one is not forgotten and none is made early."""
    trial = Trial(
        strong("pair_timing"),
        pure("dendrite_width", delay=0.0, tau=3e6),
        times=pairings(3, 8_000.0),
        end=25_000.0,
    )
    jumping, clocked = both(trial)
    assert_same(jumping, clocked, tolerance=0.0)
    assert jumping.diameter[0, -1].max() > 1.0 + 3e-4


# ---- hours of quiet

HOUR = 3_600_000.0


def two_sessions(quiet: float) -> Trial:
    """Return a pairing, `quiet` ms of nothing, and the same pairing again."""
    once = pairings(1, 1.0)
    return Trial(
        strong("pair_timing"),
        pure("quantal_size", delay=0.0, tau=0.5 * HOUR),
        scene(deterministic=True),
        {name: np.concatenate([t, t + quiet]) for name, t in once.items()},
        end=quiet + 1_000.0,
        readings=np.array([quiet, quiet + 1_000.0]),
        cells=1,
    )


@pytest.mark.parametrize("hours", [1.0, 5.0, 30.0])
def test_after_hours_of_quiet_a_pairing_teaches_the_same_again(hours: float) -> None:
    """Pair timing adds, and of traces and voltages nothing is left; 26 doublings are 1.9 h."""
    trial = replace(two_sessions(hours * HOUR), route=None)
    log = trial.compiled()
    first, both_times = log.variables[0, :, 0] - 1.0
    np.testing.assert_allclose(both_times, 2.0 * first, rtol=1e-9)
    steps = log.spike_step[0, : log.ended["spikes"][0]]
    early, late = np.split(steps, 2)
    assert len(early) > 0
    assert (late - early == round(hours * HOUR / trial.scene.dt)).all()


def test_hours_of_quiet_are_expressed_tick_by_tick() -> None:
    """18 000 ticks of 1 s towards the factor f: 1 + (f - 1)(1 - exp(-t/tau))."""
    log = two_sessions(5 * HOUR).compiled()
    factor = log.factor[0, 0]
    expected = 1.0 + (factor - 1.0) * -math.expm1(-5 * HOUR / (0.5 * HOUR))
    np.testing.assert_allclose(log.expressed[0, 0, 0], expected, rtol=1e-10)


@every_rule
def test_a_quiet_gap_may_be_cut_anywhere(rule: str) -> None:
    """Readings stop a jump; what comes after them does not change."""
    trial = Trial(RULES[rule](), mixed(), times=pairings(4, 3_000.0), end=13_000.0)
    cuts = np.sort(np.append(np.round(np.random.default_rng(5).uniform(0, 13_000, 200), 1), 13_000))
    once = replace(trial, readings=np.array([13_000.0])).compiled()
    often = replace(trial, readings=cuts).compiled()
    last = often._replace(
        **{
            name: getattr(often, name)[:, -1:]
            for name in ("variables", "factor", "expressed", "diameter", "cell_states")
        }
    )
    assert_same(once, last, tolerance=1e-12)


def test_a_cell_that_is_not_the_same_is_seen() -> None:
    """The control of this file: another membrane moves a spike."""
    trial = Trial(strong("pair_timing"), None, times=SLOW, end=101_000.0)
    clocked = trial.changed(clocked=True, tau_m=15.15).compiled()
    assert differences(trial.compiled(), clocked)["spike_step"] > 0
