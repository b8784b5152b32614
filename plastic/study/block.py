"""One block of work: one arm in one slice of the cells, simulated and read."""

from __future__ import annotations

import threading
from dataclasses import dataclass, field, replace

import numpy as np
from numpy.typing import NDArray

from plastic.engine.assembly import Scene, empty_log, events_of, input_times, wire
from plastic.engine.kernel import Rows, module_for, numbers_of
from plastic.engine.layout import Cells, Log, Wiring
from plastic.engine.readings import Reader, Shape, State, state_of
from plastic.errors import RuleError
from plastic.measures import Readout
from plastic.measures import find as find_measure
from plastic.measures import names as measure_names
from plastic.protocols import Schedule
from plastic.routes import Mixture
from plastic.study.firing import first_lags, spikes_of_repeats
from plastic.study.grid import Arm, reading_times
from plastic.study.model import Study
from plastic.study.population import Population, bare_reader, ceilings
from plastic.study.verdicts import NEVER, judge, reach

Floats = NDArray[np.float64]
Arrays = dict[str, NDArray[np.generic]]


class Stopped(Exception):  # noqa: N818 - a message, not a mistake
    """The run was asked to stop before this block was done."""


@dataclass
class Bench:
    """What the blocks of one slice of cells share: their reader and what the routes can reach."""

    study: Study
    population: Population
    chosen: slice
    _lock: threading.Lock = field(default_factory=threading.Lock)
    _reader: Reader | None = None
    _reach: dict[tuple[object, ...], tuple[NDArray[np.bool_], NDArray[np.int64]]] = field(
        default_factory=dict
    )
    _effects: Floats | None = None

    def reader(self) -> Reader:
        """Return the reader of the slice."""
        with self._lock:
            if self._reader is None:
                self._reader = bare_reader(self.population, self.chosen)
            return self._reader

    def effects(self) -> Floats:
        """Return the EPSP per nS of every contact, mV/nS, shape (cell, contact)."""
        reader = self.reader()
        with self._lock:
            if self._effects is None:
                count = range(len(self.population.scene.contacts))
                self._effects = np.stack([reader.effect(k) for k in count], axis=1)
            return self._effects

    def reach(self, arm: Arm, name: str) -> tuple[NDArray[np.bool_], NDArray[np.int64]]:
        """Return whether the arm's route and rule can reach the criterion at all, and why not."""
        reader, rule = self.reader(), arm.rule.rule
        inhibition = not arm.schedule.inhibition_blocked
        only = next(iter(rule.weights.values()))
        most = rule.factor(**{n: rule.number(w.high) for n, w in rule.weights.items()})
        key = (arm.route.name, name, inhibition, most, only.name)
        goal = self.study.compare.criterion.alone_fires
        with self._lock:
            if key not in self._reach:
                limit = np.full(len(reader.loads), min(float(most), 1e6))
                self._reach[key] = reach(
                    reader, name, arm.route, goal, highest_factor=limit, inhibition=inhibition
                )
            return self._reach[key]


def read_inputs(study: Study) -> list[str]:
    """Return the inputs that are read: learning ones, then other excitatory, undriven ones."""
    learns = list(study.compare.learns)
    free = [n for n, it in study.inputs.items() if n not in study.inhibitory and not it.driven_by]
    return learns + [n for n in free if n not in learns]


def wiring_of(study: Study, population: Population, arm: Arm, *, clocked: bool = False) -> Wiring:
    """Return the arrays of one arm."""
    rule, schedule = arm.rule.rule, arm.schedule
    scene = replace(population.scene, clocked=clocked)
    times = input_times(scene, schedule.times, inhibition_blocked=schedule.inhibition_blocked)
    events = events_of(scene, times, schedule.injected, pre_is=rule.pre_is)
    return wire(
        scene,
        events,
        end=schedule.end,
        readings=reading_times(schedule)[0],
        numbers=numbers_of(rule),
        route=arm.route,
        immediate=study.compare.expression == "immediate",
    )


def simulate(
    study: Study, population: Population, arm: Arm, chosen: slice, stop: NDArray[np.int64]
) -> tuple[Wiring, Cells, Log]:
    """Run one arm in some cells.

    Raises
    ------
    Stopped
        When ``stop[0]`` was set.
    RuleError
        When a weight is no number any more.
    """
    rule = arm.rule.rule
    wiring = wiring_of(study, population, arm)
    hold = study.compare.at_ceiling == "stop"
    cells = population.with_rule(rule, arm.route, hold=hold, chosen=chosen)
    log = empty_log(cells, wiring, len(Rows.of(type(rule)).inputs))
    if module_for(type(rule)).run_cells(wiring, cells, log, stop) < len(cells.cells):
        raise Stopped
    bad = np.flatnonzero(log.ended["fault"])
    if len(bad):
        name = population.scene.ordered_learners()[log.ended["fault"][bad[0]] - 1]
        raise RuleError(
            f"{arm.label}: the weight of {name!r} is no number in cell "
            f"{cells.cells['number'][bad[0]]} after {rule!r}"
        )
    return wiring, cells, log


def run_block(bench: Bench, arm: Arm, stop: NDArray[np.int64]) -> Arrays:
    """Return everything that the results hold of one arm in one slice of cells.

    Returns
    -------
    dict of str to array
        Names as in the results; the first axis is the cell.
    """
    simulated = simulate(bench.study, bench.population, arm, bench.chosen, stop)
    return read_block(bench, arm, *simulated)


