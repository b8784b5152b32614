"""The tables of a comparison: matrix, verdicts, controls, pathways."""

from __future__ import annotations

import math
import string
from collections.abc import Mapping, Sequence

from plastic.report.arms import ALREADY, Arm
from plastic.report.counts import simulated
from plastic.report.grid import EXTRAPOLATED, ILLUSTRATIVE, Grid
from plastic.report.pathways import FIXED, Pathway

#: before a cause in a footnote: the cells that never get there need not share it
COMMONEST = "commonest cause:"
#: % of baseline; quartiles nearer to 100 than this print as unchanged
UNCHANGED = 0.5
#: by the change a rig can measure at that time, and by the one that has been induced
KINDS = ("expressed", "induced")

MEANS = {
    "expressed": "by the change expressed at that time, which a rig would measure",
    "induced": "by the change induced so far, once it will all be expressed",
}


def percent(share: float) -> str:
    """Return a share as a percentage for people."""
    return "-" if math.isnan(share) else f"{100 * share:.0f} %"


def cause_letters(arms: Sequence[Arm]) -> dict[str, str]:
    """Return a letter for each cause of "never" that some arm has as its commonest."""
    causes = dict.fromkeys(arm.cause for arm in arms if arm.cause)
    return dict(zip(causes, string.ascii_lowercase, strict=False))


def matrix_grid(
    arms: Sequence[Arm], kind: str, illustrative: Mapping[str, str], doses: Mapping[str, int]
) -> Grid:
    """Return one protocol's matrix: routes down, rules across.

    Parameters
    ----------
    arms : sequence of Arm
        All of one protocol.
    kind : "expressed" or "induced"
    illustrative, doses : mapping
        Of rule label to the reason, and to the repeats at which it was measured.
    """
    rules, routes = _ordered(arm.rule for arm in arms), _ordered(arm.route for arm in arms)
    by_key = {(arm.rule, arm.route): arm for arm in arms}
    letters = cause_letters(arms)
    rows = [
        [route, *(_entry(by_key[rule, route], kind, letters) for rule in rules)] for route in routes
    ]
    columns = ["route", *(f"{r} {ILLUSTRATIVE}" if r in illustrative else r for r in rules)]
    limit = max((arm.expressed.repeats.limit for arm in arms if arm.expressed), default=0)
    title = f"{arms[0].protocol}: repeats to criterion, {kind} ({limit} repeats)"
    notes = [
        f"median (quartiles) and share of {simulated(arms[0].cells)} that reach it, {MEANS[kind]}"
    ]
    if any(arm.expressed and ALREADY in arm.expressed.verdicts for arm in arms):
        notes.append(f"cells {ALREADY} are left out of the counts, not of the shares")
    notes += [f"[{letter}] {COMMONEST} {cause}" for cause, letter in letters.items()]
    notes += extrapolation_notes(arms, doses)
    notes += [f"{ILLUSTRATIVE} {r}: illustrative here: {illustrative[r]}" for r in rules
              if r in illustrative]  # fmt: skip
    return Grid(title, columns, rows, notes)


def extrapolation_notes(arms: Sequence[Arm], doses: Mapping[str, int]) -> list[str]:
    """Return the footnote on counts beyond the dose of their rule; none when there are none."""
    rules = _ordered(arm.rule for arm in arms if arm.extrapolated > 0)
    if not rules:
        return []
    told = [f"{r} ({doses[r]} repeats)" if r in doses else f"{r} (dose not told)" for r in rules]
    return [f"{EXTRAPOLATED} extrapolated: beyond the dose the rule was measured at: "
            f"{', '.join(told)}"]  # fmt: skip


def verdict_grid(arms: Sequence[Arm]) -> Grid:
    """Return the share of every verdict and of every cause of "never", one line per arm."""
    rows = [
        [arm.rule, arm.route, _told(arm.expressed.verdicts), _told(arm.induced.verdicts),
         _told(arm.never_causes)]
        for arm in arms
        if arm.expressed is not None and arm.induced is not None
    ]  # fmt: skip
    columns = ["rule", "route", "verdicts, expressed", "verdicts, induced", "why never"]
    note = f"shares of {simulated(arms[0].cells)}"
    return Grid(f"{arms[0].protocol}: what became of the cells", columns, rows, [note])


