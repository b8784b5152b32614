"""What no table of a study can know alone: whether its parts fit together."""

from __future__ import annotations

from collections.abc import Iterable
from typing import Any

import numpy as np

from plastic.errors import Misfit, StudyError, UnknownName
from plastic.membrane.tree import SOMA, Floats
from plastic.protocols import INJECTED
from plastic.quantities import key_text
from plastic.study.inputs import Input, Location
from plastic.study.model import Study

#: steps per fastest time constant. Error of the peak at the soma, %, at 2.5, 5 and 10 steps per
#: rise, against scipy (measured; rise 0.5 ms, decay 3 ms unless said):
#:
#:     40 nS on the soma of a point cell of 3 nS      -0.043   -0.011   -0.003
#:     20 nS at 300 um of 400, 8 nS                   -0.012   -0.004   -0.001
#:     5 nS at 200 um, rise 3 ms, decay 60 ms         -0.025   -0.007   -0.002
#:     10 nS at 60 um, rise 0.3 ms, decay 1.5 ms      +0.006   +0.002   +0.000
#:     30 nS at 60 um, 2 nS (the largest found)       -0.061   -0.017   -0.005
#:
#: A fifth is enough for 0.1 %; a whole time constant per step gives 0.25 %.
STEPS = 5.0
#: ms; no current in this cell needs a shorter step
SHORTEST = 1e-3


class _Judge:
    """Speaks for one study: raises its errors with the file and the key."""

    def __init__(self, study: Study) -> None:
        self.study = study

    def refuse(self, key: str, value: Any, allowed: str) -> StudyError:
        return StudyError(file=self.study.file, key=key, value=value, allowed=allowed)

    def known(self, kind: str, name: str, names: Iterable[str], key: str) -> None:
        names = list(names)
        if name not in names:
            raise UnknownName(kind, name, names, where=f"{self.study.file}: {key}")


def check_study(study: Study) -> None:
    """Refuse a study whose parts do not fit together.

    Raises
    ------
    StudyError, UnknownName
        With the file, the path of the key, the value and what is allowed.
    """
    judge = _Judge(study)
    _check_cell(judge)
    for name, it in study.inputs.items():
        _check_places(judge, name, it)
        _check_reversal(judge, name, it)
        _check_release(judge, name, it)
        _check_drives(judge, name, it)
    _check_step(judge)
    _check_learning(judge)
    _check_routes(judge)
    _check_protocols(judge)
    _check_controls(judge)
    _check_grid(judge)


def _check_cell(judge: _Judge) -> None:
    cell = judge.study.cell
    threshold = cell.threshold.mean
    for key, value in (("rest", cell.rest), ("reset", cell.reset)):
        if value >= threshold:
            allowed = f"must be below the threshold, {threshold:g} mV"
            raise judge.refuse(f"cell.{key}", f"{value:g} mV", allowed)
    if SOMA in cell.dendrite:
        raise judge.refuse(f"cell.dendrite.{SOMA}", None, "the soma is no dendrite; rename it")
    if INJECTED in judge.study.inputs:
        allowed = "the name stands for spikes forced on the cell; rename it"
        raise judge.refuse(f"input.{INJECTED}", None, allowed)


def _check_places(judge: _Judge, name: str, it: Input) -> None:
    key = f"input.{name}"
    if (it.location is None) == (not it.contacts):
        allowed = "needs either location = { on, at } or contacts = [ { on, at, share }, ... ]"
        raise judge.refuse(key, None, allowed)
    if it.location is not None:
        _check_place(judge, f"{key}.location", it.location)
    for k, contact in enumerate(it.contacts):
        _check_place(judge, f"{key}.contacts[{k}]", contact)
    shares = [contact.share for contact in it.contacts if contact.share is not None]
    if shares and (len(shares) < len(it.contacts) or abs(sum(shares) - 1) > 1e-9):
        allowed = "every contact needs a share and they must sum to 1, or none has one"
        raise judge.refuse(f"{key}.contacts", f"shares {shares}", allowed)
    if it.added_contact is not None:
        _check_place(judge, f"{key}.added_contact", it.added_contact)
        nearest = min(at for _, at, _ in it.places)
        if it.added_contact.at >= nearest:
            allowed = f"must be nearer to the soma than the input itself, {nearest:g} um"
            where = f"{key}.added_contact.at"
            raise judge.refuse(where, f"{it.added_contact.at:g} um", allowed)


