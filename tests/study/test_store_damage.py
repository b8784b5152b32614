"""Damaged results and blocks: said clearly, made again where they can be."""

from __future__ import annotations

import errno
import os
import shutil
from collections.abc import Callable
from pathlib import Path

import h5netcdf
import numpy as np
import pytest
import xarray as xr

import plastic
from plastic.errors import StoreError
from plastic.study import store
from plastic.study.store import BLOCKS, RESULTS
from tests.study.small import CONTROLS, study


def resumed(path: Path) -> xr.Dataset:
    """Give the command of the finished run again."""
    return plastic.run(study(CONTROLS), out=path)


@pytest.mark.parametrize("kept", [0, 7, 0.3, 0.999])
def test_truncated_results_are_a_clear_error(folder: Path, kept: float) -> None:
    file = folder / RESULTS
    whole = file.read_bytes()
    file.write_bytes(whole[: int(kept * len(whole)) if kept < 1 else int(kept)])
    for read in (plastic.load, resumed):
        with pytest.raises(StoreError) as caught:
            read(folder)
        assert str(caught.value) == (
            f"{file}: truncated, or no results file; the finished blocks in {folder / BLOCKS} are "
            f"kept: delete {RESULTS} and give the same `plastic run` again"
        )


def test_doing_what_the_error_says_brings_the_results_back(folder: Path) -> None:
    whole = (folder / RESULTS).read_bytes()
    blocks = {p.name: p.stat().st_mtime_ns for p in (folder / BLOCKS).iterdir()}
    (folder / RESULTS).write_bytes(whole[:1000])
    with pytest.raises(StoreError):
        resumed(folder)
    (folder / RESULTS).unlink()
    resumed(folder)
    assert (folder / RESULTS).read_bytes() == whole
    assert {p.name: p.stat().st_mtime_ns for p in (folder / BLOCKS).iterdir()} == blocks


def test_truncated_results_without_their_blocks_promise_nothing(
    folder: Path, tmp_path: Path
) -> None:
    alone = tmp_path / "sent.nc"
    alone.write_bytes((folder / RESULTS).read_bytes()[:1000])
    with pytest.raises(StoreError, match=r"sent\.nc: truncated, or no results file$"):
        plastic.load(alone)


def test_a_file_that_may_not_be_read_is_not_called_truncated(
    folder: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    """Not by its permissions: root may read every file."""

    def refused(*_: object) -> None:
        raise PermissionError(errno.EACCES, os.strerror(errno.EACCES))

    monkeypatch.setattr(store, "open", refused, raising=False)
    for read in (plastic.load, resumed):
        with pytest.raises(StoreError, match=r"results\.nc: cannot be read .Permission denied.$"):
            read(folder)


def test_a_netcdf_file_of_others_is_refused(tmp_path: Path) -> None:
    with h5netcdf.File(tmp_path / "other.nc", "w") as file:
        file.dimensions = {"x": 2}
        file.create_variable("y", ("x",), data=np.zeros(2))
    with pytest.raises(StoreError, match="was not made by `plastic run`"):
        plastic.load(tmp_path / "other.nc")


def test_results_that_are_not_there_say_how_to_get_them(tmp_path: Path) -> None:
    with pytest.raises(StoreError, match=r"results\.nc: there is no such results file"):
        plastic.load(tmp_path)


def flipped(data: bytes) -> bytes:
    middle = len(data) // 2
    return data[:middle] + bytes([data[middle] ^ 1]) + data[middle + 1 :]


@pytest.mark.parametrize(
    "damage",
    [
        lambda data: data[: len(data) // 2],
        lambda data: b"",
        lambda data: b"no block at all",
        flipped,
    ],
    ids=["truncated", "empty", "garbage", "one bit"],
)
def test_a_damaged_block_is_made_again(folder: Path, damage: Callable[[bytes], bytes]) -> None:
    before = (folder / RESULTS).read_bytes()
    (folder / RESULTS).unlink()
    block = sorted((folder / BLOCKS).iterdir())[2]
    whole = block.read_bytes()
    block.write_bytes(damage(whole))
    resumed(folder)
    assert (folder / RESULTS).read_bytes() == before
    assert block.read_bytes() != damage(whole)


def test_without_its_blocks_a_run_is_made_again(folder: Path) -> None:
    before = (folder / RESULTS).read_bytes()
    (folder / RESULTS).unlink()
    shutil.rmtree(folder / BLOCKS)
    resumed(folder)
    assert (folder / RESULTS).read_bytes() == before
