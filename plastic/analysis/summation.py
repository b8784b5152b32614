"""Which inputs reach threshold together, with and without inhibition."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from itertools import combinations

import numpy as np

from plastic.analysis.subject import Subject
from plastic.engine.assembly import input_times
from plastic.engine.layout import Floats
from plastic.engine.plain import Terminal
from plastic.engine.traces import Opening


@dataclass(frozen=True)
class Combination:
    """Some excitatory inputs stimulated once, at the same time, at their mean release; no spike.

    Attributes
    ----------
    inputs : tuple of str
    linear : float, mV
        Peak of the sum of what each does alone, inhibition blocked.
    excited : float, mV
        Peak at the soma, inhibition blocked.
    inhibited : float, mV
        The same with the inhibition that they drive, and that of inhibitory inputs that nothing
        drives, stimulated with them.
    threshold : float, mV
        All are from rest.
    """

    inputs: tuple[str, ...]
    linear: float
    excited: float
    inhibited: float
    threshold: float

    @property
    def label(self) -> str:
        """What tables and figures call it; more than three are all of them."""
        many = f"all {len(self.inputs)} excitatory inputs"
        return " + ".join(self.inputs) if len(self.inputs) <= 3 else many

    @property
    def sublinear(self) -> float:
        """How much less the peak is than the linear sum, percent, inhibition blocked."""
        return 100 * (1 - self.excited / self.linear)

    @property
    def taken(self) -> float:
        """How much of the peak inhibition takes, percent."""
        return 100 * (1 - self.inhibited / self.excited)

    def missing(self, *, inhibition: bool) -> float:
        """Return how much the peak is short of the threshold, mV; negative beyond it."""
        return self.threshold - (self.inhibited if inhibition else self.excited)

    def fires(self, *, inhibition: bool) -> bool:
        """Return whether the threshold is reached."""
        return self.missing(inhibition=inhibition) <= 0


def combinations_of(subject: Subject) -> list[Combination]:
    """Return each excitatory input alone, each pair, and all of them.

    Inputs that others drive come with their drivers and are not stimulated themselves.
    """
    driven = {drive.driven for drive in subject.cell.scene.drives}
    blocked = set(subject.cell.scene.inhibitory)
    excitatory = [n for n in subject.cell.scene.inputs if n not in blocked]
    members = [n for n in excitatory if n not in driven] or excitatory
    chosen: list[tuple[str, ...]] = [(name,) for name in members]
    chosen += combinations(members, 2)
    chosen += [tuple(members)] if len(members) > 2 else []
    if not members:
        return []
    free, held = (_somatic(subject, chosen, inhibition=flag) for flag in (False, True))
    alone = {names[0]: trace for names, trace in zip(chosen, free, strict=True) if len(names) == 1}
    return [
        Combination(
            names,
            linear=float(np.max(sum(alone[name] for name in names))),
            excited=float(free[i].max()),
            inhibited=float(held[i].max()),
            threshold=subject.threshold,
        )
        for i, names in enumerate(chosen)
    ]


def _somatic(subject: Subject, chosen: Sequence[tuple[str, ...]], *, inhibition: bool) -> Floats:
    """Return the voltage at the soma for each combination, (combination, step)."""
    sets = [openings_of(subject, names, inhibition=inhibition) for names in chosen]
    return np.asarray(subject.run(sets, [0]).voltage[:, 0], dtype=float)


def openings_of(subject: Subject, names: Sequence[str], *, inhibition: bool) -> list[Opening]:
    """Return everything that opens when some inputs are stimulated at 0 ms."""
    scene, cell = subject.cell.scene, subject.cell
    driven = {drive.driven for drive in scene.drives}
    free = [name for name in scene.inhibitory if name not in driven]
    start = {name: np.zeros(1) for name in [*names, *(free if inhibition else [])]}
    times = input_times(scene, start, inhibition_blocked=not inhibition)
    found = []
    for k, contact in enumerate(scene.contacts):
        if contact.added:
            continue
        quantum = float(cell.quantum[0, k])
        seen = quantum / (1.0 + quantum * contact.neck * 1e-3)
        terminal = Terminal(0, 0.0, contact.recovery, contact.facilitation, deterministic=True)
        for t in times.get(contact.input, np.empty(0)):
            late = round((float(t) + contact.delay) / scene.dt) * scene.dt
            amount = terminal.release(
                late, float(cell.sites[0, k]), float(cell.probability[0, k]), seen
            )
            found.append(Opening(k, late, amount))
    return found
