"""Voltages over time of one cell: other roads are a fine cable, an ODE solver and closed forms."""

from __future__ import annotations

from dataclasses import replace
from typing import Any

import numpy as np
import pytest
from scipy.integrate import solve_ivp
from scipy.optimize import brentq

from plastic.engine.assembly import Contact, Receptor, Scene
from plastic.engine.layout import Floats
from plastic.engine.traces import Opening, Traces, shape, traces
from plastic.membrane.cable import Dendrite, build_tree, conductances, leaks
from plastic.membrane.receptors import conductance
from tests.membrane.fine_cable import FineCable

LOAD, TAU = 10.0, 20.0
FAST, SLOW, PULL = Receptor(0.0, 0.3, 2.0), Receptor(0.0, 0.0, 8.0), Receptor(-80.0, 0.5, 6.0)


def scene(refine: int = 1, dt: float = 0.05) -> Scene:
    """A tip, a middle and a soma contact on one dendrite, and a jumpy one on another."""
    places = [("long", 400.0), ("long", 150.0), ("soma", 0.0), ("thin", 100.0)]
    tree = build_tree({"long": Dendrite(400.0, 2.0), "thin": Dendrite(120.0, 0.6)}, places, refine)
    kinds = (FAST, FAST, PULL, SLOW)
    return Scene(
        tree=tree,
        rm=20_000.0,
        ri=150.0,
        tau_m=TAU,
        rest=-65.0,
        reset=-70.0,
        refractory=2.0,
        contacts=[
            Contact(f"i{k}", tree.node_of[place], kind)
            for k, (place, kind) in enumerate(zip(places, kinds, strict=True))
        ],
        dt=dt,
    )


#: everything at once, at times on every grid used here
ALL = [Opening(0, 0.0, 3.0), Opening(1, 2.0, 5.0), Opening(2, 3.0, 8.0), Opening(3, 1.0, 2.0)]


def solved(one: Scene, openings: list[Opening], end: float) -> Floats:
    """The soma by an ODE solver, at steps of 1 ms."""
    matrix = conductances(one.tree, LOAD, one.rm, one.ri)
    capacitance = TAU * leaks(one.tree, LOAD, one.rm, one.ri)

    def slope(t: float, v: Floats) -> Floats:
        current = -matrix @ v
        for o in openings:
            contact = one.contacts[o.contact]
            r = contact.receptor
            g = o.peak * float(conductance(t - o.time, r.rise, r.decay))
            current[contact.node] += g * (r.reversal + 65.0 - v[contact.node])
        return current / capacitance

    out = [np.zeros(one.tree.n_nodes)]
    for k in range(int(end)):  # from jump to jump, so that no step crosses one
        done = solve_ivp(slope, (k, k + 1), out[-1], method="LSODA", rtol=1e-10, atol=1e-12)
        out.append(done.y[:, -1])
    return np.array(out)[:, 0]


def errors(openings: list[Opening], steps: tuple[float, ...]) -> Floats:
    """Largest difference from the solver at whole ms, mV, for each step."""
    reference = solved(scene(), openings, 20.0)
    found = []
    for dt in steps:
        seen = traces(scene(dt=dt), LOAD, [openings], length=20.0 + dt, record=[0]).voltage[0, 0]
        found.append(np.max(np.abs(seen[:: round(1 / dt)] - reference)))
    return np.array(found)


@pytest.mark.parametrize("k", range(4))
def test_the_error_against_an_ode_solver_falls_with_the_square_of_the_step(k: int) -> None:
    found = errors([ALL[k]], (0.05, 0.025, 0.0125))
    assert np.log2(found[1] / found[2]) == pytest.approx(2.0, abs=0.15)
    assert found[2] < 1e-5


def test_what_opens_together_is_what_an_ode_solver_makes_of_it() -> None:
    assert errors(ALL, (0.0125,))[0] < 1e-5


@pytest.mark.parametrize(("place", "g"), [(400.0, 1.0), (400.0, 20.0), (100.0, 20.0)])
def test_a_finely_cut_cell_has_the_epsps_of_a_continuous_cable(place: float, g: float) -> None:
    """Finite volumes with Crank-Nicolson that share no code; both are second order."""
    tree = build_tree({"d": Dendrite(400.0, 2.0)}, [("d", place), ("d", 400.0)], 15)
    one = replace(
        scene(dt=0.02), tree=tree, contacts=[Contact("a", tree.node_of["d", place], FAST)]
    )
    seen = traces(one, LOAD, [[Opening(0, 0.0, g)]], length=40.0, record=[0, one.contacts[0].node])
    cable = FineCable(400.0, 2.0, LOAD, pieces=200)
    _, fine = cable.run(
        int(place / 2), lambda t: g * conductance(t, 0.3, 2.0), 65.0, dt=0.01, duration=40.0
    )
    mine = [shape(seen.voltage[0, k], 0.02) for k in (0, 1)]
    true = [shape(fine[k], 0.01) for k in (0, 1)]
    assert [m.peak for m in mine] == pytest.approx([t.peak for t in true], rel=1e-3)
    assert [m.time for m in mine] == pytest.approx([t.time for t in true], abs=0.02)
    assert [m.half_width for m in mine] == pytest.approx([t.half_width for t in true], rel=2e-3)