def _check_place(judge: _Judge, key: str, place: Location) -> None:
    dendrites = judge.study.cell.dendrite
    judge.known("dendrite", place.on, [SOMA, *dendrites], f"{key}.on")
    if place.on == SOMA:
        if place.at != 0:
            raise judge.refuse(f"{key}.at", f"{place.at:g} um", "must be 0 um on the soma")
        return
    length = dendrites[place.on].length
    if not 0 < place.at <= length:
        allowed = f"must be above 0 um and at most {length:g} um, the length of {place.on!r}"
        raise judge.refuse(f"{key}.at", f"{place.at:g} um", allowed)


def _check_reversal(judge: _Judge, name: str, it: Input) -> None:
    rest, reversal = judge.study.cell.rest, it.receptor.reversal_at(judge.study.cell.rest)
    if it.kind == "excitatory" and reversal <= rest:
        allowed = (
            f"an excitatory input must reverse above rest, {rest:g} mV; "
            "or leave kind out, and it is inhibitory"
        )
        raise judge.refuse(f"input.{name}.receptor", f"reversal {reversal:.4g} mV", allowed)


def _check_release(judge: _Judge, name: str, it: Input) -> None:
    p, highest = it.release.probability.mean, it.release.highest
    if p > highest:
        allowed = f"must be at most release.highest, {highest:g}"
        raise judge.refuse(f"input.{name}.release.probability", p, allowed)
    if it.baseline_epsp is None:
        return
    target, key = it.baseline_epsp.target, f"input.{name}.baseline_epsp"
    if it.kind == "inhibitory":
        allowed = "is for excitatory inputs; give an inhibitory one its sites and quantum"
        raise judge.refuse(key, f"{target:g} mV", allowed)
    rest = judge.study.cell.rest
    room = it.receptor.reversal_at(rest) - rest
    if target >= room:
        allowed = f"must be below the driving force at rest, {room:g} mV"
        raise judge.refuse(f"{key}.target", f"{target:g} mV", allowed)


def _check_drives(judge: _Judge, name: str, it: Input) -> None:
    inputs = judge.study.inputs
    for k, drive in enumerate(it.driven_by):
        key = f"input.{name}.driven_by[{k}].input"
        judge.known("input", drive.input, inputs, key)
        if inputs[drive.input].driven_by:
            allowed = "must be an input that is not driven itself"
            raise judge.refuse(key, drive.input, allowed)
        if drive.input in [other.input for other in it.driven_by[:k]]:
            raise judge.refuse(key, drive.input, "drives this input twice")


def _check_step(judge: _Judge) -> None:
    study = judge.study
    constants = [("cell.membrane", study.cell.membrane.tau)]
    for name, it in study.inputs.items():
        constants += [
            (f"input.{name}.receptor.{key}", value)
            for key, value in (("rise", it.receptor.rise), ("decay", it.receptor.decay))
            if value > 0
        ]
    key, fastest = min(constants, key=lambda pair: pair[1])
    if study.dt < SHORTEST:
        raise judge.refuse("dt", f"{study.dt:g} ms", f"must be at least {SHORTEST:g} ms")
    if study.dt > fastest / STEPS * (1 + 1e-9):
        allowed = (
            f"must be at most {fastest / STEPS:g} ms, a fifth of the fastest time constant "
            f"({key}, {fastest:g} ms)"
        )
        raise judge.refuse("dt", f"{study.dt:g} ms", allowed)


def _check_learning(judge: _Judge) -> None:
    study, compare = judge.study, judge.study.compare
    for k, name in enumerate(compare.learns):
        key = f"compare.learns[{k}]"
        judge.known("input", name, study.inputs, key)
        if study.inputs[name].kind == "inhibitory":
            raise judge.refuse(key, name, "must be an excitatory input; this one is inhibitory")
        if study.inputs[name].driven_by:
            raise judge.refuse(key, name, "must be an input of its own; this one is driven")
    criterion = compare.criterion.input
    judge.known("input", criterion, study.inputs, "compare.criterion.input")
    if criterion not in compare.learns:
        allowed = f"must be an input that learns: {', '.join(compare.learns)}"
        raise judge.refuse("compare.criterion.input", criterion, allowed)


