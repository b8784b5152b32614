"""One arm (rule x route x protocol) of a comparison, read from a dataset."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field

import numpy as np
import xarray as xr
from numpy.typing import NDArray

from plastic.report.counts import Counts, counts_of
from plastic.report.flags import integers, meanings, shares

COMPLETE = "complete"
ALREADY = "already at baseline"


@dataclass(frozen=True)
class Outcome:
    """What became of the cells of an arm, induced or expressed.

    Attributes
    ----------
    repeats : Counts
        Repeats to criterion of the cells that were not already there at baseline.
    reached : float
        Share of all simulated cells that were not there at baseline and got there.
    verdicts : mapping of str to float
        Share of each verdict among all simulated cells, commonest first.
    """

    repeats: Counts
    reached: float
    verdicts: Mapping[str, float]


@dataclass(frozen=True)
class Arm:
    """One rule x route x protocol.

    Attributes
    ----------
    rule, route, protocol, control : str
        Labels; `control` is empty for a protocol of the study's own.
    status : str
        "complete", "not applicable", "stopped" or "not run".
    cells : int
        Simulated cells.
    expressed, induced : Outcome or None
        By the change a rig can measure at that time, and by the one the rule has induced. None
        when the arm is not complete.
    never_causes : mapping of str to float
        Share of each cause among all simulated cells whose verdict is "never".
    extrapolated : float
        Share of simulated cells whose count lies beyond the dose at which the rule was measured.
    partner_fired : float
        Mean share of repeats in which the cell fired.
    late : float
        Share of all simulated cells that reach it, expressed, only after the last repeat.
    lag : float, ms
        Median over simulated cells of the mean realised lag.
    late : float
        Share of all simulated cells that reach it, expressed, only after the last repeat.
    """

    rule: str
    route: str
    protocol: str
    control: str
    status: str
    cells: int
    expressed: Outcome | None = None
    induced: Outcome | None = None
    never_causes: Mapping[str, float] = field(default_factory=dict)
    extrapolated: float = 0.0
    partner_fired: float = float("nan")
    lag: float = float("nan")
    late: float = 0.0

    @property
    def key(self) -> tuple[str, str, str]:
        """Rule, route and protocol."""
        return self.rule, self.route, self.protocol

    def outcome(self, kind: str) -> Outcome | None:
        """Return what became of the cells, "expressed" or "induced"."""
        return {"expressed": self.expressed, "induced": self.induced}[kind]

    def headline(self, kind: str = "expressed") -> str:
        """Return the one word or number that stands for the arm.

        The median count when half of the cells get there (those that fire at baseline left out).
        Otherwise what the middle cell did, in the order reached, not within, never: "> 60" (for a
        protocol of 60 repeats), the commonest other verdict, or "never".
        """
        outcome = self.outcome(kind)
        if outcome is None:
            return self.status
        if np.isfinite(outcome.repeats.median):
            return outcome.repeats.shown(outcome.repeats.median)
        known = {v: s for v, s in outcome.verdicts.items() if v != ALREADY}
        if not known:
            return ALREADY
        between = {v: s for v, s in known.items() if not v.startswith("reached") and v != "never"}
        if not between or known.get("never", 0.0) > sum(known.values()) / 2:
            return "never"
        word = max(between, key=lambda v: between[v])
        return f"> {outcome.repeats.limit}" if word == "not within" else word

    @property
    def cause(self) -> str:
        """The commonest cause of "never", or an empty text."""
        return next(iter(self.never_causes), "")


def arm_of(dataset: xr.Dataset, rule: str, route: str, protocol: str) -> Arm:
    """Return the arm with these labels.

    Parameters
    ----------
    dataset : Dataset
        In the schema of results.
    rule, route, protocol : str
        Labels on the axes of `dataset`.
    """
    one = dataset.sel(rule=rule, route=route, protocol=protocol)
    status = meanings(dataset["status"]).get(int(integers(one["status"])), "not run")
    control = str(one["control"].values)
    cells = int(dataset.sizes["cell"])
    if status != COMPLETE:
        return Arm(rule, route, protocol, control, status, cells)
    verdict = integers(one["verdict"])
    never = {v for v, word in meanings(dataset["verdict"]).items() if word == "never"}
    stuck = np.isin(verdict, list(never))
    causes = shares(integers(one["never_cause"])[stuck], meanings(dataset["never_cause"]))
    return Arm(
        rule,
        route,
        protocol,
        control,
        status,
        cells,
        expressed=_outcome(dataset, one, ""),
        induced=_outcome(dataset, one, "_induced"),
        never_causes={cause: share * float(stuck.mean()) for cause, share in causes.items()},
        extrapolated=float(np.mean(integers(one["extrapolated"]) == 1)),
        partner_fired=float(np.mean(_known(one["partner_fired"]))),
        lag=float(np.median(_known(one["realised_lag"]))),
        late=_late(one),
    )


def _late(one: xr.Dataset) -> float:
    """Return the share of cells that reach the criterion only in the follow-up."""
    minutes = np.asarray(one["minutes_to_criterion"].values, dtype=float)
    end = float(one["epoch_end"].sel(epoch="induction").values)
    return float(np.mean(np.isfinite(minutes) & (minutes > end + 1e-6)))


def limit_of(dataset: xr.Dataset, protocol: str) -> int:
    """Return how many repeats a protocol has."""
    done = np.asarray(dataset["repeats"].sel(protocol=protocol).values, dtype=float)
    return int(np.nanmax(done)) if np.isfinite(done).any() else 0


def _known(values: xr.DataArray) -> NDArray[np.float64]:
    """Return the finite values, or one NaN when there are none."""
    found = np.asarray(values.values, dtype=float)
    found = found[np.isfinite(found)]
    return found if len(found) else np.array([np.nan])


def _outcome(dataset: xr.Dataset, one: xr.Dataset, kind: str) -> Outcome:
    words = meanings(dataset[f"verdict{kind}"])
    verdict = integers(one[f"verdict{kind}"])
    starts_there = np.isin(verdict, [v for v, word in words.items() if word == ALREADY])
    repeats = np.asarray(one[f"repeats_to_criterion{kind}"].values, dtype=float)[~starts_there]
    return Outcome(
        counts_of(repeats, limit_of(dataset, str(one["protocol"].values))),
        float(np.isfinite(repeats).sum() / max(len(verdict), 1)),
        shares(verdict, words),
    )
