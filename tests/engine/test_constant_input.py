"""Cells under conductances that never close: closed forms of the leaky neuron and of the cable.

A receptor that decays over 1e12 ms stays open; a tiny one with a far reversal is a constant
current. Both loops must have the rates, voltages and charges that are known exactly.
"""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
import pytest

from plastic import rules
from plastic.engine.assembly import Contact, Receptor
from plastic.engine.layout import Cells, Log
from plastic.engine.plain import Membrane
from plastic.membrane.cable import conductances
from plastic.membrane.inhibition import steady_voltages
from plastic.membrane.spikes import leaky_interval
from plastic.membrane.tree import Dendrite, build_tree
from tests.engine.scenes import Trial, has_top, scene

NEVER = 1e12  # ms
LOAD, TAU, REST = 8.0, 15.0, -68.0
Road = Callable[[Trial], Log]
both_roads = pytest.mark.parametrize(
    "road", [Trial.compiled, Trial.reference], ids=["compiled", "reference"]
)


@dataclass(frozen=True)
class Held(Trial):
    """A trial whose contacts open once, at 0 ms, by `g` nS each."""

    g: tuple[float, ...] = ()

    def population(self) -> Cells:
        """Return cells of one load, with certain release of one quantum."""
        made = super().population()
        made.cells["load"] = LOAD
        for name in ("sites", "probability", "highest"):
            made.release[name] = 1.0
        made.release["quantum"] = self.g
        return made


def held(
    *synapses: tuple[int, float, float], end: float, threshold: float, **settings: object
) -> Held:
    """Return a trial of one cell with synapses of (node, nS, reversal from rest) that stay open."""
    names = ["far", "mid", "near"][: len(synapses)]
    contacts = [
        Contact(name, node, Receptor(REST + E, 0.0, NEVER))
        for name, (node, _, E) in zip(names, synapses, strict=True)
    ]
    plain = {"tree": build_tree({}, [], 0), "learners": (), "drives": (), "inhibitory": ()}
    made = scene(**{**plain, "contacts": contacts, "deterministic": True, **settings})
    return Held(
        rules.find("pair_timing")(),
        None,
        made,
        times={name: np.zeros(1) for name in names},
        end=end,
        readings=np.zeros(1),
        cells=1,
        threshold=threshold,
        g=tuple(g for _, g, _ in synapses),
    )


def intervals(log: Log) -> set[int]:
    """Return the intervals between the spikes of the only cell, in steps."""
    steps = log.spike_step[0, : int(log.ended["spikes"][0])]
    assert len(steps) > 3
    return set(np.diff(steps).tolist())


# ---- spikes


@both_roads
@pytest.mark.parametrize(
    ("steps", "dt", "reset", "refractory"),
    [(1, 0.1, 0.0, 0.0), (57, 0.1, 0.0, 2.0), (430, 0.1, -3.0, 3.0), (201, 0.05, 6.0, 0.5)],
)
@pytest.mark.parametrize("side", [-1e-6, 1e-6], ids=["just before", "just after"])
def test_a_constant_current_fires_at_the_rate_of_the_closed_form(
    road: Road, steps: int, dt: float, reset: float, refractory: float, side: float
) -> None:
    """refractory + tau ln[(V_inf - V_r)/(V_inf - V_T)], rounded up to the next step.

    The current is chosen so that the threshold is reached a millionth of the climb before or after
    a step: the loop spikes on that step, or on the next. So its own rate is right to 1e-6.
    """
    g, threshold = 1e-4, 12.0
    tau = TAU * LOAD / (LOAD + g)
    left = math.exp(-steps * dt * (1 + side) / tau)
    v_inf = (threshold - reset * left) / (1 - left)
    trial = held(
        (0, g, v_inf * (LOAD + g) / g),
        end=6 * (steps * dt + refractory) + 10 * steps * dt,
        threshold=threshold,
        dt=dt,
        reset=REST + reset,
        refractory=refractory,
    )
    exact = float(leaky_interval(v_inf, tau, threshold, reset, refractory))
    rounded = math.ceil(exact / dt)
    assert exact == pytest.approx(refractory + steps * dt * (1 + side), rel=1e-9)
    assert rounded == round(refractory / dt) + steps + (side > 0)
    assert intervals(road(trial)) == {rounded}


@both_roads
@pytest.mark.parametrize("g", [1.9, 4.0, 20.0])
def test_a_constant_conductance_shortens_the_time_constant_too(road: Road, g: float) -> None:
    """V_inf = g E/(G + g) and tau = C/(G + g), within the step of 0.02 ms."""
    trial = held((0, g, 65.0), end=300.0, threshold=12.0, dt=0.02, reset=REST, refractory=2.0)
    tau = TAU * LOAD / (LOAD + g)
    exact = float(leaky_interval(g * 65 / (LOAD + g), tau, 12.0, 0.0, 2.0))
    slow = float(leaky_interval(g * 65 / (LOAD + g), TAU, 12.0, 0.0, 2.0))
    (found,) = intervals(road(trial))
    assert exact - 1e-3 < 0.02 * found < exact + 0.021
    assert abs(0.02 * found - slow) > 0.05  # the control: the time constant of the membrane alone


