"""Results on disk: written whole or not at all, refused when they are not ours, read anywhere."""

from __future__ import annotations

import errno
import json
import os
import stat
import subprocess
import sys
from collections.abc import Callable
from pathlib import Path
from typing import Any

import numpy as np
import pytest
import xarray as xr

import plastic
from plastic.cli import main
from plastic.errors import StoreError
from plastic.study.store import BLOCKS, MARK, RESULTS, Folder, replacing, study_hash
from tests.study.small import CONTROLS, SMALL, study, text

FULL = OSError(errno.ENOSPC, os.strerror(errno.ENOSPC))


def snapshot(path: Path) -> dict[str, bytes]:
    """Return every file under a folder with its content."""
    return {str(p.relative_to(path)): p.read_bytes() for p in path.rglob("*") if p.is_file()}


def parts(path: Path) -> list[str]:
    return [p.name for p in path.rglob("*.part")]


def resumed(path: Path) -> xr.Dataset:
    return plastic.run(study(CONTROLS), out=path)


# ---- written whole or not at all


def test_a_file_takes_its_name_when_it_is_whole(tmp_path: Path) -> None:
    target = tmp_path / "a.txt"
    with replacing(target) as part:
        part.write_text("whole")
        assert not target.exists()
    assert target.read_text() == "whole"
    assert parts(tmp_path) == []


def broken_off(target: Path, raised: BaseException) -> None:
    with replacing(target) as part:
        part.write_text("ne")
        raise raised


@pytest.mark.parametrize("raised", [FULL, ValueError("no"), KeyboardInterrupt()])
def test_a_write_that_fails_leaves_the_old_file_and_no_half_one(
    tmp_path: Path, raised: BaseException
) -> None:
    target = tmp_path / "a.txt"
    target.write_text("old")
    expected = StoreError if raised is FULL else type(raised)
    with pytest.raises(expected):
        broken_off(target, raised)
    assert snapshot(tmp_path) == {"a.txt": b"old"}


def test_others_may_read_what_the_umask_lets_them(finished: Path, tmp_path: Path) -> None:
    plain = tmp_path / "plain"
    plain.touch()
    for name in (RESULTS, MARK):
        assert stat.S_IMODE((finished / name).stat().st_mode) == stat.S_IMODE(plain.stat().st_mode)


def no_room(limit: int) -> Callable[..., Any]:
    """Return a write that puts some bytes on the disk and then finds it full."""

    def write(target: Any, *_: Any, **__: Any) -> None:
        with open(target if isinstance(target, Path) else target.name, "wb") as file:
            file.write(b"x" * limit)
        raise OSError(errno.ENOSPC, os.strerror(errno.ENOSPC))

    return write


@pytest.mark.parametrize(
    ("owner", "name", "file"), [(np, "savez", BLOCKS), (Path, "write_bytes", RESULTS)]
)
def test_a_full_disk_is_one_clear_error_and_leaves_no_half_written_file(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch, owner: Any, name: str, file: str
) -> None:
    out = tmp_path / "run"
    with monkeypatch.context() as patched:
        patched.setattr(owner, name, no_room(64))
        with pytest.raises(StoreError, match=f"{file}.*could not be written .No space left"):
            plastic.run(study(), out=out, workers=1)
    assert parts(out) == []
    assert not (out / RESULTS).exists()
    assert not any(p.stat().st_size == 64 for p in (out / BLOCKS).iterdir())
    xr.testing.assert_identical(plastic.run(study(), out=out), plastic.run(study()))


def test_a_disk_that_really_takes_no_more_is_one_line_and_no_crash(
    tmp_path: Path, finished: Path
) -> None:
    """With a limit on the size of a file, every road to the disk fails as on a full one."""
    assert finished.exists()  # its run compiled the rules: they are not to be kept on such a disk
    (tmp_path / "bundles.toml").write_text(text(CONTROLS))
    code = (
        "import resource, sys; from plastic.cli import main\n"
        "resource.setrlimit(resource.RLIMIT_FSIZE, (200_000, 200_000))\n"
        "sys.exit(main(['run', 'bundles.toml', '--out', 'run', '--no-figures']))\n"
    )
    done = subprocess.run(
        [sys.executable, "-c", code], cwd=tmp_path, capture_output=True, text=True
    )  # fmt: skip
    assert done.returncode == 2
    (line,) = done.stderr.splitlines()
    assert line.startswith("plastic: ")
    assert "results.nc: could not be written (File too large)" in line
    assert parts(tmp_path) == []
    assert len(list((tmp_path / "run" / BLOCKS).iterdir())) == 6


