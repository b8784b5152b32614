"""What the EPSP of every learning input has become, arm by arm: paired and control pathways."""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np
import xarray as xr

from plastic.protocols import Schedule
from plastic.report.arms import Arm

PAIRED, TESTED_ONLY, FIXED, UNTOLD = "paired", "control pathway", "does not learn", "not told"


@dataclass(frozen=True)
class Pathway:
    """One input in one arm, at the last reading.

    Attributes
    ----------
    rule, route, protocol, control, input : str
    role : str
        "paired" when the input learns and the induction drives it, "control pathway" when it
        learns and only test pulses drive it, "does not learn"; "not told" when the study cannot
        be rebuilt here.
    percent, low, high : float, % of baseline
        Median and quartiles of the EPSP over simulated cells.
    fires_alone : float
        Median probability that the input alone fires the cell.
    reached : float
        Share of simulated cells in which the criterion input reached the criterion.
    """

    rule: str
    route: str
    protocol: str
    control: str
    input: str
    role: str
    percent: float
    low: float
    high: float
    fires_alone: float
    reached: float


def pathways_of(
    dataset: xr.Dataset, arms: Sequence[Arm], schedules: Mapping[str, Schedule]
) -> tuple[Pathway, ...]:
    """Return every input that is read, in every complete arm.

    Parameters
    ----------
    dataset : Dataset
        In the schema of results.
    arms : sequence of Arm
    schedules : mapping of protocol to Schedule
        Says which inputs the induction drives; may lack some or all.
    """
    learns = {name.strip() for name in str(dataset.attrs["learns"]).split(",")}
    found = []
    for arm in arms:
        if arm.expressed is None:
            continue
        one = dataset.sel(rule=arm.rule, route=arm.route, protocol=arm.protocol)
        for name in map(str, dataset["input"].values):
            percent = last_values(one["epsp_percent_of_baseline"].sel(input=name))
            median, low, high = spread(percent)
            firing, _, _ = spread(last_values(one["fires_alone"].sel(input=name)))
            role = _role(name, schedules.get(arm.protocol)) if name in learns else FIXED
            found.append(
                Pathway(
                    *arm.key, arm.control, name, role, median, low, high, firing,
                    arm.expressed.reached,
                )
            )  # fmt: skip
    return tuple(found)


def last_values(values: xr.DataArray) -> np.ndarray[Any, np.dtype[np.float64]]:
    """Return the last finite reading of each cell; NaN where there is none.

    Parameters
    ----------
    values : DataArray, dims (cell, reading)
    """
    table = np.asarray(values.transpose("cell", "reading").values, dtype=float)
    known = np.isfinite(table)
    last = table.shape[1] - 1 - np.argmax(known[:, ::-1], axis=1)
    return np.where(known.any(axis=1), table[np.arange(len(table)), last], np.nan)


def spread(values: np.ndarray[Any, np.dtype[np.float64]]) -> tuple[float, float, float]:
    """Return median, lower and upper quartile of the finite values; NaN of none."""
    known = values[np.isfinite(values)]
    if not len(known):
        return math.nan, math.nan, math.nan
    low, median, high = np.quantile(known, [0.25, 0.5, 0.75])
    return float(median), float(low), float(high)


def criterion_input(dataset: xr.Dataset) -> str:
    """Return the input that the criterion is about."""
    return str(dataset.attrs["criterion_input"])


def _role(name: str, schedule: Schedule | None) -> str:
    if schedule is None:
        return UNTOLD
    return PAIRED if len(schedule.pattern.get(name, ())) else TESTED_ONLY


def parent_of(protocol: str, control: str) -> str:
    """Return the protocol that a control belongs to: its label without the control's words."""
    words = f", {control.replace('_', ' ')}"
    return protocol.removesuffix(words) if control else protocol
