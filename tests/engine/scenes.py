"""Cells with a far, a middle and a near input, to be run compiled and in plain Python.

`far` and `mid` learn at two places of one dendrite; `near` fires the cell; `brake` shunts the soma
and is driven by `near` and `far`; `far` may also land near the soma by an added contact.
"""

from __future__ import annotations

import math
from collections.abc import Callable, Mapping
from dataclasses import dataclass, field, replace
from typing import Any

import numpy as np
from numpy.typing import NDArray

from plastic import impose, routes, rules
from plastic.engine import layout
from plastic.engine.assembly import (
    Contact,
    Drive,
    Receptor,
    Scene,
    empty_log,
    events_of,
    input_times,
    wire,
)
from plastic.engine.kernel import Rows, module_for, numbers_of
from plastic.engine.layout import Cells, Log, Wiring, table
from plastic.engine.loop import run_reference
from plastic.membrane.spikes import BackPropagation
from plastic.membrane.tree import Dendrite, build_tree
from plastic.parameters import parameter
from plastic.routes import Mixture
from plastic.rules._interface import Changes, Rule, state, trace, weight

Floats = NDArray[np.float64]

FAST = Receptor(0.0, 0.5, 3.0)
JUMPY = Receptor(0.0, 0.0, 4.0)  # a single exponential
SHUNT = Receptor(-72.0, 0.5, 7.0)
#: sites, release probability, its highest, quantum (nS) of each input at rest
BASELINE = {
    "far": (12.0, 0.4, 0.9, 0.5),
    "mid": (7.4, 0.5, 0.8, 0.4),
    "near": (20.0, 0.9, 0.95, 1.2),
    "brake": (8.0, 0.6, 0.9, 0.3),
}
SPREAD = BackPropagation(velocity=150.0, length_constant=300.0, train_loss=0.15, floor=0.25)


class Forgetful(Rule):
    """What no rule of the catalogue does, all at once: it forgets, set traces, two weights."""

    gain: float = parameter(0.3, "1", low=0, high=1, source="invented")
    loss: float = parameter(0.2, "1", low=0, high=1, source="invented")
    tau_r: float = parameter(20.0, "ms", low=1e-3, source="invented")
    tau_o: float = parameter(30.0, "ms", low=1e-3, source="invented")
    tau_w: float = parameter(2500.0, "ms", low=1e-3, source="invented")
    tau_m: float = parameter(900.0, "ms", low=1e-3, source="invented")

    equation = "dw/dt = (1 - w)/tau_w; dv = gain r amplitude - loss o; factor = w v"
    pre_is = "spike"
    amplitudes = ("gain", "loss")

    w = weight(1.0, low=0.3, high=5.0)
    v = weight(2.0, low=0.5, high=8.0)
    seen = state(0.0)
    mood = state(1.0, scope="cell")
    r = trace("pre", tau="tau_r", jump="set")
    o = trace("post", tau="tau_o", jump="set")

    def at_pre(self, o: float, r: float) -> Changes:
        return {"v": -self.loss * o, "seen": 1.0 - r}

    def at_post(self, r: float, amplitude: float, mood: float) -> Changes:
        return {"w": self.gain * r * amplitude * mood, "v": self.gain * r * amplitude}

    def cell_at_post(self, o: float, mood: float) -> Changes:
        return {"mood": -0.2 * mood * o}

    def flow(self, dt: float, w: float) -> Changes:
        return {"w": (1.0 - w) * -math.expm1(-dt / self.tau_w)}

    def cell_flow(self, dt: float, mood: float) -> Changes:
        return {"mood": (1.0 - mood) * -math.expm1(-dt / self.tau_m)}

    def factor(self, w: float, v: float) -> float:
        return w * v / 2.0


