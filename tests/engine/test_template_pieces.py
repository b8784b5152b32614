"""The pieces of the loop in ordinary Python, against the formulas of routes and of release."""

from __future__ import annotations

import math
from typing import Any

import numpy as np
import pytest
from numpy.typing import NDArray

from plastic import draws, routes
from plastic.engine import layout, template
from plastic.engine.layout import table
from plastic.membrane.release import recursion
from plastic.routes._interface import TARGETS

Floats = NDArray[np.float64]


def python(name: str) -> Any:
    """Return the plain function behind a compiled one of the template."""
    return getattr(template, name).py_func


settle = python("settle")
rescale = python("rescale")
traces_jump = python("traces_jump")
factor_table = python("factor_table")
express = python("express")
widen = python("widen")
tick_expression = python("tick_expression")
release = python("release")
certain = python("certain")


def records(dtype: np.dtype[Any], **columns: Any) -> Any:
    """Return records whose fields ordinary Python may read as attributes."""
    return table(dtype, **columns).view(np.recarray)


def test_changes_add_once_and_then_bounds_hold(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(template, "N_WEIGHTS", 2)
    monkeypatch.setattr(template, "N_VARIABLES", 3)
    S = np.array([[1.0, 1.0], [1.0, 1.0], [1.0, 1.0]])
    D = np.array([[9.0, 0.5], [9.0, -5.0], [9.0, -9.0]])
    low, high = np.array([0.0, 0.2]), np.array([[2.0, 2.0], [2.0, 2.0]])
    settle(S, D, low, high, 1)
    assert S.tolist() == [[1.0, 1.5], [1.0, 0.2], [1.0, -8.0]]  # a state has no bounds
    assert D.tolist() == [[9.0, 0.0], [9.0, 0.0], [9.0, 0.0]]


def test_scaled_traces_mean_the_same_after_the_reference_moved(
    monkeypatch: pytest.MonkeyPatch,
) -> None:
    """x(t) = X exp(-(t - t_ref)/tau), before and after."""
    monkeypatch.setattr(template, "N_PRE", 2)
    monkeypatch.setattr(template, "N_POST", 1)
    taus_x, taus_y = np.array([20.0, 700.0]), np.array([35.0])
    X, Y = np.array([[1.0, 2.0], [3.0, 4.0]]), np.array([[5.0, 6.0, 7.0]])
    meant = X * np.exp(-50 / taus_x)[:, None], Y * np.exp(-50 / taus_y)[:, None]
    fx, fy = np.zeros(2), np.zeros(1)
    rescale(X, Y, taus_x, taus_y, 50.0, fx, fy)
    np.testing.assert_allclose(X, meant[0], rtol=1e-14)
    np.testing.assert_allclose(Y, meant[1], rtol=1e-14)
    assert (fx.tolist(), fy.tolist()) == ([1, 1], [1])


@pytest.mark.parametrize("adds", [True, False])
def test_a_scaled_trace_jumps_by_one_or_to_one(monkeypatch: pytest.MonkeyPatch, adds: bool) -> None:
    for name, value in {"N_PRE": 1, "N_POST": 1, "PRE_ADDS": (adds,), "POST_ADDS": (adds,)}.items():
        monkeypatch.setattr(template, name, value)
    X, Y, fx, fy = np.full((1, 3), 2.0), np.full((1, 2), 3.0), np.array([0.25]), np.array([0.5])
    traces_jump(X, Y, fx, fy, np.array([2, 0, 9]), 2, np.array([0.0, 0.7]))
    jumped = [0.5 + 1, 1.5 + 1] if adds else [1.0, 1.0]
    assert (X[0] * 0.25).tolist() == [jumped[0], 0.5, jumped[0]]
    assert (Y[0] * 0.5).tolist() == [1.5, jumped[1]]


def test_two_short_tables_hold_every_gap() -> None:
    taus = np.array([20.0, 1000.0])
    held = factor_table(taus, 0.1)
    gaps = np.array([0, 1, 255, 256, 257, 4000, 65_535])
    found = held[:, 0, gaps & 255] * held[:, 1, gaps >> 8]
    np.testing.assert_allclose(found, np.exp(-gaps * 0.1 / taus[:, None]), rtol=1e-12)


def contact(**fields: Any) -> Any:
    nothing = dict.fromkeys(layout.CONTACT.names or (), 0)
    return records(layout.CONTACT, **{k: [v] for k, v in (nothing | fields).items()})


def channel(name: str, share: float, **more: Any) -> Any:
    """Return one channel as the engine holds it."""
    route = routes.find(name)()
    fields = {
        "target": TARGETS.index(route.target),
        "excess": int(route.form == "excess"),
        "delay": 0,
        "exponent": route.sign * share,
        "lowest": route.lowest,
        "highest": route.highest,
        "keep": 0.0,
    }
    return records(layout.CHANNEL, **{k: [v] for k, v in (fields | more).items()})


@pytest.mark.parametrize("name", routes.names())
@pytest.mark.parametrize("factor", [0.0, 0.5, 1.0, 1.4, 40.0])
@pytest.mark.parametrize("added", [0, 1], ids=["own", "added"])
def test_a_factor_is_expressed_in_the_variable_of_its_route(
    name: str, factor: float, added: int
) -> None:
    """N, p at most its highest, q / (1 + q R) with the neck R in Mohm and q in nS."""
    share, kind = 0.8, routes.find(name)
    sites, p, q, neck = 12.0, 0.4, 0.5, 200.0
    base = records(layout.RELEASE, sites=[sites], probability=[p], highest=[0.9], quantum=[q])
    now = np.full((1, 3), np.nan)
    express(
        contact(neck=neck, added=added),
        base,
        0,
        channel(name, share),
        np.full((1, 1), factor),
        0,
        now,
    )
    by = dict.fromkeys(TARGETS, 1.0) | {"added_sites": 0.0}
    by[kind.target] = float(kind().multiple(factor, share))
    q *= by["quantum"]
    assert now[0].tolist() == [
        pytest.approx(sites * by["sites"] * (by["added_sites"] if added else 1)),
        pytest.approx(min(p * by["probability"], 0.9)),
        pytest.approx(q / (1 + q * neck * by["neck"] / 1000)),
    ]


def widened(
    expressed: list[float], multiple: float = 1.0, share: float = 0.5
) -> tuple[float, bool]:
    """Return the diameter of the one stretch below two learners, another and an inhibitory one."""
    contacts = records(
        layout.CONTACT,
        **dict.fromkeys(layout.CONTACT.names or (), 0)
        | {"learner": [0, 1, -1, -1, 0], "excites": [1, 1, 1, 0, 1]},
    )
    stretches = records(layout.STRETCH, parent=0, child=1, widens=[1, 0], length=9.0, diameter=1.0)
    beyond = np.array([[1, 1, 1, 1, 0], [1, 1, 1, 1, 1]])
    multiples = np.array([multiple, 1.0])
    factors = np.array([expressed])
    moved = widen(stretches, beyond, contacts, channel("dendrite_width", share), factors, multiples)
    assert multiples[1] == 1.0
    return float(multiples[0]), bool(moved)


def test_a_stretch_follows_the_mean_over_what_excites_beyond_it() -> None:
    """(2^s + 0.9^s + 1) / 3: one contact does not learn, one inhibits, one lies nearer."""
    mean = (2**0.5 + 0.9**0.5 + 1) / 3
    assert widened([2.0, 0.9]) == (pytest.approx(mean, rel=1e-14), True)
    assert widened([1.0, 1.0]) == (1.0, False)
    assert widened([9.0, 9.0]) == (1.3, True)
    assert widened([0.0, 0.0]) == (0.7, True)


def test_a_diameter_moves_when_it_would_move_by_a_ten_thousandth() -> None:
    factor = 1.21
    goal = (2 * 1.1 + 1) / 3
    assert widened([factor, factor], goal * (1 + 5e-5)) == (goal * (1 + 5e-5), False)
    assert widened([factor, factor], goal * (1 + 2e-4)) == (pytest.approx(goal, rel=1e-14), True)


def test_expression_follows_the_factor_late_and_slowly(monkeypatch: pytest.MonkeyPatch) -> None:
    """After a delay of d ticks: 1 + (f - 1) (1 - keep^n) for a factor that is f from tick 0 on."""
    monkeypatch.setattr(template, "factor_of", lambda p, S, i: S[0, i])
    late = np.concatenate(
        [channel("quantal_size", 1.0, delay=d, keep=k) for d, k in ((0, 0.0), (0, 0.7), (3, 0.9))]
    )
    history, expressed = np.ones((4, 2)), np.ones((3, 2))
    S = np.array([[2.0, 0.5]])
    for tick in range(12):
        tick_expression(np.zeros(0), S, late.view(np.recarray), history, tick, expressed)
        shares = [1.0, 1 - 0.7 ** (tick + 1), 1 - 0.9 ** max(tick + 1 - 3, 0)]
        expected = [[1 + (f - 1) * share for f in (2.0, 0.5)] for share in shares]
        np.testing.assert_allclose(expressed, expected, rtol=1e-13)


TIMES = [5.0, 15.0, 25.0, 35.0, 400.0, 420.0]
DYNAMICS = {
    "none": (0.0, 0.0),
    "depletes": (150.0, 0.0),
    "facilitates": (0.0, 80.0),
    "both": (150.0, 80.0),
}


def released(kind: str, *, deterministic: bool, cell: int = 0, cv: float = 0.0) -> Floats:
    """Return the conductance that each spike of `TIMES` releases from 10 sites, p 0.3, q 0.5."""
    recovery, facilitation = DYNAMICS[kind]
    one = contact(recovery=recovery, facilitation=facilitation, cv=cv)
    now, memory = np.array([[10.0, 0.3, 0.5]]), np.array([[0.0, 1.0, 0.0, -1e300]])
    stream = np.uint64(draws.key(1, cell, 0))
    return np.array(
        [release(one, 0, deterministic, stream, n, t, now, memory) for n, t in enumerate(TIMES)]
    )


@pytest.mark.parametrize("kind", DYNAMICS)
def test_deterministic_release_is_the_recursion(kind: str) -> None:
    u, R = recursion(0.3, *DYNAMICS[kind], TIMES)
    np.testing.assert_allclose(released(kind, deterministic=True), 10 * 0.5 * u * R, rtol=1e-12)


@pytest.mark.parametrize("kind", DYNAMICS)
def test_the_recursion_is_the_mean_of_stochastic_release(kind: str) -> None:
    """Standard error of each spike's mean over 1000 cells; control: another kind of dynamics."""
    drawn = np.array([released(kind, deterministic=False, cell=c, cv=0.2) for c in range(1000)])
    error = drawn.std(axis=0) / math.sqrt(len(drawn))
    for other in DYNAMICS:
        u, R = recursion(0.3, *DYNAMICS[other], TIMES)
        z = np.abs((drawn.mean(axis=0) - 5.0 * u * R) / error).max()
        assert z < 4 if other == kind else z > 6


CERTAIN = {
    "whole sites": ({}, 1.0, 12.0, False),
    "the mean": ({"cv": 0.3}, 0.4, 7.5, True),
    "no sites": ({}, 1.0, 0.0, False),
}
UNCERTAIN = {
    "failures": ({}, 0.4, 12.0, False),
    "quantal variance": ({"cv": 0.3}, 1.0, 12.0, False),
    "a part of a site": ({}, 1.0, 7.5, False),
    "depletion": ({"recovery": 150.0}, 1.0, 12.0, False),
    "depletion of the mean": ({"recovery": 150.0}, 0.4, 12.0, True),
    "facilitation of the mean": ({"facilitation": 80.0}, 0.4, 12.0, True),
}


def called_and_released(
    fields: dict[str, float], p: float, sites: float, deterministic: bool
) -> tuple[float, list[float]]:
    """Return what is called certain (-1: nothing) and what fifty spikes release."""
    one = contact(learner=-1, **fields)
    base = records(layout.RELEASE, sites=[sites], probability=[p], highest=[1.0], quantum=[0.5])
    now, memory = np.array([[sites, p, 0.5]]), np.array([[0.0, 1.0, 0.0, -1e300, 0.0]])
    key, none = np.uint64(draws.key(1, 2, 3)), channel("quantal_size", 1.0)[:0]
    released = [release(one, 0, deterministic, key, n, 9.0 * n, now, memory) for n in range(50)]
    return float(certain(one, base, none, 0, deterministic, True)), [float(g) for g in released]


@pytest.mark.parametrize("kind", CERTAIN)
def test_what_is_certain_is_what_every_spike_releases(kind: str) -> None:
    sure, released = called_and_released(*CERTAIN[kind])
    assert released == [pytest.approx(sure, rel=1e-14)] * 50


@pytest.mark.parametrize("kind", UNCERTAIN)
def test_what_varies_is_not_called_certain(kind: str) -> None:
    sure, released = called_and_released(*UNCERTAIN[kind])
    assert sure == -1.0
    assert len(set(released)) > 1


@pytest.mark.parametrize("name", routes.names())
@pytest.mark.parametrize("share", [1.0, 0.5])
@pytest.mark.parametrize("immediate", [True, False])
def test_a_learner_is_certain_only_in_proportion_to_its_factor(
    name: str, share: float, immediate: bool
) -> None:
    base = records(layout.RELEASE, sites=[12.0], probability=[1.0], highest=[1.0], quantum=[0.5])
    found = certain(contact(), base, channel(name, share), 0, False, immediate)
    proportional = name == "quantal_size" and share == 1.0 and immediate
    assert found == (6.0 if proportional else -1.0)
    assert certain(contact(neck=9.0), base, channel(name, share), 0, False, immediate) == -1.0
    assert certain(contact(added=1), base, channel(name, share), 0, False, immediate) == -1.0
