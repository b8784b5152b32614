"""The tables of a cell sheet: the cell, its inputs, their sums, inhibition, and how exact it is."""

from __future__ import annotations

import math
from collections.abc import Callable, Sequence

import numpy as np

from plastic.analysis.cell_sheet import OUTSIDE, TEMPERATURE, CellSheet
from plastic.analysis.contacts import ContactSheet
from plastic.analysis.widening import WIDER
from plastic.membrane.tree import SOMA
from plastic.report.grid import Grid
from plastic.study.accuracy import ERRORS

#: contacts, or inputs, side by side in one table
SIDE_BY_SIDE = 5
WIDENED = f"{100 * (WIDER - 1):+.0f} % diameter"

#: what the sheet says of a contact, from top to bottom
QUANTITIES: Sequence[tuple[str, Callable[[ContactSheet], float]]] = (
    ("distance from the soma (µm)", lambda c: c.distance),
    ("distance (length constants)", lambda c: c.distance_lambda),
    ("mean conductance (nS)", lambda c: c.conductance),
    ("peak where it lands (mV)", lambda c: c.local.peak),
    ("  rise, 20-80 % (ms)", lambda c: c.local.rise),
    ("  half-width (ms)", lambda c: c.local.half_width),
    ("peak at the soma (mV)", lambda c: c.soma.peak),
    ("  rise, 20-80 % (ms)", lambda c: c.soma.rise),
    ("  half-width (ms)", lambda c: c.soma.half_width),
    ("delay from peak to peak (ms)", lambda c: c.delay),
    ("attenuation of the peak", lambda c: c.attenuation),
    ("attenuation, steady", lambda c: c.attenuation_dc),
    ("charge that enters (pC)", lambda c: c.charge),
    ("  in elementary charges", lambda c: c.charges),
    ("charge at the hillock (pC)", lambda c: c.arriving),
    ("  in elementary charges", lambda c: c.arriving_charges),
    ("ceiling at the soma (mV)", lambda c: c.ceiling),
    (f"{WIDENED} (% of the peak)", lambda c: c.widening.whole),
    ("  only on the path", lambda c: c.widening.on_path),
    ("  only beyond the contact", lambda c: c.widening.beyond),
)

MEANINGS = (
    "each contact alone, at its mean release, inhibition blocked; mV from rest",
    "attenuation: local over somatic voltage; steady: of a current that lasts",
    "charge at the hillock: what an electrode that holds the soma at rest collects of what enters",
    "ceiling: the soma's potential if the contact's conductance were infinite",
)


def cell_grids(sheet: CellSheet) -> list[Grid]:
    """Return the tables of a cell sheet."""
    found = [cell_grid(sheet), *contact_grids(sheet.contacts), summation_grid(sheet)]
    found += [inhibition_grid(sheet), *accuracy_grids(sheet)]
    return [grid for grid in found if grid.rows]


def cell_grid(sheet: CellSheet) -> Grid:
    """Return the cell itself and its dendrites."""
    rows = [
        ["rest", f"{sheet.rest:.4g} mV"],
        [
            "threshold",
            f"{sheet.threshold:.4g} mV, {sheet.threshold - sheet.rest:.3g} mV above rest",
        ],
        ["input resistance", f"{sheet.input_resistance:.4g} Mohm at the soma"],
        ["membrane time constant", f"{sheet.tau:.4g} ms"],
        ["soma and rest of the cell", f"{sheet.load:.4g} nS"],
    ]
    for cable in sheet.cables:
        rows.append(
            [
                f"dendrite {cable.name}",
                f"{cable.length:.4g} µm x {cable.diameter:.3g} µm, length constant "
                f"{cable.lambda_um:.4g} µm, L = {cable.length / cable.lambda_um:.3g}, "
                f"{100 * cable.share:.0f} % of the conductance, "
                f"G_soma R_axial + L coth L = {cable.criterion:.3g}",
            ]
        )
    rule = (
        "a weak, steady input at the tip of a dendrite gains from widening it only where G_soma "
        "R_axial + L coth L is above 3"
    )
    return Grid(f"{sheet.title}: the nominal cell", ["", ""], rows, [rule] if sheet.cables else [])


def contact_grids(contacts: Sequence[ContactSheet]) -> list[Grid]:
    """Return the inputs, contact by contact; a few side by side in each table."""
    found: list[Grid] = []
    for chosen in _parts(len(contacts)):
        part = [contacts[k] for k in chosen]
        rows = [[name, *(number(of(c)) for c in part)] for name, of in QUANTITIES]
        notes = [f"{c.label}: {WIDENED} {c.widening.reason}" for c in part if c.on != SOMA]
        notes += [f"{c.label}: ! {flag}" for c in part for flag in c.flags]
        meanings = [] if found else MEANINGS
        found.append(Grid("Inputs", ["", *(c.label for c in part)], rows, [*meanings, *notes]))
    return found


