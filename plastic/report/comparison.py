"""`plastic.compare`: rules x routes x protocols, as what became of the simulated cells."""

from __future__ import annotations

import csv
from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field
from io import StringIO
from os import PathLike
from pathlib import Path

import xarray as xr

from plastic.report.arms import Arm, Outcome, arm_of
from plastic.report.counts import simulated
from plastic.report.flags import meanings
from plastic.report.grid import Grid
from plastic.report.matrices import (
    KINDS,
    controls_grid,
    matrix_grid,
    pathway_grid,
    timing_grid,
    verdict_grid,
)
from plastic.report.origin import rules_of, schedules_of, study_of
from plastic.report.pathways import Pathway, criterion_input, pathways_of


@dataclass(frozen=True)
class Comparison:
    """What a study found, arm by arm; printing it shows the tables.

    Attributes
    ----------
    title, criterion, match, at_ceiling : str
        As the study says them.
    cells : int
        Simulated cells of each arm.
    input : str
        The input that the criterion is about.
    rules, routes, protocols : tuple of str
        Labels, in the order of the study; controls are protocols.
    arms : tuple of Arm
    pathways : tuple of Pathway
        Every input that is read, in every complete arm.
    illustrative : mapping of str to str
        Rules that are only illustrative on spiking cells, with the reason.
    doses : mapping of str to int
        Repeats at which a rule's parameters were measured.
    verdicts, causes : tuple of str
        All words that a verdict and a cause of "never" can take.
    notes : tuple of str
        What the comparison could not tell, in sentences.
    short : str
        Inputs whose baseline EPSP could not be recruited, with the number of cells.
    """

    title: str
    criterion: str
    match: str
    at_ceiling: str
    cells: int
    input: str
    rules: tuple[str, ...]
    routes: tuple[str, ...]
    protocols: tuple[str, ...]
    arms: tuple[Arm, ...]
    pathways: tuple[Pathway, ...]
    illustrative: Mapping[str, str] = field(default_factory=dict)
    doses: Mapping[str, int] = field(default_factory=dict)
    verdicts: tuple[str, ...] = ()
    causes: tuple[str, ...] = ()
    notes: tuple[str, ...] = ()
    short: str = ""

    def arm(self, rule: str, route: str, protocol: str) -> Arm:
        """Return the arm with these labels; KeyError when there is none."""
        return {arm.key: arm for arm in self.arms}[rule, route, protocol]

    @property
    def own_protocols(self) -> tuple[str, ...]:
        """The protocols that are no controls."""
        controls = {arm.protocol for arm in self.arms if arm.control}
        return tuple(name for name in self.protocols if name not in controls)

    def grids(self, *, verdicts: bool = True) -> list[Grid]:
        """Return the tables: a matrix per protocol (expressed, induced), controls, pathways.

        Parameters
        ----------
        verdicts : bool
            Also the shares of every verdict, one line per arm.
        """
        found = []
        for protocol in self.own_protocols:
            arms = [arm for arm in self.arms if arm.protocol == protocol]
            for kind in KINDS:
                found.append(matrix_grid(arms, kind, self.illustrative, self.doses))
            if verdicts:
                found.append(verdict_grid(arms))
        found.append(timing_grid(self.arms))
        found.append(controls_grid(self.arms, self.pathways, self.input))
        found.append(pathway_grid(self.pathways, self.input))
        return [grid for grid in found if grid.rows]

    @property
    def head(self) -> str:
        """Title, criterion, number of simulated cells, matching and ceiling, in a few lines."""
        ceiling = _CEILINGS.get(self.at_ceiling, self.at_ceiling)
        told = (
            f"criterion: {self.criterion}; {simulated(self.cells)} per arm\n"
            f"routes matched by {self.match.replace('_', ' ')}; at a route's ceiling {ceiling}"
        )
        if self.short:
            told += (
                f"\nbaseline EPSP not met: {self.short} (all sites that may be recruited are not "
                "enough, or the EPSP saturates below it); such cells start where they could"
            )
        return f"{self.title}\n{told}" if self.title else told

    def __str__(self) -> str:
        return "\n\n".join([self.head, *(grid.plain() for grid in self.grids()), *self.notes])

    def to_csv(self, path: str | PathLike[str] | None = None) -> str:
        """Return one line per arm, numbers in full, and write them to `path` when one is given.

        Counts beyond the protocol are written as ``inf``; an arm that was not run has empty fields.
        """
        rows = [_row(self, arm) for arm in self.arms]
        out = StringIO()
        writer = csv.DictWriter(out, list(rows[0]) if rows else [], lineterminator="\n")
        writer.writeheader()
        writer.writerows(rows)
        if path is not None:
            Path(path).write_text(out.getvalue(), encoding="utf-8")
        return out.getvalue()


