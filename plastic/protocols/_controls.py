"""Controls: what a protocol is compared with, made from its own schedule."""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from dataclasses import replace
from typing import Any

import numpy as np

from plastic.errors import Misfit, UnknownName
from plastic.protocols._schedule import Floats, Schedule, build

#: ms; events further apart than this are unpaired: pairs at +-100 ms changed nothing in layer 5
#: (Markram et al. 1997, from memory)
UNPAIRED = 100.0


def unpaired(schedule: Schedule, learns: Sequence[str]) -> Schedule:
    """Return the same number of events with the partner half an interval away.

    Every partner event moves by half the interval between repeats (what would pass the end of its
    repeat comes in at its start), so that each input gets what it got and nothing pairs.

    Raises
    ------
    Misfit
        No partner to move, or no room: events would still be within 100 ms of each other.
    """
    moving = _paired(schedule, learns, "unpaired")
    every = schedule.every
    pattern = {
        name: np.sort((times + every / 2) % every) if name in schedule.partner else times
        for name, times in schedule.pattern.items()
    }
    ours = np.concatenate([pattern[name] for name in moving])
    other = np.concatenate([pattern[name] for name in schedule.partner])
    around = (
        other[:, None] + every * np.array([-1.0, 0.0, 1.0])
        if len(schedule.repeat_starts) > 1
        else other[:, None]
    )
    nearest = float(np.min(np.abs(np.subtract.outer(ours, around.ravel()))))
    if nearest < UNPAIRED:
        raise Misfit(
            f"control 'unpaired' of {schedule.name!r}",
            got=f"repeats of {every:g} ms, which leave {nearest:.4g} ms between events",
            expected=f"room for at least {UNPAIRED:g} ms",
        )
    return _with(schedule, pattern, "unpaired")


def reversed_order(schedule: Schedule, learns: Sequence[str]) -> Schedule:
    """Return the mirror image: what came D before the partner comes D after it.

    Within each repeat, every event of a learning input at t moves to ``first + last - t``, where
    first and last are the first and last partner events: the lag to the last one becomes minus the
    lag to the first one, and with an evenly spaced partner every lag changes its sign. (Reflection
    about the first partner event alone would put a volley into the partner's burst, before its
    later spikes.) Where the image would fall before the start of the repeat, the whole repeat
    starts as much later; the lags are what they should be.

    Raises
    ------
    Misfit
        No partner to turn around, or a repeat too short for its mirror image.
    """
    moving = _paired(schedule, learns, "reversed")
    partner = np.concatenate([schedule.pattern[name] for name in schedule.partner])
    edges = float(partner.min() + partner.max())
    pattern = {
        name: np.sort(edges - times) if name in moving else times
        for name, times in schedule.pattern.items()
    }
    late = max(0.0, -min(float(times[0]) for times in pattern.values() if len(times)))
    return _with(schedule, {name: times + late for name, times in pattern.items()}, "reversed")


def only_test_pulses(schedule: Schedule, learns: Sequence[str] = ()) -> Schedule:
    """Return the test pulses alone; the induction is as long as it was and silent.

    The repeats keep their intervals, so that readings fall where they fell.
    """
    return _with(schedule, {}, "test_pulses_only", partner=())


def inhibition_blocked(schedule: Schedule, learns: Sequence[str] = ()) -> Schedule:
    """Return the same events with every inhibitory input silenced."""
    return replace(
        schedule,
        name=_label(schedule, "inhibition_blocked"),
        control="inhibition_blocked",
        inhibition_blocked=True,
    )


Control = Callable[[Schedule, Sequence[str]], Schedule]

#: the controls by name
CONTROLS: Mapping[str, Control] = {
    "unpaired": unpaired,
    "reversed": reversed_order,
    "test_pulses_only": only_test_pulses,
    "inhibition_blocked": inhibition_blocked,
}


def controlled(schedule: Schedule, control: str, learns: Sequence[str]) -> Schedule:
    """Return the control called `control` of a schedule.

    Raises
    ------
    UnknownName
        When there is no such control.
    Misfit
        When the schedule leaves no room for it.
    """
    if control not in CONTROLS:
        raise UnknownName("control", control, CONTROLS)
    return CONTROLS[control](schedule, learns)


def _label(schedule: Schedule, control: str) -> str:
    return f"{schedule.name}, {control.replace('_', ' ')}"


def _paired(schedule: Schedule, learns: Sequence[str], control: str) -> list[str]:
    """Return the learning inputs that the pattern pairs with a partner."""
    moving = [
        name
        for name in learns
        if name not in schedule.partner and len(schedule.pattern.get(name, ()))
    ]
    if not moving or not schedule.partner:
        inside = ", ".join(schedule.pattern) or "nothing"
        raise Misfit(
            f"control {control!r} of {schedule.name!r}",
            got=f"a pattern of {inside}",
            expected="a learning input and a partner",
        )
    return moving


def _with(
    schedule: Schedule, pattern: Mapping[str, Floats], control: str, **changed: Any
) -> Schedule:
    baseline, _, follow_up = schedule.epochs
    kept = {"partner": schedule.partner, "inhibition_blocked": schedule.inhibition_blocked}
    return build(
        _label(schedule, control),
        pattern,
        times=len(schedule.repeat_starts),
        every=schedule.every,
        baseline=baseline.end,
        follow_up=follow_up.end - follow_up.start,
        test_times=schedule.test_times,
        control=control,
        **{**kept, **changed},
    )
