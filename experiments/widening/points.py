"""The points of the figure and the closed forms they are compared with. See run.py."""

from __future__ import annotations

import csv
import math
import tempfile
from collections.abc import Iterable, Sequence
from dataclasses import astuple, dataclass
from pathlib import Path
from typing import Any

import numpy as np
from numpy.typing import ArrayLike, NDArray

import plastic

Array = NDArray[np.float64]

RM, RI, TAU = 20_000.0, 150.0, 20.0  # ohm cm^2, ohm cm, ms
LENGTH, REST = 500.0, -65.0  # um; mV below the reversal of the synapse, 0 mV
#: nS: soma and other dendrites together
CELL, LONE = 10.0, 0.63
#: nS; the first does not move its own driving force and stands for a current
STRENGTHS = (1e-3, 1.0, 5.0)
#: share by which the diameter is changed up and down for a sensitivity; multiple in a cell sheet
STEP, WIDER = 0.05, 1.2
DIAMETERS = tuple(float(d) for d in np.geomspace(0.4, 8.0, 9))
LOADS = tuple(float(g) for g in np.geomspace(0.4, 40.0, 6))
MAPPED = tuple(float(d) for d in np.geomspace(0.36, 7.2, 6))


@dataclass(frozen=True)
class TimeCourse:
    """Kinetics of the synapse as a study writes them, and a step that is short enough."""

    name: str
    kinetics: str
    dt: str


#: so slow that its EPSP reaches the steady state
STEADY = TimeCourse("steady", 'rise = "0 ms", decay = "5 s"', "2 ms")
BRIEF = TimeCourse("brief", 'rise = "0.2 ms", decay = "2 ms"', "0.04 ms")


# ---- the closed forms (own derivation, see README)


def cable(diameter: ArrayLike, length: float = LENGTH) -> tuple[Array, Array]:
    """Return length in length constants and conductance of the semi-infinite cable, nS."""
    d = np.asarray(diameter, float) * 1e-4
    semi = 1e9 * math.pi / 2 * d**1.5 / math.sqrt(RM * RI)
    return np.asarray(length * 1e-4 / np.sqrt(d / 4 * RM / RI)), np.asarray(semi)


def criterion(diameter: ArrayLike, load: ArrayLike, length: float = LENGTH) -> Array:
    """Return G_soma R_axial + L coth L: a weak input at the tip gains above 3, and loses below."""
    L, semi = cable(diameter, length)
    return np.asarray(np.asarray(load) * L / semi + L / np.tanh(L))


def steady_sensitivity(
    diameter: ArrayLike, load: ArrayLike, g: float, length: float = LENGTH
) -> Array:
    """Return S = d ln V_soma / d ln diameter for a steady conductance g (nS) at the tip.

    S = (1 - phi) S_DC + phi S_sat, with B = G_soma / G_inf and phi = g R / (1 + g R), the share of
    the driving force that the synapse uses up where it is.
    """
    L, semi = cable(diameter, length)
    B = np.asarray(load) / semi
    c, s = np.cosh(L), np.sinh(L)
    dc = (L / 2 * (B * s + c) - 1.5 * s) / (B * c + s)
    sat = (L / 2 * (s + B * c) + 1.5 * B * s) / (c + B * s)
    own = (c + B * s) / (semi * (B * c + s))
    phi = g * own / (1 + g * own)
    return np.asarray((1 - phi) * dc + phi * sat)


def best_diameter(load: float, length: float = LENGTH) -> float:
    """Return the diameter at which a weak input at the tip neither gains nor loses, um."""
    low, high = 1e-2, 1e2
    for _ in range(100):
        middle = math.sqrt(low * high)
        low, high = (middle, high) if criterion(middle, load, length) > 3 else (low, middle)
    return low


# ---- the same from plastic


def study_text(
    diameter: float, load: float, strengths: Sequence[float], course: TimeCourse, at: float = LENGTH
) -> str:
    """Return a study of a dendrite on a soma, with inputs of these conductances at one place."""
    text = (
        f'title = "One dendrite"\ncells = 1\ndt = "{course.dt}"\n[cell]\nrest = "{REST} mV"\n'
        'threshold = { mean = "-1 mV", sd = "0 mV" }\nreset = "-70 mV"\n'
        f'rest_of_cell = "{load!r} nS"\ninput_resistance_cv = 0\n'
        f'membrane = {{ resistance = "{RM} ohm cm^2", capacitance = "{TAU * 1e3 / RM} uF/cm^2", '
        f'axial = "{RI} ohm cm" }}\n'
        f'[cell.dendrite.shaft]\nlength = "{LENGTH} um"\ndiameter = "{diameter!r} um"\n'
    )
    for k, g in enumerate(strengths):
        text += (
            f'[input.g{k}]\nlocation = {{ on = "shaft", at = "{at} um" }}\n'
            f'release = {{ sites = 1, probability = {{ mean = 1, cv = 0 }}, quantum = "{g} nS" }}\n'
            f'receptor = {{ reversal = "0 mV", {course.kinetics} }}\n'
        )
    return text + (
        '[protocol.one]\npattern = { g0 = ["0 ms"] }\nrepeat = { times = 1, every = "1 s" }\n'
        'baseline = "1 s"\nfollow_up = "1 s"\n'
        '[compare]\nlearns = ["g0"]\nrules = ["pair_timing"]\nroutes = ["quantal_size"]\n'
    )


