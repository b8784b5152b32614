"""A finished run of the small study with all its controls, shared by tests that only read it."""

from __future__ import annotations

import shutil
from pathlib import Path

import pytest
import xarray as xr

import plastic
from tests.study.small import CONTROLS, study


@pytest.fixture(scope="session")
def finished(tmp_path_factory: pytest.TempPathFactory) -> Path:
    """The folder of the run; copy it before changing anything."""
    out = tmp_path_factory.mktemp("finished") / "run"
    plastic.run(study(CONTROLS), out=out)
    return Path(out)


@pytest.fixture
def results(finished: Path) -> xr.Dataset:
    """The results of the run."""
    return plastic.load(finished)


@pytest.fixture
def folder(finished: Path, tmp_path: Path) -> Path:
    """A copy of the finished run, to be damaged."""
    return Path(shutil.copytree(finished, tmp_path / "run"))
