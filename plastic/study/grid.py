"""The grid of a study: every rule with every route on every protocol, and when it is read."""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from plastic.engine.layout import Wiring
from plastic.engine.readings import Reader, state_of
from plastic.errors import Misfit
from plastic.protocols import Schedule
from plastic.routes import Mixture
from plastic.study.choices import RuleChoice
from plastic.study.model import Study
from plastic.study.population import Population, bare_reader

Floats = NDArray[np.float64]

#: most readings in the baseline, in the induction and in the follow-up
BASELINE_READINGS, INDUCTION_READINGS, FOLLOW_UP_READINGS = 5, 120, 60


@dataclass(frozen=True)
class Arm:
    """One rule, one route, one protocol; the numbers are places on the axes of the results."""

    rule: RuleChoice
    route: Mixture
    schedule: Schedule
    place: tuple[int, int, int]

    @property
    def label(self) -> str:
        """The arm in words."""
        return f"{self.rule.label} / {self.route.name} / {self.schedule.name}"


@dataclass(frozen=True)
class Grid:
    """All arms of a study, and the labels of the axes they lie on."""

    arms: list[Arm]
    rules: list[str]
    routes: list[str]
    protocols: list[str]
    schedules: dict[str, Schedule]
    mixtures: list[Mixture]
    not_applicable: dict[str, str]


def grid_of(study: Study, population: Population) -> Grid:
    """Return the arms of a study; the controls run on one route only.

    Raises
    ------
    Misfit
        ``match = "sensitivity"`` with a channel that does not strengthen the input.
    """
    chosen, compare = study.schedules(), study.compare
    mixtures = list(compare.routes)
    if compare.match == "sensitivity":
        mixtures = [matched(population, compare.criterion.input, route) for route in mixtures]
    arms = [
        Arm(rule, route, schedule, (a, b, c))
        for a, rule in enumerate(compare.rules)
        for b, route in enumerate(mixtures)
        for c, schedule in enumerate(chosen.values())
        if not schedule.control or route.name == compare.control_route.name
    ]
    left_out = study.controls_left_out()
    return Grid(
        arms,
        [r.label for r in compare.rules],
        [m.name for m in mixtures],
        [*chosen, *left_out],
        chosen,
        mixtures,
        left_out,
    )


def reading_times(schedule: Schedule) -> tuple[Floats, NDArray[np.int64], int]:
    """Return when a schedule is read (ms), the repeats completed then, and the end of baseline.

    Readings see the cell at the end of a repeat, just before the next one starts.
    """
    baseline, induction, follow_up = schedule.epochs
    before = np.linspace(0.0, baseline.end, BASELINE_READINGS) if baseline.end > 0 else np.zeros(1)
    ends = schedule.repeat_ends
    every = max(1, -(-len(ends) // INDUCTION_READINGS))
    kept = np.arange(every - 1, len(ends), every)
    if len(ends) and (not len(kept) or kept[-1] != len(ends) - 1):
        kept = np.append(kept, len(ends) - 1)
    minutes = np.arange(1, FOLLOW_UP_READINGS + 1) / FOLLOW_UP_READINGS
    after = induction.end + minutes * (follow_up.end - induction.end)
    times = np.concatenate([before, ends[kept], after if follow_up.end > induction.end else []])
    counts = np.concatenate(
        [np.zeros(len(before)), kept + 1, np.full(len(times) - len(before) - len(kept), len(ends))]
    )
    return times, counts.astype(np.int64), len(before) - 1


def sensitivity(population: Population, name: str, route: Mixture, channel: str) -> float:
    """Return d ln EPSP / d ln factor of one channel at baseline, the median over cells."""
    reader = bare_reader(population)
    one = Mixture(channel, {channel: 1.0}, {channel: route.channels[channel]})
    return float(np.median(_log_slope(reader, reader.wiring, name, one)))


def _log_slope(reader: Reader, wiring: Wiring, name: str, one: Mixture) -> Floats:
    channel = next(iter(one.channels.values()))
    steps = np.array([1.0, 1.02] if channel.form == "excess" else [0.99, 1.01])
    n, learners = len(reader.loads), len(reader.scene.learners)
    factors = np.tile(steps[None, :, None, None], (n, 1, 1, learners))
    state = state_of(reader.scene, wiring, reader.cells, one, factors)
    peak = reader.shape(name, one, state).peak
    return np.asarray(np.log(peak[:, 1] / peak[:, 0]) / np.log(steps[1] / steps[0]), dtype=float)


def matched(population: Population, name: str, route: Mixture) -> Mixture:
    """Return the route with every exponent divided by the sensitivity of its channel."""
    shares = {}
    for channel, share in route.shares.items():
        slope = sensitivity(population, name, route, channel)
        if slope <= 1e-3:
            raise Misfit(
                f"compare.match = 'sensitivity', route {route.name!r}",
                got=f"d ln EPSP / d ln factor = {slope:.3g} for {channel} at baseline",
                expected="a channel that strengthens the input (above 0.001)",
            )
        shares[channel] = share / slope
    return replace(route, shares=shares, matched=True)
