"""How to add a protocol: the implementer's manual.

A protocol is one final class in one file: a frozen table of checked keys, and one method,
``induction``, that says which pattern of times is repeated how often. Everything else (baseline,
follow-up, test pulses, controls, tables) is the same for all and lives here.

1.  The file's name is the public name, the class its CamelCase.
2.  Keys are fields with types of `plastic.quantities`; text with a unit becomes ms.
3.  ``induction()`` returns an `Induction`: times within one repeat per input (and under
    "injected" for forced spikes of the cell), the number of repeats, the interval between them.
4.  A value that cannot be used is refused by a validator with `plastic.quantities.refusal`,
    which says what is allowed. ``checked_pattern`` refuses everything that is no pattern.
"""

from __future__ import annotations

import inspect
import math
from abc import abstractmethod
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from itertools import pairwise
from typing import Annotated, ClassVar

import numpy as np
from pydantic import Field

from plastic.errors import Misfit, UnknownName
from plastic.protocols._schedule import NEAREST, Floats, Schedule, build
from plastic.quantities import Count, Duration, Names, Part, Time, refusal

MINUTE = 60_000.0
#: an hour of 500 inputs at 1 Hz; the schedule of more would fill the memory before anything runs
MOST_EVENTS = 2_000_000

#: names of inputs by the path of the key that names them
Named = dict[tuple[str | int, ...], str]


class Repeat(Part):
    """How often a pattern is repeated, and the time from start to start, ms."""

    times: Annotated[int, Count(1, 1_000_000)]
    every: Duration


class Pulses(Part):
    """Test pulses: one every `every` ms, the inputs in turn, the first half an interval in."""

    inputs: Names = Field(description="a list of inputs such as ['far']", min_length=1)
    every: Duration

    def times(self, start: float, end: float) -> dict[str, Floats]:
        """Return the pulses between `start` and `end` (ms) per input, ms."""
        steps = np.arange(math.ceil((end - start) / self.every), dtype=np.float64)
        pulses = np.asarray(start + self.every * (steps + 0.5), dtype=np.float64)
        pulses = pulses[pulses < end]
        turns = len(self.inputs)
        return {name: pulses[k::turns] for k, name in enumerate(self.inputs)}


@dataclass(frozen=True)
class Induction:
    """A pattern of times (ms within one repeat) per input, repeated `times` times `every` ms."""

    pattern: Mapping[str, Sequence[float]]
    times: int
    every: float
    #: whether test pulses go on during it
    tested: bool = False


class Protocol(Part):
    """Base of every protocol; see the manual at the top of this module.

    Parameters
    ----------
    baseline, follow_up : ms
        Epochs before and after the induction; only test pulses.
    test : Pulses, optional
        Test pulses in baseline and follow-up; none without it.
    partner : names, optional
        What the learning inputs are paired with: inputs, or "injected". By default everything in
        the pattern that does not learn.
    """

    baseline: Time = 10 * MINUTE
    follow_up: Time = 30 * MINUTE
    test: Pulses | None = None
    partner: Names = ()

    references: ClassVar[Sequence[str]] = ()

    @abstractmethod
    def induction(self) -> Induction:
        """Return what is repeated how often; see the manual, item 3."""

    @classmethod
    def summary(cls) -> str:
        """Return the first line of the protocol's docstring."""
        return (inspect.getdoc(cls) or "").split("\n")[0]

    def named_inputs(self) -> Named:
        """Return every input the protocol names, by the path of the key that names it."""
        found: Named = {}
        if self.test is not None:
            found |= {("test", "inputs", k): name for k, name in enumerate(self.test.inputs)}
        return found | {("partner", k): name for k, name in enumerate(self.partner)}

    def schedule(self, name: str, *, learns: Sequence[str] = ()) -> Schedule:
        """Return the exact times of the protocol.

        Parameters
        ----------
        name : str
            The name that results and tables will carry.
        learns : sequence of str
            The learning inputs: everything else in the pattern is the partner, unless the
            protocol names one. Without it the partner is all but the first of the pattern.

        Raises
        ------
        Misfit
            Events of one input that fall on each other, a partner that is not in the pattern.
        """
        it = self.induction()
        self._refuse_too_many(name, it)
        start, end = self.baseline, self.baseline + it.times * it.every
        tests: dict[str, Floats] = {}
        if self.test is not None:
            spans = [(0.0, start), (start, end), (end, end + self.follow_up)]
            parts = [self.test.times(a, b) for k, (a, b) in enumerate(spans) if k != 1 or it.tested]
            tests = {n: np.concatenate([part[n] for part in parts]) for n in self.test.inputs}
        return build(
            name,
            {key: np.asarray(times, dtype=float) for key, times in it.pattern.items()},
            times=it.times,
            every=it.every,
            baseline=start,
            follow_up=self.follow_up,
            test_times=tests,
            partner=self._partner(name, list(it.pattern), learns),
        )

    def _refuse_too_many(self, name: str, it: Induction) -> None:
        silence = self.baseline + self.follow_up + it.tested * it.times * it.every
        events = it.times * (1 + sum(map(len, it.pattern.values())))
        events += 0 if self.test is None else int(silence / self.test.every)
        if events > MOST_EVENTS:
            raise Misfit(
                f"protocol {name!r}", got=f"{events:,} events", expected=f"at most {MOST_EVENTS:,}"
            )

    def _partner(self, name: str, inside: list[str], learns: Sequence[str]) -> tuple[str, ...]:
        for chosen in self.partner:
            if chosen not in inside:
                raise UnknownName("event in the pattern", chosen, inside, where=f"protocol {name}")
        if self.partner:
            return self.partner
        moving = [key for key in learns if key in inside] or inside[:1]
        others = tuple(key for key in inside if key not in moving)
        return others or tuple(key for key in inside if key != moving[0])


def checked_pattern(
    pattern: Mapping[str, Sequence[float]], every: float, repeated: bool, *, key: str = "pattern"
) -> None:
    """Refuse a pattern that is empty, out of order, or that runs into its own repeat.

    Parameters
    ----------
    pattern : mapping of input to times within one repeat, ms
    every : float, ms
    repeated : bool
        Whether there is a next repeat to run into.
    key : str
        The key under which the pattern stands, for the message.
    """
    if not pattern:
        raise refusal("names no input; write { far = ['0 ms'] }", path=(key,), value={})
    for name, times in pattern.items():
        if not len(times):
            raise refusal("needs at least one time", path=(key, name), value=[])
        for k, (one, two) in enumerate(pairwise(times)):
            if two - one < NEAREST - 1e-6:
                raise refusal(
                    f"must be at least {NEAREST:g} ms after the one before, at {one:g} ms",
                    path=(key, name, k + 1),
                    value=f"{two:g} ms",
                )
        room = times[-1] if not repeated else max(times[-1], times[-1] - times[0] + NEAREST - 1e-6)
        if room >= every:
            raise refusal(
                f"overlaps the next repeat, which starts after {every:g} ms",
                path=(key, name),
                value=f"{times[-1]:g} ms",
            )