def summation_grid(sheet: CellSheet) -> Grid:
    """Return which inputs reach threshold together, with and without inhibition."""
    columns = ["inputs", "linear sum", "peak", "sublinear", "to threshold", "fires"]
    inhibited = bool(sheet.inhibition)
    columns += ["inhibited peak", "taken", "to threshold", "fires"] if inhibited else []
    rows = []
    for c in sheet.combinations:
        row = [c.label, number(c.linear), number(c.excited)]
        row.append(percent(c.sublinear) if len(c.inputs) > 1 else "-")
        row += [f"{c.missing(inhibition=False):+.2f}", _yes(c.fires(inhibition=False))]
        if inhibited:
            row += [number(c.inhibited), percent(c.taken)]
            row += [f"{c.missing(inhibition=True):+.2f}", _yes(c.fires(inhibition=True))]
        rows.append(row)
    notes = [
        "one volley of each at the same time, at the mean of its release, without spikes; mV from "
        "rest at the soma; to threshold: what is missing, negative beyond it"
    ]
    if inhibited:
        notes.append(
            "inhibited: with the inhibition that they drive, and inhibitory inputs that nothing "
            "drives at the same time"
        )
    return Grid("Summation at the soma", columns, rows, notes)


def inhibition_grid(sheet: CellSheet) -> Grid:
    """Return what kind of inhibition each inhibitory input is."""
    rows = [
        [one.input, f"{one.reversal:.4g}", one.effect, one.does, ", ".join(one.driven_by) or "-"]
        for one in sheet.inhibition
    ]
    notes = [f"{one.input}: {one.chloride}" for one in sheet.inhibition if one.chloride]
    if any(one.assumed for one in sheet.inhibition):
        notes.append(
            f"where the study gives a reversal alone, {OUTSIDE:g} mM outside and "
            f"{TEMPERATURE:g} C are assumed, without bicarbonate"
        )
    columns = ["input", "reversal (mV)", "inhibition", "what it does", "driven by"]
    return Grid("Inhibition", columns, rows, notes)


def accuracy_grids(sheet: CellSheet) -> list[Grid]:
    """Return how far the simulation is from the limit of ever finer cuts."""
    exact = sheet.accuracy
    names = {
        "peak": "peak at the soma (mV)",
        "time_to_peak": "time to peak (ms)",
        "half_width": "half-width (ms)",
        "attenuation": "attenuation of the peak",
        "local_peak": "peak where it lands (mV)",
    }
    found = []
    for part in _parts(len(exact.inputs)):
        rows = []
        for key, unit in ERRORS.items():
            entries = []
            for i in part:
                value, error = float(exact.simulated[key][i]), float(exact.error(key)[i])
                told = f"{error:+.2g} {'%' if unit == 'percent' else unit}"
                entries.append("-" if math.isnan(error) else f"{number(value)} ({told})")
            rows.append([names[key], *entries])
        columns = ["", *(exact.inputs[i] for i in part)]
        found.append(Grid("Accuracy of the simulation", columns, rows, _limit(sheet)))
    return found


def statement(sheet: CellSheet) -> str:
    """Return the accuracy of the simulation in one sentence."""
    exact = sheet.accuracy
    worst = {key: abs(exact.error(key)) for key in ERRORS}
    told = {key: max([0.0, *values[~np.isnan(values)]]) for key, values in worst.items()}
    return (
        f"At dt = {sheet.dt:g} ms and refine = {sheet.refine}, the peaks at the soma are within "
        f"{told['peak']:.2g} %, their times within {told['time_to_peak']:.2g} ms, half-widths "
        f"within {told['half_width']:.2g} % and attenuations within {told['attenuation']:.2g} % "
        "of the limit of ever finer cuts and steps."
    )


def _limit(sheet: CellSheet) -> list[str]:
    exact = sheet.accuracy
    told = (
        f"simulated value (error); limit: refine = {exact.refine} with sealed ends cut too, where "
        f"the last doubling moved the peaks at the soma by {100 * exact.change:.2g} %"
    )
    notes = [statement(sheet), told]
    return notes if exact.converged else [*notes, "! NOT converged: the limit has too many nodes"]


def number(value: float) -> str:
    """Return a number for people, "-" when there is none."""
    if math.isnan(value):
        return "-"
    if abs(value) >= 1e5:
        return f"{value:.2e}"
    return f"{value:.0f}" if abs(value) >= 100 or value == 0 else f"{value:#.3g}".rstrip(".")


def percent(value: float) -> str:
    """Return a percentage for people."""
    return "-" if math.isnan(value) else f"{abs(value) if abs(value) < 0.05 else value:.1f} %"


def _yes(fires: bool) -> str:
    return "yes" if fires else "no"


def _parts(count: int) -> list[range]:
    return [range(k, min(k + SIDE_BY_SIDE, count)) for k in range(0, count, SIDE_BY_SIDE)]