def _check_routes(judge: _Judge) -> None:
    study = judge.study
    labels = [route.name for route in study.compare.routes]
    if study.compare.controls_on is not None:
        judge.known("route", study.compare.controls_on, labels, "compare.controls_on")
    for k, route in enumerate(study.compare.routes):
        targets = {channel.target for channel in route.channels.values()}
        for name in study.compare.learns:
            for key, missing in _needs(study, name).items():
                if key in targets:
                    where, allowed = missing
                    allowed = f"{allowed}, or take compare.routes[{k}] ({route.name}) out"
                    raise judge.refuse(f"input.{name}{where}", None, allowed)


def _needs(study: Study, name: str) -> dict[str, tuple[str, str]]:
    """Return what an input lacks, by the physical variable that a route would move."""
    lacks: dict[str, tuple[str, str]] = {}
    it, inputs = study.inputs[name], study.inputs
    recruited = [n for n in study.inhibitory if name in {d.input for d in inputs[n].driven_by}]
    if not recruited:
        lacks["inhibition"] = "", "needs an inhibitory input with driven_by this one"
    if it.added_contact is None:
        lacks["added_sites"] = ".added_contact", "missing; write { on = 'NAME', at = '40 um' }"
    if it.neck == 0:
        lacks["neck"] = ".neck", "missing; write a resistance such as '100 Mohm'"
    if all(on == SOMA for on, _, _ in it.places):
        lacks["diameter"] = ".location", "must be on a dendrite to be widened"
    return lacks


def _check_protocols(judge: _Judge) -> None:
    study = judge.study
    for name, protocol in study.protocols.items():
        for path, used in protocol.named_inputs().items():
            if used != INJECTED:
                where = key_text(("protocol", name, *path))
                judge.known("input", used, study.inputs, where)
        try:
            schedule = protocol.schedule(name, learns=study.compare.learns)
            _check_injected(judge, name, np.sort(schedule.injected))
        except Misfit as error:
            allowed = f"{error.got}; must be {error.expected}"
            raise judge.refuse(f"protocol.{name}", None, allowed) from None
        except UnknownName as error:
            raise judge.refuse(
                f"protocol.{name}.partner", error.name, f"must be among {', '.join(error.known)}"
            ) from None
    plain = [schedule for schedule in study.schedules().values() if not schedule.control]
    for k, name in enumerate(study.compare.learns):
        if not any(len(schedule.times.get(name, ())) for schedule in plain):
            allowed = "must be stimulated by a protocol; none of them does"
            raise judge.refuse(f"compare.learns[{k}]", name, allowed)


def _check_injected(judge: _Judge, name: str, times: Floats) -> None:
    """Refuse forced spikes that would fall into the refractory period of the one before."""
    close = np.flatnonzero(np.diff(times) < judge.study.cell.refractory - 1e-9)
    if len(close):
        first, second = times[close[0] : close[0] + 2]
        raise judge.refuse(
            f"protocol.{name}",
            f"injected at {first:g} and {second:g} ms",
            f"must be at least the refractory period, {judge.study.cell.refractory:g} ms, apart",
        )


def _check_controls(judge: _Judge) -> None:
    study = judge.study
    schedules, left_out = study.schedules(), study.controls_left_out()
    for k, control in enumerate(study.compare.controls):
        key = f"compare.controls[{k}]"
        if control == "inhibition_blocked" and not study.inhibitory:
            raise judge.refuse(key, control, "there is no inhibitory input to block")
        if not any(schedule.control == control for schedule in schedules.values()):
            reason = next(iter(left_out.values()))
            raise judge.refuse(key, control, f"no protocol leaves room for it: {reason}")


def _check_grid(judge: _Judge) -> None:
    """Refuse events of a learning input that would become one event on the grid of steps."""
    study = judge.study
    for label, schedule in study.schedules().items():
        for name in study.compare.learns:
            times = schedule.times.get(name, np.empty(0))
            twins = np.flatnonzero(np.diff(np.rint(times / study.dt)) < 1)
            if len(twins):
                k = int(twins[0])
                allowed = (
                    f"two events of {name!r} that fall on the same step of dt = {study.dt:g} ms; "
                    "they must be at least one step apart"
                )
                value = f"{times[k]:.6g} ms and {times[k + 1]:.6g} ms"
                raise judge.refuse(f"protocol.{label}", value, allowed)
