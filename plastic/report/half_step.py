"""What half the time step changes, as a table and in words."""

from __future__ import annotations

from plastic.report.counts import simulated
from plastic.report.grid import Grid
from plastic.study.half_step import (
    FINE,
    FINE_REPEATS,
    FINE_SPIKES,
    NEAR,
    ArmChange,
    Change,
    StepCheck,
)

COLUMNS = (
    "rule", "route", "protocol", "factor, %", "EPSP, %", "repeats", "verdicts", "spikes",
    "came or went", "shift, ms",
)  # fmt: skip


def step_grid(check: StepCheck) -> Grid:
    """Return one row per arm; whether the step is fine, in words, stands under it."""
    rows = [
        [
            arm.rule, arm.route, arm.protocol, _both(arm.factor), _both(arm.epsp),
            _both(arm.repeats), f"{arm.verdicts}", f"{arm.spikes}", f"{arm.came_or_went}",
            f"{arm.shift:.3g}",
        ]
        for arm in check.arms
    ]  # fmt: skip
    title = (
        f"Half the time step: {check.dt / 2:g} instead of {check.dt:g} ms, "
        f"in {simulated(check.cells)}"
    )
    notes = [
        "change in the cell in the middle (in the cell that moves most), the largest over inputs "
        "and readings; factor and EPSP in percent of the baseline",
        "verdicts: cells with another one; spikes: at the study's step; came or went: none within "
        f"{NEAR:g} ms at the other step; shift: the largest of the other spikes",
        f"fine: the middle within {FINE:g} % for factor and EPSP and within {FINE_REPEATS:g} % or "
        f"one reading for repeats, no other verdict, at most {FINE_SPIKES:g} % of the spikes came "
        "or went (ours)",
        sentence(check),
    ]
    return Grid(title, COLUMNS, rows, notes)


def _both(change: Change) -> str:
    return f"{change.middle:.2g} ({change.largest:.2g})"


def sentence(check: StepCheck) -> str:
    """Return whether the time step is fine, in words."""
    bad = [arm for arm in check.arms if not arm.fine]
    if bad:
        told = "; ".join(f"{arm.rule} / {arm.route} / {arm.protocol}: {_why(arm)}" for arm in bad)
        return (
            f"! dt = {check.dt:g} ms may be too long for {len(bad)} of {len(check.arms)} arms; "
            f"take half and check again: {told}"
        )
    factor, epsp = (max(getattr(arm, k).middle for arm in check.arms) for k in ("factor", "epsp"))
    went, total = (sum(getattr(a, k) for a in check.arms) for k in ("came_or_went", "spikes"))
    return (
        f"dt = {check.dt:g} ms is fine: in the cell in the middle half of it changes no factor by "
        f"more than {factor:.2g} % and no EPSP by more than {epsp:.2g} % of the baseline; "
        f"{went or 'none'} of {total} spikes came or went" + _astray(check)
    )


def _astray(check: StepCheck) -> str:
    """Return what single cells did that a spike sent another way."""
    worst = max(check.arms, key=lambda arm: arm.factor.largest)
    if worst.factor.largest <= FINE:
        return ""
    return (
        f", and one that does sends its cell another way: a factor by up to "
        f"{worst.factor.largest:.2g} % ({worst.rule} / {worst.route} / {worst.protocol})"
    )


def _why(arm: ArmChange) -> str:
    """Return what is not fine in an arm."""
    found = []
    if arm.factor.middle > FINE:
        found.append(f"factor {arm.factor.middle:.2g} %")
    if arm.epsp.middle > FINE:
        found.append(f"EPSP {arm.epsp.middle:.2g} %")
    if arm.repeats.middle > arm.repeats_allowed:
        found.append(f"{arm.repeats.middle:g} repeats")
    if arm.verdicts:
        found.append(f"another verdict in {arm.verdicts} of the cells")
    return ", ".join(found) or f"{arm.came_or_went} of {arm.spikes} spikes came or went"