# ---- what is not ours


def test_the_folder_of_another_study_is_refused_and_nothing_in_it_changes(folder: Path) -> None:
    before = snapshot(folder)
    with pytest.raises(StoreError, match=r"made by another study .'Two bundles on a branch'"):
        plastic.run(study(), out=folder)
    assert snapshot(folder) == before


@pytest.mark.parametrize("name", ["notes.txt", RESULTS, "blocks/own.npz"])
def test_a_folder_with_files_of_others_is_refused_and_nothing_in_it_changes(
    tmp_path: Path, name: str
) -> None:
    file = tmp_path / "mine" / name
    file.parent.mkdir(parents=True)
    file.write_text("dear to me")
    with pytest.raises(StoreError, match="holds files that plastic did not make"):
        plastic.run(study(), out=tmp_path / "mine")
    assert snapshot(tmp_path / "mine") == {name: b"dear to me"}


def test_a_file_is_no_folder(tmp_path: Path) -> None:
    (tmp_path / "mine").write_text("dear to me")
    with pytest.raises(StoreError, match="is a file; give --out a folder"):
        plastic.run(study(), out=tmp_path / "mine")


@pytest.mark.parametrize("mark", ["", "{", "[]", '{"title": "x"}'])
def test_a_mark_that_cannot_be_read_is_refused(folder: Path, mark: str) -> None:
    (folder / MARK).write_text(mark)
    with pytest.raises(StoreError, match="cannot be read; give --out another folder"):
        resumed(folder)


def test_an_empty_folder_is_taken_and_so_is_one_whose_mark_was_being_written(
    tmp_path: Path,
) -> None:
    for name, left in (("empty", None), ("killed", f".{MARK}-0f.part")):
        out = tmp_path / name
        out.mkdir()
        if left:
            (out / left).touch()
        Folder(out, study())
        assert (out / MARK).exists()
        assert (out / BLOCKS).is_dir()


def test_a_refusal_on_the_command_line_is_one_line(
    folder: Path, tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    other = tmp_path / "other.toml"
    other.write_text(SMALL)
    assert main(["run", str(other), "--out", str(folder)]) == 2
    assert len(capsys.readouterr().err.splitlines()) == 1


@pytest.mark.parametrize(
    ("one", "other", "same"),
    [
        (study(), study(("cells = 4", "cells = 4 # four")), True),
        (study(), study(cells=4, seed=3), True),
        (study(), study(seed=4), False),
        (study(), study(cells=5), False),
        (study(), study(("times = 12", "times = 13")), False),
        (study(), study(("[compare]", '[compare]\nat_ceiling = "hidden"')), False),
    ],
)
def test_a_study_is_the_same_when_its_results_are(one: Any, other: Any, same: bool) -> None:
    assert (study_hash(one) == study_hash(other)) is same


# ---- read anywhere


def test_the_file_says_what_it_is_and_how_it_was_made(finished: Path) -> None:
    attrs = plastic.load(finished).attrs
    assert attrs["Conventions"].startswith("CF-")
    assert attrs["study"] == text(CONTROLS)
    assert attrs["study_hash"] == study_hash(study(CONTROLS))
    assert (attrs["seed"], attrs["dt"], attrs["rest"]) == (3, 0.1, -68.0)
    assert {"python", "numpy", "numba"} <= set(json.loads(attrs["versions"]))


def test_any_xarray_reads_the_results_without_plastic(finished: Path) -> None:
    code = """
import sys, xarray
ds = xarray.open_dataset("results.nc")
arm = ds.sel(rule="pair_timing", route="quantal_size", protocol="pairs", input="upper")
print(arm.epsp_peak.dims, arm.epsp_peak.attrs["units"], float(arm.epsp_peak.isel(reading=0).min()))
print(str(arm.control.values) == "", arm.time.attrs["units"], arm.time.dtype)
print([m for m in sys.modules if m.split(".")[0] == "plastic"])
"""
    done = subprocess.run(
        [sys.executable, "-W", "error", "-c", code], cwd=finished, capture_output=True, text=True
    )  # fmt: skip
    assert done.stderr == ""
    first, second, third = done.stdout.splitlines()
    assert first.startswith("('cell', 'reading') mV ")
    assert 6 < float(first.split()[-1]) < 9
    assert second == "True min float64"
    assert third == "[]"
