"""The figures of a study, each with a CSV of every number in it."""

from __future__ import annotations

from collections.abc import Callable
from os import PathLike
from pathlib import Path

import xarray as xr

from plastic.report.comparison import compare
from plastic.report.figures.course import controls, family_of, time_course
from plastic.report.figures.curves import CURVES, is_complete, learning_curve
from plastic.report.figures.matrix import matrix
from plastic.report.figures.picture import Picture
from plastic.report.figures.portrait import lag_window, rate_dependence
from plastic.report.figures.rig import before_after
from plastic.report.origin import rules_of, study_of


def pictures_of(dataset: xr.Dataset) -> list[Picture]:
    """Return every figure of a study, not yet drawn.

    Parameters
    ----------
    dataset : Dataset
        In the schema of results. Arms that were not run to their end are left out.
    """
    comparison = compare(dataset)
    found: list[Picture] = []
    marked = comparison.illustrative
    for protocol in comparison.own_protocols:
        found.append(matrix(comparison, protocol))
        found += [
            learning_curve(dataset, protocol, variable, illustrative=marked) for variable in CURVES
        ]
        found.append(time_course(dataset, protocol, illustrative=marked))
        if len(family_of(dataset, protocol)) > 1:
            found.append(controls(dataset, protocol, illustrative=marked))
        found.append(before_after(dataset, protocol, illustrative=marked))
    rules = rules_of(study_of(dataset))
    if rules:
        found += [lag_window(rules), rate_dependence(rules)]
    return [picture for picture in found if picture.rows]


def write_figures(
    dataset: xr.Dataset,
    folder: str | PathLike[str],
    *,
    progress: Callable[[int, int], None] | None = None,
) -> list[Path]:
    """Write every figure at 85 and 180 mm, as SVG and PNG (300 dpi), with its numbers as CSV.

    Parameters
    ----------
    dataset : Dataset
        As `plastic.run` returns it or `plastic.load` reads it.
    folder : path
        Made when it is not there.
    progress : function of (done, total), optional
        Called after each figure.

    Returns
    -------
    list of Path
        The files written.
    """
    where = Path(folder)
    where.mkdir(parents=True, exist_ok=True)
    pictures, written = pictures_of(dataset), []
    for k, picture in enumerate(pictures):
        written += picture.save(where)
        if progress is not None:
            progress(k + 1, len(pictures))
    return written


__all__ = ["Picture", "is_complete", "pictures_of", "write_figures"]
