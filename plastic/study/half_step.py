"""`plastic.check_dt`: the arms of a study at its time step and at half of it, in a few cells.

Stepping is second order in dt where nothing fires, so that three quarters of the error of a step go
when it is halved; a spike falls on the grid of steps, which is first order. What halving changes is
therefore between one half and three quarters of what is wrong at the study's own step. Quanta are
the same in both: they depend on the event, never on the step.

Some volleys end within a hair of threshold, and a spike that comes or goes sends its cell another
way. No step is short enough to rule that out; a shorter one moves fewer cells. So the step is
judged by the cell in the middle, by which results are summarised too; the cell that moves most is
told beside it.
"""

from __future__ import annotations

import os
from collections.abc import Sequence
from concurrent.futures import ThreadPoolExecutor
from dataclasses import dataclass, replace
from pathlib import Path

import numpy as np
from numpy.typing import NDArray

from plastic.engine.kernel import module_for
from plastic.study.block import Arrays, Bench, read_block, simulate
from plastic.study.file import load_study
from plastic.study.firing import spike_times
from plastic.study.grid import Arm, grid_of, reading_times
from plastic.study.model import Study
from plastic.study.population import populate
from plastic.study.run import Progress, changed

Floats = NDArray[np.float64]

#: most simulated cells of a check
MOST_CELLS = 10
#: percent of the baseline by which factor and EPSP of the cell in the middle may change, and
#: percent of its count of repeats (ours: a tenth of the spread over cells that studies start from)
FINE, FINE_REPEATS = 2.0, 5.0
#: ms within which a spike is the same spike
NEAR = 2.0
#: percent of the spikes that may come or go: more than a few graze the threshold (ours)
FINE_SPIKES = 5.0


@dataclass(frozen=True)
class Change:
    """The change in the cell in the middle and in the cell that moves most."""

    middle: float
    largest: float

    @classmethod
    def of(cls, cells: Floats) -> Change:
        """Return that of a change per cell; none of no cells."""
        found = np.asarray(cells)[np.isfinite(cells)]
        return cls(float(np.median(found)), float(found.max())) if len(found) else cls(0.0, 0.0)


@dataclass(frozen=True)
class ArmChange:
    """What half the time step changes in one arm.

    Attributes
    ----------
    rule, route, protocol : str
    factor, epsp : Change
        Of induced factor and EPSP peak at the soma, percent of the baseline, the largest over
        inputs and readings.
    repeats : Change
        Of the repeats to criterion, induced or expressed, in cells that reach it at both steps.
    repeats_allowed : float
        FINE_REPEATS percent of the middle count, at least the repeats between two readings.
    verdicts : int
        Cells whose verdict is another one, induced or expressed.
    spikes, came_or_went : int
        Spikes at the study's step, and those of either step without one near them at the other.
    shift : float, ms
        Of a spike that is there at both.
    """

    rule: str
    route: str
    protocol: str
    factor: Change
    epsp: Change
    repeats: Change
    repeats_allowed: float
    verdicts: int
    spikes: int
    came_or_went: int
    shift: float

    @property
    def fine(self) -> bool:
        """Whether none of it matters."""
        return (
            max(self.factor.middle, self.epsp.middle) <= FINE
            and self.repeats.middle <= self.repeats_allowed
            and self.verdicts == 0
            and self.came_or_went <= max(1.0, FINE_SPIKES / 100 * self.spikes)
        )


@dataclass(frozen=True)
class StepCheck:
    """What half the time step changes in every arm of a study; `dt` in ms."""

    dt: float
    cells: int
    arms: tuple[ArmChange, ...]

    @property
    def fine(self) -> bool:
        """Whether the study's step is small enough in every arm."""
        return all(arm.fine for arm in self.arms)


