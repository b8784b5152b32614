"""The study that a results file was made from, out of the text that it keeps."""

from __future__ import annotations

import xarray as xr

from plastic.errors import PlasticError
from plastic.protocols import Schedule
from plastic.rules._interface import Rule
from plastic.study.file import parse_study
from plastic.study.model import Study


def study_of(dataset: xr.Dataset) -> Study | None:
    """Return the study of a dataset, or None when it cannot be rebuilt here.

    A study that reads spike times from files beside it can only be rebuilt where those files are.

    Parameters
    ----------
    dataset : Dataset
        In the schema of results.
    """
    try:
        return parse_study(str(dataset.attrs.get("study", "")), file="study text of the results")
    except PlasticError:
        return None


def rules_of(study: Study | None) -> dict[str, Rule]:
    """Return the rule behind each label of a study; empty without one."""
    return {} if study is None else {choice.label: choice.rule for choice in study.compare.rules}


def schedules_of(study: Study | None) -> dict[str, Schedule]:
    """Return the exact times behind each protocol and control; empty without a study."""
    return {} if study is None else study.schedules()