def strong(name: str, times: float = 20.0) -> Rule:
    """Return a rule of the catalogue whose amplitudes are many times the published ones.

    A slow rule is doubled until three seconds of bursts move it by a tenth.
    """
    rule = rules.find(name)
    declared = {n: rule.parameters[n] for n in rule.amplitudes}
    pre = 350.0 * np.arange(9)
    post = np.sort((pre[:, None] + [10.0, 18.0, 26.0]).ravel())
    for doubled in range(20):
        by = times * 2**doubled
        made = rule(**{n: min(by * d.default, d.high) for n, d in declared.items()})
        if abs(float(impose(made, pre, post, compiled=False).factor[0, -1]) - 1) > 0.1:
            return made
    raise AssertionError(f"{name} cannot be made strong")


#: every rule of the catalogue, strong, and one that does what they do not
RULES: dict[str, Callable[[], Rule]] = {
    **{name: (lambda name=name: strong(name)) for name in rules.names()},
    "forgetful": Forgetful,
}


def pure(name: str, *, delay: float = 1000.0, tau: float = 1500.0, **limits: float) -> Mixture:
    """Return a route of the catalogue that is expressed within seconds."""
    return Mixture.pure(name, routes.find(name)(delay=delay, tau=tau, **limits))


def mixed(delay: float = 1000.0, tau: float = 1500.0) -> Mixture:
    """Return a bit of every route of the catalogue, each with its own delay."""
    names = routes.names()
    channels = {n: routes.find(n)(delay=k % 3 * delay, tau=tau) for k, n in enumerate(names)}
    return Mixture("all", {n: 1 / len(names) for n in names}, channels)


def scene(*, dynamics: Mapping[str, float] | None = None, **settings: Any) -> Scene:
    """Return the cell; `dynamics` are fields of the contacts of `far` and `near`."""
    places = [("shaft", x) for x in (60.0, 180.0, 300.0)]
    tree = build_tree({"shaft": Dendrite(400.0, 2.0), "side": Dendrite(150.0, 1.0)}, places, 0)
    near, mid, far = (tree.node_of[place] for place in places)
    moving = dict(dynamics or {})
    contacts = [
        Contact("far", far, FAST, delay=1.0, quantal_cv=0.3, neck=150.0, **moving),
        Contact("mid", mid, JUMPY, delay=0.5),
        Contact("near", near, FAST, quantal_cv=0.2, **moving),
        Contact("brake", 0, SHUNT),
        Contact("far", near, FAST, delay=2.5, neck=150.0, added=True, **moving),
    ]
    given: dict[str, Any] = {
        "tree": tree,
        "rm": 15_000.0,
        "ri": 150.0,
        "tau_m": 15.0,
        "rest": -68.0,
        "reset": -70.0,
        "refractory": 3.0,
        "contacts": contacts,
        "learners": ("far", "mid"),
        "drives": (Drive("near", "brake", 2.0), Drive("far", "brake", 3.0)),
        "inhibitory": ("brake",),
        "back_propagation": SPREAD,
        "seed": 11,
    }
    return Scene(**given | settings)


def pairings(repeats: int, every: float, first: float = 100.0) -> dict[str, Floats]:
    """Return `far`, then a burst of `near`, and `mid` before and after it in turn, ms."""
    starts = first + every * np.arange(repeats)
    return {
        "far": starts,
        "near": np.sort((starts[:, None] + [8.0, 16.0, 24.0]).ravel()),
        "mid": starts + np.where(np.arange(repeats) % 2, 30.0, 4.0),
    }