def timing_grid(arms: Sequence[Arm]) -> Grid:
    """Return the lag that the cells' own spikes gave each protocol, over its rules and routes."""
    rows = []
    for protocol in _ordered(arm.protocol for arm in arms if arm.expressed):
        mine = [arm for arm in arms if arm.protocol == protocol and arm.expressed]
        lags = sorted(arm.lag for arm in mine if math.isfinite(arm.lag))
        told = f"{lags[0]:+.1f} to {lags[-1]:+.1f}" if lags else "-"
        fired = sum(arm.partner_fired for arm in mine) / len(mine)
        rows.append([protocol, told, percent(fired)])
    note = (
        "realised lag: t_post - t_pre, first presynaptic spike of a repeat to the nearest spike of "
        "the soma; median over simulated cells, range over rules and routes"
    )
    columns = ["protocol", "realised lag (ms)", "repeats with a spike of the cell"]
    return Grid("The pairing as it happened", columns, rows, [note])


def controls_grid(arms: Sequence[Arm], pathways: Sequence[Pathway], name: str) -> Grid:
    """Return the controls beside their protocols, on the routes they were run on.

    Parameters
    ----------
    arms, pathways : sequence of Arm and of Pathway
    name : str
        The input the criterion is about.
    """
    of = {(p.rule, p.route, p.protocol): p for p in pathways if p.input == name}
    routes = {(arm.rule, arm.route) for arm in arms if arm.control and arm.key in of}
    rows = [
        [arm.rule, arm.route, arm.protocol, epsp_text(of[arm.key]), percent(of[arm.key].reached)]
        for arm in sorted(arms, key=lambda a: list(_ordered(x.rule for x in arms)).index(a.rule))
        if (arm.rule, arm.route) in routes and arm.key in of
    ]  # fmt: skip
    columns = ["rule", "route", "protocol", f"EPSP of {name}, % of baseline", "reached"]
    note = "EPSP at the last reading, median (quartiles) over simulated cells"
    return Grid("Controls", columns, rows, [note])


def pathway_grid(pathways: Sequence[Pathway], name: str) -> Grid:
    """Return input specificity: each input that is read beside the one the criterion is about.

    Inputs that do not learn and stay as they are, are counted under the table.
    """
    inputs = _ordered(p.input for p in pathways)
    if len(inputs) < 2:
        return Grid("Input specificity", ["rule"], [])
    inputs.sort(key=lambda label: label != name)
    of = {(p.protocol, p.rule, p.route, p.input): p for p in pathways if not p.control}
    arms = _ordered(key[:3] for key in of)
    shown = [of[(*arm, label)] for arm in arms for label in inputs]
    rows = [
        [p.protocol, p.rule, p.route, p.input, p.role, epsp_text(p)] for p in shown if not _idle(p)
    ]
    columns = ["protocol", "rule", "route", "input", "pathway", "EPSP, % of baseline"]
    notes = ["at the last reading, median (quartiles) over simulated cells"]
    for label in inputs:
        idle = sum(_idle(p) for p in shown if p.input == label)
        if idle:
            notes.append(f"{label} {FIXED} and stays at 100 (100 to 100) in {idle} of {len(arms)} "
                         "arms, not shown")  # fmt: skip
    return Grid("Input specificity: paired and control pathways", columns, rows, notes)


def _idle(pathway: Pathway) -> bool:
    """Return whether a pathway does not learn and reads as unchanged."""
    quartiles = (pathway.percent, pathway.low, pathway.high)
    return pathway.role == FIXED and all(abs(value - 100) < UNCHANGED for value in quartiles)


def epsp_text(pathway: Pathway) -> str:
    """Return an EPSP in percent of baseline with its quartiles."""
    if math.isnan(pathway.percent):
        return "-"
    return f"{pathway.percent:.0f} ({pathway.low:.0f} to {pathway.high:.0f})"


def _entry(arm: Arm, kind: str, letters: Mapping[str, str]) -> str:
    outcome = arm.outcome(kind)
    if outcome is None:
        return arm.status
    head, verdicts = arm.headline(kind), outcome.verdicts
    sign = f" {EXTRAPOLATED}" if arm.extrapolated > 0 else ""
    letter = f" [{letters[arm.cause]}]" if arm.cause in letters else ""
    shares = {word: f"{word} {percent(share)}" for word, share in verdicts.items()}
    shares |= {"never": shares["never"] + letter} if "never" in shares else {}
    counted = head not in shares or head.startswith("reached")
    told = [f"{outcome.repeats}{sign}" if counted else shares[head]]
    late = (
        f" ({percent(arm.late)} only in the follow-up)" if kind == "expressed" and arm.late else ""
    )
    told.append(f"{percent(outcome.reached)} reached{late}")
    told += [shares[word] for word in ("never", ALREADY) if word in shares and word != head]
    return ", ".join(told)


def _told(shares: Mapping[str, float]) -> str:
    return ", ".join(f"{word} {percent(share)}" for word, share in shares.items()) or "-"


def _ordered(labels: object) -> list[str]:
    return list(dict.fromkeys(labels))  # type: ignore[call-overload]
