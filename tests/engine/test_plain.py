"""The parts of the plain loop against closed forms, scipy and the formulas of release."""

from __future__ import annotations

import math
from collections.abc import Mapping

import numpy as np
import pytest
from numpy.typing import NDArray
from scipy.integrate import solve_ivp

from plastic import draws, rules
from plastic.engine.assembly import Contact, Receptor
from plastic.engine.plain import Membrane, Terminal, kept
from plastic.membrane import release
from plastic.membrane.tree import build_tree
from tests.engine.scenes import FAST, JUMPY, Trial, scene

Floats = NDArray[np.float64]

TIMES = np.array([0.0, 20.0, 30.0, 95.0, 400.0])
DYNAMICS = [
    pytest.param(0.0, 0.0, id="rested"),
    pytest.param(120.0, 0.0, id="depletion"),
    pytest.param(0.0, 200.0, id="facilitation"),
    pytest.param(300.0, 80.0, id="both"),
]


def membrane(load: float = 8.0, **settings: object) -> Membrane:
    """Return the membrane of the cell with a dendrite, at rest."""
    quiet = Trial(rules.find("pair_timing")(), None, scene(**settings), times={})
    return Membrane(quiet.wiring(), load)


def ball(receptor: Receptor, dt: float, load: float = 8.0) -> Membrane:
    """Return a soma alone with one receptor, at rest at -68 mV, of 15 ms."""
    contacts = [Contact("far", 0, receptor)]
    tree = build_tree({}, [], 0)
    return membrane(load, tree=tree, contacts=contacts, learners=(), drives=(), dt=dt)


# ---- the membrane


@pytest.mark.parametrize("widened", [1.0, 1.3])
def test_a_uniform_voltage_falls_with_the_membrane_time_constant(widened: float) -> None:
    """Capacitance follows leak, so that every node has the same time constant, at any width."""
    cell = membrane()
    cell.widen(np.full(5, widened))
    cell.v[:] = 7.0
    for _ in range(300):
        cell.step()
    np.testing.assert_allclose(cell.v, 7.0 * math.exp(-30.0 / 15.0), rtol=1e-12)


def test_wider_dendrites_carry_more_to_the_soma() -> None:
    """The control of the law above: what is not uniform does depend on the width."""
    found = []
    for widened in (1.0, 1.3):
        cell = membrane()
        cell.widen(np.full(5, widened))
        cell.v[1] = 7.0
        cell.step()
        found.append(float(cell.v[0]))
    assert 0 < found[0] < found[1]


def integrated(receptor: Receptor, amount: float, at: Floats, load: float = 8.0) -> Floats:
    """Return the voltage of a soma under one conductance with peak `amount` nS, by scipy.

    C dv/dt = -g_leak v + g(t) (E - v), where g(t) is the difference of two exponentials scaled to
    a peak of 1 (textbook), its peak searched for on a fine grid.
    """

    def shape(t: Floats) -> Floats:
        rising = np.exp(-t / receptor.rise) if receptor.rise else np.zeros_like(t)
        return np.asarray(np.exp(-t / receptor.decay) - rising)

    top = shape(np.linspace(0.0, 10.0, 1_000_001)).max()

    def slope(t: float, v: Floats) -> Floats:
        g = amount * shape(np.asarray(t)) / top
        return np.asarray((-load * v + g * (receptor.reversal + 68.0 - v)) / (15.0 * load))

    found = solve_ivp(slope, (0.0, at[-1]), [0.0], t_eval=at, rtol=1e-11, atol=1e-12)
    return np.asarray(found.y[0])


def stepped(receptor: Receptor, amount: float, at: Floats, dt: float) -> Floats:
    cell, found = ball(receptor, dt), []
    cell.open(0, amount)
    for step in range(round(at[-1] / dt) + 1):
        if np.isclose(at, step * dt).any():
            found.append(float(cell.v[0]))
        cell.step()
    return np.array(found)