def read_block(bench: Bench, arm: Arm, wiring: Wiring, cells: Cells, log: Log) -> Arrays:
    """Return what the results hold of one arm in one slice of cells that was simulated."""
    study, population = bench.study, bench.population
    reader, route, schedule = bench.reader(), arm.route, arm.schedule
    names, inhibition = read_inputs(study), not schedule.inhibition_blocked
    times, repeats, baseline = reading_times(schedule)
    state = state_of(population.scene, wiring, cells, route, log.expressed)
    asymptotic = np.repeat(log.factor[:, :, None, :], len(route.shares), axis=2)
    goal_state = state_of(population.scene, wiring, cells, route, asymptotic)
    shapes = [reader.shape(n, route, state, inhibition=inhibition) for n in names]
    fires = _stack([reader.fires_alone(n, route, state, inhibition=inhibition) for n in names])
    induced = _stack(
        [reader.fires_alone(n, route, goal_state, inhibition=inhibition) for n in names]
    )
    found: Arrays = {
        "factor": _by_input(population.scene, names, log.factor, 1.0),
        "factor_expressed": _by_input(population.scene, names, _expressed(route, log), 1.0),
        "weight": _by_input(population.scene, names, log.variables[:, :, 0], np.nan),
        "fires_alone_induced": induced,
        "release_probability": state.probability,
        "quantum": state.quantum,
        "sites": state.sites,
        "diameter": _diameters(population.scene, log),
    }
    found |= _measured(bench, names, shapes, fires, state, baseline)
    found |= _judged(bench, arm, log, fires, induced, names, schedule, times, repeats)
    return found


def _stack(rows: list[Floats]) -> Floats:
    return np.stack(rows, axis=1)


def _expressed(route: Mixture, log: Log) -> Floats:
    """Return the factor that is expressed, over all channels, (cell, reading, learner)."""
    exponents = np.array(list(route.shares.values()))[None, None, :, None]
    product = np.prod(np.maximum(log.expressed, 0.0) ** exponents, axis=2)
    return np.asarray(product ** (1.0 / exponents.sum()), dtype=float)


def _by_input(scene: Scene, names: list[str], values: Floats, other: float) -> Floats:
    """Return (cell, reading, learner) as (cell, input, reading), `other` without learning."""
    learners = scene.ordered_learners()
    rows = [
        values[:, :, learners.index(n)] if n in learners else np.full(values.shape[:2], other)
        for n in names
    ]
    return _stack(rows)


def _diameters(scene: Scene, log: Log) -> Floats:
    return np.swapaxes(log.diameter * scene.tree.stretch_diameter, 1, 2)


def _measured(
    bench: Bench, names: list[str], shapes: list[Shape], fires: Floats, state: State, baseline: int
) -> Arrays:
    scene = bench.population.scene
    index = [names.index(k.input) if k.input in names else -1 for k in scene.contacts]
    readout = Readout(
        peak=_stack([s.peak for s in shapes]),
        rise=_stack([s.rise for s in shapes]),
        half_width=_stack([s.half_width for s in shapes]),
        fires=fires,
        sites=state.sites,
        probability=state.probability,
        quantum=state.quantum,
        effect=bench.effects(),
        input_of=np.array(index),
        quantal_cv=np.array([k.quantal_cv for k in scene.contacts]),
        depletion=np.array([k.recovery for k in scene.contacts]),
        facilitation=np.array([k.facilitation for k in scene.contacts]),
        baseline=baseline,
    )
    return {name: find_measure(name).value(readout) for name in measure_names()}


def _judged(
    bench: Bench,
    arm: Arm,
    log: Log,
    fires: Floats,
    induced: Floats,
    names: list[str],
    schedule: Schedule,
    times: Floats,
    repeats: NDArray[np.int64],
) -> Arrays:
    study, goal = bench.study, bench.study.compare.criterion.alone_fires
    name = study.compare.criterion.input
    who = names.index(name)
    learner = bench.population.scene.ordered_learners().index(name)
    can, cause = bench.reach(arm, name)
    fired, count = spikes_of_repeats(schedule, log, study.dt)
    minutes = (times - schedule.epochs[1].start) / 60_000.0
    judged = {
        kind: judge(
            chances[:, who],
            goal,
            repeats=repeats,
            minutes=minutes,
            factor=log.factor[:, :, learner],
            partner_fired=fired,
            needs_partner=bool(schedule.partner) and not schedule.control,
            reachable=can,
        )
        for kind, chances in (("", fires), ("_induced", induced))
    }
    plain, late = judged["_induced"], judged[""]
    dose = arm.rule.rule.dose
    beyond = np.isfinite(plain.repeats) & (plain.repeats > (0 if dose is None else dose))
    return {
        "repeats_to_criterion": late.repeats,
        "repeats_to_criterion_induced": plain.repeats,
        "minutes_to_criterion": late.minutes,
        "verdict": late.verdict.astype(np.int8),
        "verdict_induced": plain.verdict.astype(np.int8),
        "never_cause": np.where(plain.verdict == NEVER, cause - 1, -1).astype(np.int8),
        "extrapolated": beyond.astype(np.int8),
        "partner_fired": fired,
        "spikes": count,
        "realised_lag": first_lags(schedule, log, name, study.dt),
        "ceiling": ceilings(bench.population, arm.route, bench.chosen)[:, learner],
    }