def sheet_of(text: str) -> Any:
    """Return the cell sheet of a study text."""
    with tempfile.TemporaryDirectory() as folder:
        path = Path(folder) / "study.toml"
        path.write_text(text, encoding="utf-8")
        return plastic.cell_sheet(path)


def sensitivities(
    diameter: float, load: float, strengths: Sequence[float], course: TimeCourse
) -> Array:
    """Return d ln peak / d ln diameter at the soma for each strength, by a central difference."""
    peaks = [
        [c.soma.peak for c in sheet_of(study_text(d, load, strengths, course)).contacts]
        for d in (diameter * (1 - STEP), diameter * (1 + STEP))
    ]
    thin, thick = np.log(peaks)
    return np.asarray((thick - thin) / math.log((1 + STEP) / (1 - STEP)))


@dataclass(frozen=True)
class Point:
    """One measured point beside its theory.

    In the panel "sensitivity" both are d ln peak / d ln diameter, in "map" percent for +20 %;
    diameter in um, load and conductance in nS.
    """

    panel: str
    diameter: float
    load: float
    conductance: float
    time_course: str
    measured: float
    theory: float
    criterion: float


def curve_points(load: float, diameters: Iterable[float] = DIAMETERS) -> list[Point]:
    """Return S over the diameter, steady and brief; theory is that of the steady synapse."""
    found = []
    for d in diameters:
        for course in (STEADY, BRIEF):
            measured = sensitivities(d, load, STRENGTHS, course)
            for g, value in zip(STRENGTHS, measured, strict=True):
                theory = float(steady_sensitivity(d, load, g))
                rule = float(criterion(d, load))
                panel = "sensitivity"
                found.append(Point(panel, d, load, g, course.name, float(value), theory, rule))
    return found


def map_points(diameters: Sequence[float] = MAPPED, loads: Sequence[float] = LOADS) -> list[Point]:
    """Return the change by +20 % diameter of a weak and of a 1 nS steady input, over cells.

    The diameter of a point is the geometric mean of before and after, to which theory applies.
    """
    found = []
    for load in loads:
        for d in diameters:
            sheet = sheet_of(study_text(d / math.sqrt(WIDER), load, STRENGTHS[:2], STEADY))
            for g, contact in zip(STRENGTHS[:2], sheet.contacts, strict=True):
                change = contact.widening.whole
                theory = 100 * (WIDER ** float(steady_sensitivity(d, load, g)) - 1)
                rule = float(criterion(d, load))
                found.append(Point("map", d, load, g, STEADY.name, change, theory, rule))
    return found


def parts() -> list[tuple[str, float, float, float, float]]:
    """Return (place, nS, whole, between soma and synapse, beyond): percent by +20 %, steady."""
    rows = []
    for place, at in (("tip", LENGTH), ("middle", LENGTH / 2)):
        sheet = sheet_of(study_text(2.0, CELL, STRENGTHS[:2], STEADY, at))
        for g, contact in zip(STRENGTHS[:2], sheet.contacts, strict=True):
            wider = contact.widening
            rows.append((place, g, wider.whole, wider.on_path, wider.beyond))
    return rows


#: columns of the file, in the order of a point
COLUMNS = (
    "panel", "diameter_um", "load_nS", "conductance_nS", "time_course", "measured", "theory",
    "criterion",
)  # fmt: skip


def write_points(path: Path, points: Iterable[Point]) -> None:
    """Write one row per point."""
    with path.open("w", newline="", encoding="utf-8") as file:
        rows = csv.writer(file)
        rows.writerow(COLUMNS)
        for point in points:
            rows.writerow([f"{v:.6g}" if isinstance(v, float) else v for v in astuple(point)])


def read_points(path: Path) -> list[Point]:
    """Return the points of a file."""
    with path.open(newline="", encoding="utf-8") as file:
        rows = csv.reader(file)
        if tuple(next(rows)) != COLUMNS:
            raise SystemExit(f"{path}: the columns must be {', '.join(COLUMNS)}")
        return [
            Point(row[0], *map(float, row[1:4]), row[4], *map(float, row[5:]))  # type: ignore[arg-type]
            for row in rows
        ]