@both_roads
@pytest.mark.parametrize(("v_inf", "fires"), [(12 - 1e-6, False), (12 + 1e-6, True)])
def test_at_the_rheobase_it_turns_from_silent_to_firing(
    road: Road, v_inf: float, fires: bool
) -> None:
    g = 1e-4
    trial = held((0, g, v_inf * (LOAD + g) / g), end=30 * TAU, threshold=12.0, dt=0.1)
    assert (int(road(trial).ended["spikes"][0]) > 0) == fires


# ---- voltages


@both_roads
@pytest.mark.parametrize("E_i", [0.0, -8.0], ids=["shunt", "hyperpolarising"])
@pytest.mark.parametrize("site", [0, 1, 2, 4], ids=["soma", "path", "synapse", "other dendrite"])
def test_a_cell_settles_where_the_steady_closed_form_is(road: Road, E_i: float, site: int) -> None:
    """Excitation of 3 nS at 200 um, inhibition of 5 nS somewhere, after 30 time constants."""
    dendrites = {"a": Dendrite(400.0, 1.5), "b": Dendrite(300.0, 1.0)}
    tree = build_tree(dendrites, [("a", 80.0), ("a", 200.0), ("a", 350.0), ("b", 150.0)], 0)
    synapses = [(2, 3.0, 65.0), (site, 5.0, E_i)]
    trial = held(*synapses, end=30 * TAU, threshold=50.0, tree=tree)
    nodes, g, E = zip(*synapses, strict=True)
    G = conductances(tree, LOAD, 15_000.0, 150.0)
    expected = float(steady_voltages(G, nodes, g, E)[0])
    assert expected < float(steady_voltages(G, [2], 3.0, 65.0)[0]) - 0.2
    assert has_top(road, trial, expected, slack=1e-8)


# ---- charge


def test_the_charge_at_the_soma_is_the_transfer_ratio_times_the_injected_charge() -> None:
    """Integral of V_soma over R_soma = (R_soma,x / R_soma) Q, for a pulse of any shape at any node.

    Rinzel & Rall 1974 (from memory, sure). On the first dendrite the ratio is cosh(L - X)/cosh L;
    sums over steps are exact for currents held over a step; what is left after 40 tau is 1e-17.
    """
    dendrites = {"a": Dendrite(400.0, 1.5), "b": Dendrite(300.0, 1.0)}
    places = [("a", 80.0), ("a", 200.0), ("a", 400.0), ("b", 150.0)]
    tree = build_tree(dendrites, places, 0)
    cell = Membrane(held((2, 0.0, 65.0), end=1.0, threshold=50.0, tree=tree).wiring(), LOAD)
    lam = 1e4 * math.sqrt(1.5e-4 / 4 * 15_000 / 150)
    # 1/R_soma: the load and both dendrites, G_inf tanh L, nS
    semi = [1e9 * math.pi / 2 * (d * 1e-4) ** 1.5 / math.sqrt(15_000 * 150) for d in (1.5, 1.0)]
    lengths = (400 / lam, 300 / (lam / math.sqrt(1.5)))
    total = LOAD + sum(G * math.tanh(L) for G, L in zip(semi, lengths, strict=True))
    for node, x in ((0, 0.0), (1, 80.0), (2, 200.0), (3, 400.0)):
        arrived, current = 0.0, [5.0, 40.0, 25.0, 0.0, 10.0]
        cell.v[:] = 0.0
        for step in range(round(40 * TAU / 0.1)):
            cell.step()
            cell.v += cell.integral[:, node] * (current[step] if step < len(current) else 0.0)
            arrived += float(cell.v[0]) * 0.1 * total
        ratio = math.cosh((400 - x) / lam) / math.cosh(400 / lam)
        assert arrived == pytest.approx(ratio * 0.1 * sum(current), rel=1e-6)


def test_the_charge_of_a_strong_conductance_is_not_its_weak_one_times_its_size() -> None:
    """The control: it depends on the voltage that it makes (exact for currents only)."""
    arrived = []
    for g in (0.1, 10.0):
        # decays over 5 ms
        trial = held((0, g, 65.0), end=1.0, threshold=50.0)
        contacts = [Contact("far", 0, Receptor(REST + 65.0, 0.0, 5.0))]
        cell = Membrane(trial.changed(contacts=contacts).wiring(), LOAD)
        cell.open(0, g)
        total = 0.0
        for _ in range(3000):
            cell.step()
            total += float(cell.v[0])
        arrived.append(total / g)
    assert arrived[1] < 0.9 * arrived[0]
