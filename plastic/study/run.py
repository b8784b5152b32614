"""`plastic.run`: all blocks of a study, on threads, kept as they finish."""

from __future__ import annotations

import os
import tempfile
import threading
from collections.abc import Callable
from concurrent.futures import FIRST_COMPLETED, Future, ThreadPoolExecutor, wait
from dataclasses import dataclass
from pathlib import Path
from typing import Annotated

import numpy as np
import xarray as xr
from pydantic import TypeAdapter, ValidationError

from plastic.engine.kernel import module_for
from plastic.errors import StudyError
from plastic.study.block import Arrays, Bench, Stopped, run_block
from plastic.study.file import load_study
from plastic.study.grid import Arm, grid_of
from plastic.study.model import Study
from plastic.study.population import populate
from plastic.study.store import RESULTS, Folder, largest_bytes, load, write_results

Progress = Callable[[int, int], None]

#: cells per block: about a fifth of a second of work
SLICE = 20
#: share of the machine's memory that results may take
ROOM = 0.5


@dataclass(frozen=True)
class _Block:
    arm: Arm
    bench: Bench
    first: int
    last: int
    file: Path


def run(
    study: Study | str | Path,
    *,
    out: str | Path | None = None,
    cells: int | None = None,
    seed: int | None = None,
    workers: int | None = None,
    progress: Progress | None = None,
) -> xr.Dataset:
    """Run a study and return its results.

    Finished blocks are kept in `out`; the same call resumes a run that was stopped, and returns
    the same bits for any number of workers.

    Parameters
    ----------
    study : Study, str or Path
        A study, or its file.
    out : str or Path, optional
        Folder for blocks and ``results.nc``; nothing is kept when it is not given.
    cells, seed : int, optional
        Take the place of what the study says.
    workers : int, optional
        Threads; by default one per core.
    progress : callable, optional
        Called with (blocks done, blocks in all).

    Returns
    -------
    Dataset
        Dimensions rule, route, protocol, cell, input, contact, stretch, reading.

    Raises
    ------
    StudyError, UnknownName, DataError
        What is wrong with the study.
    StoreError
        An output folder that must not be touched.
    """
    made = study if isinstance(study, Study) else load_study(study, seed=seed, cells=cells)
    if isinstance(study, Study) and (cells is not None or seed is not None):
        changes = {k: v for k, v in (("cells", cells), ("seed", seed)) if v is not None}
        made = changed(study, changes)
    if out is not None:
        return _run_in(made, Path(out), workers, progress)
    with tempfile.TemporaryDirectory(prefix="plastic-") as folder:
        return _run_in(made, Path(folder) / "run", workers, progress)


def changed(study: Study, changes: dict[str, int]) -> Study:
    """Return the study with other numbers of cells or another seed, keeping its source."""
    for key, value in changes.items():
        try:
            TypeAdapter(Annotated[int, *Study.model_fields[key].metadata]).validate_python(value)
        except ValidationError as error:
            allowed = str(error.errors()[0]["ctx"]["allowed"])
            raise StudyError(file=study.file, key=key, value=value, allowed=allowed) from None
    copy = study.model_copy(update=changes)
    copy.model_post_init({"text": study.text, "file": study.file})
    return copy


def _run_in(study: Study, path: Path, workers: int | None, progress: Progress | None) -> xr.Dataset:
    _check_room(study, largest_bytes(study))
    population = populate(study)
    grid = grid_of(study, population)
    folder = Folder(path, study)
    results = path / RESULTS
    if results.exists():
        if progress:
            progress(1, 1)
        return load(results)
    slices = range(0, study.cells, SLICE)
    benches = {k: Bench(study, population, slice(k, min(k + SLICE, study.cells))) for k in slices}
    blocks = [
        _Block(arm, bench, first, bench.chosen.stop, folder.block(arm, first, bench.chosen.stop))
        for arm in grid.arms
        for first, bench in benches.items()
    ]
    _work(blocks, folder, workers or os.cpu_count() or 1, progress)

    def arm_arrays(arm: Arm) -> Arrays:
        parts = [_finished(folder, b) for b in blocks if b.arm is arm]
        return {name: np.concatenate([p[name] for p in parts]) for name in parts[0]}

    write_results(results, study, population, grid, arm_arrays)
    return load(results)


def _finished(folder: Folder, block: _Block) -> Arrays:
    stored = folder.load(block.file)
    if stored is None:  # lost or damaged since it was written: make it again
        stored = run_block(block.bench, block.arm, np.zeros(1, np.int64))
        folder.save(block.file, stored)
    return stored


def _check_room(study: Study, needed: int) -> None:
    """Refuse a study whose results would not fit in memory, before anything runs."""
    try:
        memory = os.sysconf("SC_PAGE_SIZE") * os.sysconf("SC_PHYS_PAGES")
    except (ValueError, OSError, AttributeError):
        return
    if needed > ROOM * memory:
        raise StudyError(
            file=study.file,
            key="cells",
            value=study.cells,
            allowed=f"would give {needed / 1e9:.1f} GB of results; {ROOM * memory / 1e9:.1f} GB "
            f"is what this machine can hold; at most {int(study.cells * ROOM * memory / needed):,} "
            "cells, or fewer arms",
        )


def _work(blocks: list[_Block], folder: Folder, workers: int, progress: Progress | None) -> None:
    """Run the blocks that are not there yet; stop them all within a moment when interrupted."""
    todo = [b for b in blocks if folder.load(b.file) is None]
    done, lock, stop = len(blocks) - len(todo), threading.Lock(), np.zeros(1, np.int64)
    if progress:
        progress(done, len(blocks))
    for rule in dict.fromkeys(type(b.arm.rule.rule) for b in todo):
        module_for(rule)

    def one(block: _Block) -> None:
        arrays = run_block(block.bench, block.arm, stop)
        folder.save(block.file, arrays)

    pool = ThreadPoolExecutor(max_workers=workers)
    try:
        waiting: set[Future[None]] = {pool.submit(one, b) for b in todo}
        while waiting:
            ended, waiting = wait(waiting, timeout=0.2, return_when=FIRST_COMPLETED)
            for future in ended:
                future.result()
            with lock:
                done += len(ended)
            if progress and ended:
                progress(done, len(blocks))
    except BaseException:
        stop[0] = 1
        pool.shutdown(wait=True, cancel_futures=True)
        raise
    pool.shutdown()


__all__ = ["Stopped", "run"]