def check_dt(
    study: Study | str | Path,
    *,
    cells: int | None = None,
    workers: int | None = None,
    progress: Progress | None = None,
) -> StepCheck:
    """Return what half the time step changes; nothing is kept.

    Parameters
    ----------
    study : Study, str or Path
        A study, or its file.
    cells : int, optional
        Simulated cells: by default those of the study, at most `MOST_CELLS`.
    workers : int, optional
        Threads; by default one per core.
    progress : callable, optional
        Called with (arms done, arms in all).

    Raises
    ------
    StudyError, UnknownName, DataError
        What is wrong with the study.
    """
    made = study if isinstance(study, Study) else load_study(study)
    few = changed(made, {"cells": min(made.cells, MOST_CELLS) if cells is None else cells})
    benches = _benches(few)
    arms, stop = grid_of(few, benches[0].population).arms, np.zeros(1, np.int64)
    for rule in dict.fromkeys(type(arm.rule.rule) for arm in arms):
        module_for(rule)
    found: list[ArmChange] = []
    pool = ThreadPoolExecutor(max_workers=workers or os.cpu_count() or 1)
    try:
        for one in pool.map(lambda arm: _change(benches, arm, stop), arms):
            found.append(one)
            if progress:
                progress(len(found), len(arms))
    except BaseException:
        stop[0] = 1
        pool.shutdown(wait=True, cancel_futures=True)
        raise
    pool.shutdown()
    return StepCheck(few.dt, few.cells, tuple(found))


def _benches(study: Study) -> tuple[Bench, Bench]:
    """Return the same cells at the study's step and at half of it."""
    population, whole = populate(study), slice(0, study.cells)
    half = study.model_copy(update={"dt": study.dt / 2})
    finer = replace(population, scene=replace(population.scene, dt=half.dt))
    return Bench(study, population, whole), Bench(half, finer, whole)


def _change(benches: Sequence[Bench], arm: Arm, stop: NDArray[np.int64]) -> ArmChange:
    read: list[Arrays] = []
    spikes: list[list[Floats]] = []
    for bench in benches:
        wiring, cells, log = simulate(bench.study, bench.population, arm, bench.chosen, stop)
        read.append(read_block(bench, arm, wiring, cells, log))
        spikes.append(spike_times(log, bench.study.dt))
    _, repeats, baseline = reading_times(arm.schedule)
    came_or_went, shift = spikes_moved(*spikes)
    change, count = counts_moved(read)
    return ArmChange(
        arm.rule.label,
        arm.route.name,
        arm.schedule.name,
        factor=_moved(read, "factor", baseline),
        epsp=_moved(read, "epsp_peak", baseline),
        repeats=change,
        repeats_allowed=max(FINE_REPEATS / 100 * count, float(np.diff(repeats).max(initial=1))),
        verdicts=int(
            np.any([read[0][k] != read[1][k] for k in ("verdict", "verdict_induced")], axis=0).sum()
        ),
        spikes=sum(map(len, spikes[0])),
        came_or_went=came_or_went,
        shift=shift,
    )


def _moved(read: Sequence[Arrays], name: str, baseline: int) -> Change:
    """Return the change of a variable (cell, input, reading) in percent of the baseline."""
    before, after = (np.asarray(one[name], dtype=float) for one in read)
    change = np.abs(after - before) / np.abs(before[..., baseline, np.newaxis])
    return Change.of(100 * np.nan_to_num(change, posinf=0.0).max(axis=(1, 2)))


def counts_moved(read: Sequence[Arrays]) -> tuple[Change, float]:
    """Return the change of the counts of repeats, induced and expressed, and the middle count.

    A cell that reaches it at one step only has another verdict.
    """
    names = ("repeats_to_criterion", "repeats_to_criterion_induced")
    before, after = (np.concatenate([np.asarray(one[n], float) for n in names]) for one in read)
    both = np.isfinite(before) & np.isfinite(after)
    return Change.of(np.abs(after[both] - before[both])), Change.of(before[both]).middle


def spikes_moved(before: Sequence[Floats], after: Sequence[Floats]) -> tuple[int, float]:
    """Return the spikes that came or went, and the largest shift of the others, ms.

    Parameters
    ----------
    before, after : sequence of array, ms
        Rising times of the spikes of every cell.
    """
    alone, shift = 0, 0.0
    for pair in zip(before, after, strict=True):
        for own, other in (pair, pair[::-1]):
            edges = np.concatenate([[-np.inf], other, [np.inf]])
            place = np.searchsorted(other, own)
            gap = np.minimum(own - edges[place], edges[place + 1] - own)
            alone += int((gap > NEAR).sum())
            shift = max(shift, float(np.max(gap[gap <= NEAR], initial=0.0)))
    return alone, shift