def test_a_cell_cut_more_coarsely_is_farther_from_the_cable() -> None:
    """The control of the test above."""
    tips = []
    for refine in (0, 1, 3, 15):
        seen = traces(scene(refine), LOAD, [[ALL[0]]], length=40.0, record=[0])
        tips.append(shape(seen.voltage[0, 0], seen.dt).peak)
    off = np.abs(np.array(tips[:-1]) / tips[-1] - 1)
    assert off[0] > 2 * off[1] > 4 * off[2] > 0


def integral(seen: Traces) -> float:
    """Integral of the first recorded voltage, mV ms; what is left at the end decays by tau."""
    trace = seen.voltage[0, 0]
    return float(seen.dt * (trace.sum() - trace[0] / 2 - trace[-1] / 2) + TAU * trace[-1])


@pytest.mark.parametrize("k", [0, 1, 2, 3])
def test_the_integral_at_the_soma_is_transfer_resistance_times_charge(k: int) -> None:
    """Charge transfer in a linear cell, whatever the time course (Rinzel & Rall 1974)."""
    one = scene(dt=0.02)
    seen = traces(one, LOAD, [[ALL[k]]], length=400.0, record=[0])
    node = one.contacts[k].node
    R = np.linalg.inv(conductances(one.tree, LOAD, one.rm, one.ri))[node, 0] * 1000
    # Mohm pC = mV ms
    assert integral(seen) == pytest.approx(R * seen.charge[0, node], rel=2e-5)
    assert np.count_nonzero(seen.charge[0]) == 1


def test_the_charge_is_the_integral_of_g_times_the_driving_force() -> None:
    one, g = scene(dt=0.005), 4.0
    node = one.contacts[0].node
    seen = traces(one, LOAD, [[Opening(0, 0.0, g)]], length=30.0, record=[node])
    t = np.arange(seen.voltage.shape[-1]) * 0.005
    current = g * conductance(t, 0.3, 2.0) * (65.0 - seen.voltage[0, 0])  # pA
    assert seen.charge[0, node] == pytest.approx(np.trapezoid(current, t) / 1000, rel=1e-5)


def test_sets_do_not_know_of_each_other() -> None:
    together = traces(scene(), LOAD, [[o] for o in ALL], length=20.0, record=[0, 1])
    for k, one in enumerate(ALL):
        apart = traces(scene(), LOAD, [[one]], length=20.0, record=[0, 1])
        np.testing.assert_allclose(together.voltage[k], apart.voltage[0], atol=1e-12)


def test_a_huge_conductance_takes_its_node_to_the_reversal_and_not_beyond() -> None:
    one = scene(refine=7)
    node = one.contacts[0].node
    seen = traces(one, LOAD, [[Opening(0, 0.0, 1e7)]], length=10.0, record=[node]).voltage[0, 0]
    assert 64.9 < seen.max() <= 65.0 + 1e-9


def test_a_wider_dendrite_is_another_cell() -> None:
    one = scene()
    wide = replace(
        one,
        tree=build_tree(
            {"long": Dendrite(400.0, 3.0), "thin": Dendrite(120.0, 0.9)},
            [("long", 400.0), ("long", 150.0), ("soma", 0.0), ("thin", 100.0)],
            1,
        ),
    )
    found = traces(one, LOAD, [ALL], length=20.0, record=[0], multiple=1.5).voltage
    np.testing.assert_allclose(found, traces(wide, LOAD, [ALL], length=20.0, record=[0]).voltage)


# ---- shapes


def alpha(t: Any) -> Any:
    return t * np.exp(1 - t)


def width(level: float) -> tuple[float, float]:
    return brentq(lambda t: alpha(t) - level, 0, 1), brentq(lambda t: alpha(t) - level, 1, 20)


@pytest.mark.parametrize("scale", [7.0, -0.02])
def test_the_shape_of_an_alpha_function_is_its_closed_form(scale: float) -> None:
    """Peak 1 at t = 1; levels by root finding."""
    dt = 0.013
    found = shape(scale * alpha(np.arange(0, 20, dt)), dt)
    half, rise = width(0.5), width(0.8)[0] - width(0.2)[0]
    assert found.peak == pytest.approx(scale, rel=1e-4)
    assert found.time == pytest.approx(1.0, abs=1e-4)
    assert (found.rise, found.half_width) == pytest.approx((rise, half[1] - half[0]), rel=1e-4)


def test_what_is_flat_or_does_not_come_back_has_no_shape() -> None:
    flat = shape(np.zeros(50), 0.1)
    assert flat.peak == 0
    assert np.isnan([flat.time, flat.rise, flat.half_width]).all()
    ramp = shape(np.linspace(0, 1, 50), 0.1)
    assert ramp.peak == 1
    assert np.isnan(ramp.half_width)
    assert ramp.rise == pytest.approx(0.6 * 4.9)
