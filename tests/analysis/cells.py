"""Invented cells with certain release, so that each contact opens exactly what is written down."""

from __future__ import annotations

import functools
from collections.abc import Mapping

from plastic.analysis.cell_sheet import CellSheet, cell_sheet
from plastic.analysis.subject import Subject
from plastic.study.file import parse_study
from plastic.study.model import Study

RM, RI, TAU = 20_000.0, 150.0, 20.0
REST = -65.0


def bundle(
    name: str,
    at: float,
    g: float,
    *,
    on: str = "shaft",
    receptor: str = 'reversal = "0 mV", rise = "0.2 ms", decay = "2 ms"',
    more: str = "",
) -> str:
    """Return an input of one certain site that opens `g` nS at `at` um; at 0 it is on the soma."""
    where = f'on = "{on}", at = "{at} um"' if at else 'on = "soma"'
    return (
        f"[input.{name}]\nlocation = {{ {where} }}\n{more}\n"
        f'release = {{ sites = 1, probability = {{ mean = 1, cv = 0 }}, quantum = "{g} nS" }}\n'
        f"receptor = {{ {receptor} }}\n"
    )


def study(
    *inputs: str,
    load: float = 10.0,
    shafts: Mapping[str, tuple[float, float]] | None = None,
    refine: int = 1,
    threshold: float = -50.0,
    learns: str = "a",
) -> Study:
    """Return a study of a soma of `load` nS with dendrites of (length, diameter) in um."""
    dendrites = {"shaft": (500.0, 2.0)} if shafts is None else shafts
    text = (
        f'title = "An invented cell"\ncells = 3\ndt = "0.04 ms"\n[cell]\nrest = "{REST} mV"\n'
        f'threshold = {{ mean = "{threshold} mV", sd = "2 mV" }}\nreset = "-70 mV"\n'
        f'rest_of_cell = "{load} nS"\nrefine = {refine}\n'
        'membrane = { resistance = "20 kohm cm^2", capacitance = "1 uF/cm^2", '
        'axial = "150 ohm cm" }\n'
    )
    for name, (length, diameter) in dendrites.items():
        text += f'[cell.dendrite.{name}]\nlength = "{length} um"\ndiameter = "{diameter} um"\n'
    text += "".join(inputs)
    text += (
        f'[protocol.volleys]\npattern = {{ {learns} = ["0 ms"] }}\n'
        'repeat = { times = 2, every = "5 s" }\nbaseline = "1 min"\nfollow_up = "1 min"\n'
        f'test = {{ inputs = ["{learns}"], every = "20 s" }}\n'
        f'[compare]\nlearns = ["{learns}"]\nrules = ["pair_timing"]\nroutes = ["quantal_size"]\n'
    )
    return parse_study(text)


def subject(*inputs: str, **cell: object) -> Subject:
    """Return the subject of a study; arguments as for `study`."""
    return Subject.of(study(*inputs, **cell))  # type: ignore[arg-type]


SHUNT = 'shunt = true, rise = "0.2 ms", decay = "5 ms"'
BELOW = 'reversal = "-75 mV", rise = "0.2 ms", decay = "5 ms"'

#: a lone small soma, whose only dendrite is most of the cell
LONE = (bundle("a", 500.0, 0.3), bundle("b", 60.0, 1.0))


@functools.cache
def full_sheet() -> CellSheet:
    """Return a sheet in which everything occurs: two dendrites, spread, driven and free brakes."""
    spread = (
        '[input.c]\ncontacts = [ { on = "thin", at = "50 um" }, '
        '{ on = "thin", at = "150 um" } ]\n'
        'release = { sites = 20, probability = 0.5, quantum = "0.5 nS" }\n'
        'receptor = { reversal = "0 mV", rise = "0.2 ms", decay = "2 ms" }\n'
    )
    driven = 'driven_by = [ { input = "a", delay = "1 ms" } ]'
    return cell_sheet(
        study(
            bundle("a", 500.0, 12.0),
            bundle("b_near", 60.0, 40.0),
            spread,
            bundle("brake", 0.0, 10.0, receptor=BELOW, more=driven),
            bundle("shunt", 250.0, 5.0, receptor=SHUNT),
            shafts={"shaft": (500.0, 2.0), "thin": (160.0, 0.4)},
        )
    )


@functools.cache
def lone_sheet() -> CellSheet:
    """Return the sheet of a lone small soma."""
    return cell_sheet(study(*LONE, load=0.63))