def compare(dataset: xr.Dataset) -> Comparison:
    """Return what became of the simulated cells under each rule, route and protocol.

    Quartiles are over simulated cells; a cell that did not reach the criterion counts as beyond
    the protocol, so a quartile that falls among such cells reads "> 60" (for 60 repeats). Cells
    that met the criterion before anything was learned are left out of the counts; shares are of
    all simulated cells.

    Parameters
    ----------
    dataset : Dataset
        As `plastic.run` returns it or `plastic.load` reads it.

    Examples
    --------
    >>> print(compare(plastic.load("two_roads-results")))  # doctest: +SKIP
    """
    rules, routes, protocols = (_labels(dataset, axis) for axis in ("rule", "route", "protocol"))
    arms = tuple(arm_of(dataset, r, c, p) for p in protocols for r in rules for c in routes)
    study = study_of(dataset)
    parts = rules_of(study)
    attributes = {key: str(dataset.attrs.get(key, "")) for key in _TEXTS}
    return Comparison(
        **attributes,
        cells=int(dataset.sizes["cell"]),
        input=criterion_input(dataset),
        rules=rules,
        routes=routes,
        protocols=protocols,
        arms=arms,
        pathways=pathways_of(dataset, arms, schedules_of(study)),
        illustrative={n: rule.illustrative for n, rule in parts.items() if rule.illustrative},
        doses={name: rule.dose for name, rule in parts.items() if rule.dose is not None},
        verdicts=tuple(meanings(dataset["verdict"]).values()),
        causes=tuple(meanings(dataset["never_cause"]).values()),
        notes=() if study else (_LOST,),
        short=str(dataset.attrs.get("baseline_epsp_not_recruited", "")),
    )


_LOST = (
    "The study cannot be rebuilt here (a file it names is missing, or it was written for another "
    "version): pathways are not told apart, and rules that are only illustrative are not marked."
)
_CEILINGS = {"stop": "the weight is held", "hidden": "the weight goes on, unseen"}
_TEXTS = ("title", "criterion", "match", "at_ceiling")


def _labels(dataset: xr.Dataset, axis: str) -> tuple[str, ...]:
    return tuple(str(label) for label in dataset[axis].values)


def _row(comparison: Comparison, arm: Arm) -> dict[str, object]:
    row: dict[str, object] = {
        "rule": arm.rule,
        "route": arm.route,
        "protocol": arm.protocol,
        "control": arm.control,
        "status": arm.status,
        "simulated_cells": arm.cells,
    }
    for kind, outcome in (("expressed", arm.expressed), ("induced", arm.induced)):
        row |= _outcome_row(kind, outcome, comparison.verdicts)
    done = arm.expressed is not None
    for cause in comparison.causes:
        row[f"never_{_key(cause)}"] = arm.never_causes.get(cause, 0.0) if done else ""
    row["share_extrapolated"] = arm.extrapolated if done else ""
    row["partner_fired"] = arm.partner_fired if done else ""
    row["realised_lag_ms"] = arm.lag if done else ""
    return row


def _outcome_row(kind: str, outcome: Outcome | None, verdicts: Sequence[str]) -> dict[str, object]:
    keys = [f"repeats_{part}_{kind}" for part in ("median", "lower_quartile", "upper_quartile")]
    keys += [f"share_reached_{kind}", *(f"{_key(v)}_{kind}" for v in verdicts)]
    if outcome is None:
        return dict.fromkeys(keys, "")
    counts = outcome.repeats
    shares = [outcome.verdicts.get(v, 0.0) for v in verdicts]
    numbers = [counts.median, counts.low, counts.high, outcome.reached, *shares]
    return dict(zip(keys, numbers, strict=True))


def _key(words: str) -> str:
    return words.replace(" ", "_")