@dataclass(frozen=True)
class Trial:
    """One rule on one route in a few cells, with everything that happens to them."""

    rule: Rule
    route: Mixture | None
    scene: Scene = field(default_factory=scene)
    times: Mapping[str, Floats] = field(default_factory=lambda: pairings(9, 350.0))
    injected: Floats = field(default_factory=lambda: np.array([]))
    end: float = 3200.0
    readings: Floats | None = None
    immediate: bool = False
    held: float | None = None  # the weight at which learning stops
    cells: int = 2
    threshold: float | None = None  # mV over rest, of every cell

    def wiring(self) -> Wiring:
        """Return what the cells share."""
        times = input_times(self.scene, self.times)
        events = events_of(self.scene, times, self.injected, pre_is=self.rule.pre_is)
        at = np.linspace(0.0, self.end, 13) if self.readings is None else self.readings
        return wire(
            self.scene,
            events,
            end=self.end,
            readings=at,
            numbers=numbers_of(self.rule),
            route=self.route,
            immediate=self.immediate,
        )

    def population(self) -> Cells:
        """Return cells that differ in load, threshold, release and the amplitudes of the rule."""
        numbers, n = numbers_of(self.rule), np.arange(self.cells)
        base = np.array([BASELINE[k.input] for k in self.scene.contacts]).T[:, None, :]
        sites, probability, highest, quantum = base * np.ones((len(n), 1))
        parameters = np.tile(numbers.parameters, (len(n), 1))
        for name in self.rule.amplitudes:
            parameters[:, list(self.rule.parameters).index(name)] *= 1.0 - 0.3 * n
        threshold = 12.0 - n if self.threshold is None else self.threshold
        high = np.tile(numbers.high[None, :, None], (len(n), 1, len(self.scene.learners)))
        return Cells(
            table(layout.CELL, number=3 + 4 * n, load=8.0 + 2.0 * n, threshold=threshold),
            table(
                layout.RELEASE,
                sites=sites,
                probability=probability * (1.0 - 0.1 * n[:, None]),
                highest=highest,
                quantum=quantum,
            ),
            high if self.held is None else np.minimum(high, self.held),
            parameters,
        )

    def changed(self, **settings: Any) -> Trial:
        """Return the trial with other settings of its scene."""
        return replace(self, scene=replace(self.scene, **settings))

    def compiled(self) -> Log:
        """Run the compiled loop."""
        wiring, cells, kind = self.wiring(), self.population(), type(self.rule)
        log = empty_log(cells, wiring, len(Rows.of(kind).inputs))
        done = module_for(kind).run_cells(wiring, cells, log, np.zeros(1, np.int64))
        assert done == self.cells
        return log

    def reference(self) -> Log:
        """Run the plain loop."""
        return run_reference(
            self.rule, self.wiring(), self.population(), self.route, immediate=self.immediate
        )


#: what a run leaves that is no whole number
MEASURED = ("variables", "factor", "expressed", "diameter", "cell_states")


def differences(one: Log, other: Log) -> dict[str, float]:
    """Return the largest relative difference (absolute below 1) of everything in two logs."""
    found = {}
    for name in MEASURED:
        a, b = getattr(one, name), getattr(other, name)
        found[name] = float(np.max(np.abs(a - b) / np.maximum(1.0, np.abs(b)), initial=0.0))
    found["spikes"] = float(np.abs(one.ended["spikes"] - other.ended["spikes"]).max())
    found["spike_step"] = float(np.abs(one.spike_step - other.spike_step).max())
    return found


def fires(road: Callable[[Trial], Log], trial: Trial, threshold: float) -> bool:
    """Return whether a cell has spikes beyond the injected ones at a threshold (mV over rest)."""
    count = road(replace(trial, cells=1, threshold=threshold)).ended["spikes"][0]
    return int(count) > len(trial.injected)


def top_of(trial: Trial) -> float:
    """Return the highest voltage (mV over rest) of a compiled cell that only fires when injected.

    The threshold at which it just fires by itself, found by bisection.
    """
    low, high = 1e-3, 60.0
    for _ in range(50):
        middle = (low + high) / 2
        low, high = (middle, high) if fires(Trial.compiled, trial, middle) else (low, middle)
    return low


def has_top(road: Callable[[Trial], Log], trial: Trial, top: float, slack: float = 1e-9) -> bool:
    """Return whether the highest voltage of a cell is `top`, to a relative slack."""
    just_below, just_above = top * (1 - slack), top * (1 + slack)
    return fires(road, trial, just_below) and not fires(road, trial, just_above)


def assert_same(one: Log, other: Log, tolerance: float = 1e-10) -> None:
    """Assert that two logs agree to a relative tolerance, and in every spike exactly."""
    found = differences(one, other)
    assert (found.pop("spikes"), found.pop("spike_step")) == (0, 0)
    assert {name: size for name, size in found.items() if not size <= tolerance} == {}