@pytest.mark.parametrize("receptor", [FAST, JUMPY, Receptor(-75.0, 0.5, 7.0)], ids=str)
def test_the_error_of_a_step_is_of_second_order(receptor: Receptor) -> None:
    """Halving the step quarters the distance from the integral by scipy."""
    at = np.array([1.0, 3.0, 8.0, 20.0])  # before the conductance is cut off
    expected = integrated(receptor, 6.0, at)
    errors = [np.abs(stepped(receptor, 6.0, at, dt) - expected).max() for dt in (0.1, 0.05)]
    assert errors[0] < 2e-3 * np.abs(expected).max()
    assert errors[0] / errors[1] == pytest.approx(4.0, rel=0.05)


@pytest.mark.parametrize("peak", [1e-3, 2.0])
def test_a_conductance_is_over_at_a_ten_thousandth_of_its_largest(peak: float) -> None:
    """Falling with 4 ms: after 4 ln(1e4) = 36.84 ms, at the 369th step of 0.1 ms."""
    cell = ball(JUMPY, 0.1)
    cell.open(0, peak)
    steps = 0
    while cell.slow[0] > 0:
        cell.step()
        steps += 1
    assert steps == math.ceil(10 * 4.0 * math.log(1e4)) == 369


# ---- release


@pytest.mark.parametrize(("recovery", "facilitation"), DYNAMICS)
def test_certain_release_follows_the_recursion(recovery: float, facilitation: float) -> None:
    """N q u R of every spike, by `plastic.membrane.release.recursion`."""
    terminal = Terminal(0, 0.3, recovery, facilitation, True)
    found = [terminal.release(t, 7.5, 0.4, 0.2) for t in TIMES]
    u, full = release.recursion(0.4, recovery, facilitation, TIMES)
    np.testing.assert_allclose(found, 7.5 * 0.2 * u * full, rtol=1e-12)


CELLS = 3000


def scores(dynamics: Mapping[str, float], expected: Floats) -> Floats:
    """Return (mean - expected) / standard error of the release at each spike, over many cells."""
    found = np.array(
        [
            [terminal.release(t, 8.0, 0.4, 0.2) for t in TIMES]
            for terminal in (
                Terminal(draws.key(5, cell, 0), 0.1, deterministic=False, **dynamics)
                for cell in range(CELLS)
            )
        ]
    )
    return np.asarray((found.mean(axis=0) - expected) / (found.std(axis=0) / math.sqrt(CELLS)))


@pytest.mark.parametrize(("recovery", "facilitation"), DYNAMICS)
def test_release_by_chance_has_the_recursion_as_its_mean(
    recovery: float, facilitation: float
) -> None:
    """3000 cells, whole sites: the standard error is the standard deviation over sqrt(3000)."""
    u, full = release.recursion(0.4, recovery, facilitation, TIMES)
    dynamics = {"recovery": recovery, "facilitation": facilitation}
    assert np.abs(scores(dynamics, 8.0 * 0.2 * u * full)).max() < 4


def test_another_recovery_is_seen() -> None:
    """The control: 100 instead of 120 ms of depletion."""
    u, full = release.recursion(0.4, 100.0, 0.0, TIMES)
    wrong = scores({"recovery": 120.0, "facilitation": 0.0}, 8.0 * 0.2 * u * full)
    assert np.abs(wrong).max() > 4


def test_a_fractional_site_releases_with_a_fractional_chance() -> None:
    """2.3 sites, p = 0.4: mean 0.92 and failures 0.6^2 (1 - 0.3 x 0.4), over 4000 events."""
    terminal = Terminal(draws.key(5, 0, 0), 0.0, 0.0, 0.0, False)
    found = np.array([terminal.release(float(k), 2.3, 0.4, 1.0) for k in range(4000)])
    failures = 0.36 * 0.88
    error = math.sqrt(failures * (1 - failures) / 4000)
    assert abs((found == 0).mean() - failures) / error < 4
    assert abs(found.mean() - 0.92) / (found.std() / math.sqrt(4000)) < 4
    assert abs(found.mean() - 0.8) / (found.std() / math.sqrt(4000)) > 4  # not two sites


def test_without_a_time_constant_nothing_is_kept() -> None:
    assert (kept(0.0, 0.0), kept(5.0, 0.0), kept(math.inf, 3.0)) == (0.0, 0.0, 0.0)
    assert kept(5.0, 10.0) == math.exp(-0.5)
