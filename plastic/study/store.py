"""Results on disk: finished blocks while a run goes on, and one netCDF-4 file at its end.

Everything is written under another name in the same folder and then renamed, so that no half file
ever has a final name.
"""

from __future__ import annotations

import contextlib
import hashlib
import importlib.metadata
import io
import json
import os
import platform
import tomllib
import uuid
import zipfile
from collections.abc import Iterator
from pathlib import Path
from typing import Any

import h5netcdf
import h5py
import numpy as np
import xarray as xr
from numpy.typing import NDArray

from plastic.errors import StoreError
from plastic.protocols import Schedule
from plastic.study.accuracy import accuracy_of
from plastic.study.block import Arrays, read_inputs
from plastic.study.grid import Arm, Grid, reading_times
from plastic.study.model import Study
from plastic.study.population import Population
from plastic.study.schema import (
    ARM,
    COMPLETE,
    NOT_APPLICABLE,
    NOT_RUN,
    STATUSES,
    VARIABLES,
    Variable,
)
from plastic.version import VERSION

RESULTS, MARK, BLOCKS = "results.nc", "run.json", "blocks"
LIBRARIES = ("numpy", "scipy", "numba", "xarray", "h5netcdf", "h5py")


def study_hash(study: Study) -> str:
    """Return a hash of everything that decides a study's results; comments do not count."""
    parts: list[bytes] = [
        json.dumps(tomllib.loads(study.text), sort_keys=True, default=str).encode(),
        f"{study.seed} {study.cells} {VERSION}".encode(),
    ]
    for name, schedule in study.schedules().items():
        parts += [name.encode(), schedule.injected.tobytes()]
        parts += [k.encode() + v.tobytes() for k, v in sorted(schedule.times.items())]
    return hashlib.sha256(b"\0".join(parts)).hexdigest()[:16]


@contextlib.contextmanager
def replacing(path: Path) -> Iterator[Path]:
    """Give a name to write to; it takes the final name only when the block ends well.

    Raises
    ------
    StoreError
        When the folder cannot be written to, or the disk is full.
    """
    temporary = path.parent / f".{path.name}-{uuid.uuid4().hex[:12]}.part"
    try:
        temporary.touch(exist_ok=False)  # not mkstemp: others may read what the umask lets them
    except OSError as error:
        raise StoreError(f"{path.parent}: cannot be written to ({error.strerror})") from None
    try:
        yield temporary
        with open(temporary, "rb") as file:
            os.fsync(file.fileno())
        os.replace(temporary, path)
    except OSError as error:
        raise StoreError(f"{path}: could not be written ({error.strerror or error})") from None
    finally:
        temporary.unlink(missing_ok=True)


def _left_over(path: Path) -> bool:
    """Return whether a file is what a killed run left of its mark."""
    return path.name.startswith(f".{MARK}-") and path.suffix == ".part"


class Folder:
    """The output folder of one study."""

    def __init__(self, path: Path, study: Study) -> None:
        self.path, self.hash = path, study_hash(study)
        self._claim(study)

    def _claim(self, study: Study) -> None:
        """Take the folder for this study, or refuse it."""
        mark = self.path / MARK
        if self.path.exists() and not self.path.is_dir():
            raise StoreError(f"{self.path}: is a file; give --out a folder")
        if mark.exists():
            self._recognise(mark)
        elif self.path.exists() and any(not _left_over(p) for p in self.path.iterdir()):
            raise StoreError(
                f"{self.path}: holds files that plastic did not make; give --out another folder"
            )
        try:
            self.path.mkdir(parents=True, exist_ok=True)
            if not mark.exists():  # before anything else, so that a killed run keeps its folder
                told = json.dumps({"title": study.title, "study_hash": self.hash}, indent=1)
                with replacing(mark) as part:
                    part.write_text(told)
            (self.path / BLOCKS).mkdir(exist_ok=True)
        except OSError as error:
            raise StoreError(f"{self.path}: cannot be made ({error.strerror})") from None

    def _recognise(self, mark: Path) -> None:
        """Refuse a folder whose mark is of another study."""
        try:
            made_by = json.loads(mark.read_text())
            title, found = made_by["title"], made_by["study_hash"]
        except (OSError, ValueError, KeyError, TypeError):
            raise StoreError(f"{mark}: cannot be read; give --out another folder") from None
        if found != self.hash:
            raise StoreError(
                f"{self.path}: made by another study ({title!r}, hash {found}; this one is "
                f"{self.hash}); give --out another folder, nothing was changed"
            )

    def block(self, arm: Arm, first: int, last: int) -> Path:
        """Return the file of one block."""
        place = "-".join(map(str, arm.place))
        return self.path / BLOCKS / f"{place}-{first}-{last}.npz"

    def save(self, file: Path, arrays: Arrays) -> None:
        """Write a finished block, atomically."""
        with replacing(file) as part, open(part, "wb") as out:
            np.savez(out, **arrays)  # type: ignore[arg-type]

    def load(self, file: Path) -> Arrays | None:
        """Return a finished block, or None when it is not there or cannot be read."""
        if not file.exists():
            return None
        try:
            with open(file, "rb") as opened, np.load(opened) as stored:
                return {name: stored[name] for name in stored.files}
        except (OSError, ValueError, zipfile.BadZipFile, KeyError, EOFError):
            return None


def load(path: str | Path) -> xr.Dataset:
    """Return the results in a file, or in the folder of a run.

    Raises
    ------
    StoreError
        When there is no such file, or it cannot be read, is truncated or was not made by plastic.
    """
    file = Path(path)
    file = file / RESULTS if file.is_dir() else file
    if not file.exists():
        raise StoreError(f"{file}: there is no such results file (`plastic run STUDY` makes one)")
    try:
        with open(file, "rb"):
            pass
    except OSError as error:
        raise StoreError(f"{file}: cannot be read ({error.strerror})") from None
    try:
        with xr.open_dataset(file, engine="h5netcdf") as opened:
            found = opened.load()
    except Exception:  # h5py and xarray raise many kinds for a damaged file, none for people
        raise StoreError(f"{file}: truncated, or no results file{_way_out(file)}") from None
    if "study_hash" not in found.attrs:
        raise StoreError(f"{file}: was not made by `plastic run`")
    return found


def _way_out(file: Path) -> str:
    """Return what to do about damaged results beside which the run's blocks are."""
    if not (file.parent / MARK).exists() or not (file.parent / BLOCKS).is_dir():
        return ""
    return (
        f"; the finished blocks in {file.parent / BLOCKS} are kept: delete {file.name} and give "
        "the same `plastic run` again"
    )


def largest_bytes(study: Study) -> int:
    """Return how large the results of a study get, in bytes; no cell is drawn for it."""
    schedules = study.schedules().values()
    readings = max(len(reading_times(s)[0]) for s in schedules)
    arms = sum(1 if s.control else len(study.compare.routes) for s in schedules)
    inputs = len(read_inputs(study))
    per_reading = 12 * inputs + 3 * 8 + 16
    return len(study.compare.rules) * arms * study.cells * (readings * per_reading + 80) * 4


def _versions() -> str:
    found = {name: importlib.metadata.version(name) for name in LIBRARIES}
    return json.dumps({"python": platform.python_version(), **found})


def write_results(
    path: Path, study: Study, population: Population, grid: Grid, blocks: Any
) -> None:
    """Write the results file, atomically.

    It is made in memory first: a disk that fills up under an open HDF5 file ends the process.

    Parameters
    ----------
    blocks : callable
        Arm -> its arrays over all cells.
    """
    image = io.BytesIO()
    with h5netcdf.File(image, "w") as file:
        sizes = _axes(file, study, population, grid)
        status = np.full(
            [len(a) for a in (grid.rules, grid.routes, grid.protocols)], NOT_RUN, np.int8
        )
        for k, name in enumerate(grid.protocols):
            if name in grid.not_applicable:
                status[:, :, k] = NOT_APPLICABLE
        made = {name: _variable(file, name, kind, sizes) for name, kind in VARIABLES.items()}
        for arm in grid.arms:
            arrays = blocks(arm)
            for name, variable in made.items():
                values = np.asarray(arrays[name])
                if VARIABLES[name].dims[-1] == "reading":
                    variable[(*arm.place, ..., slice(0, values.shape[-1]))] = values
                else:
                    variable[arm.place] = values
            status[arm.place] = COMPLETE
        _put(file, "status", ARM, status, "1", "status of the arm", STATUSES)
        _attributes(file, study, population)
    with replacing(path) as part:
        part.write_bytes(image.getbuffer())


def _axes(file: Any, study: Study, population: Population, grid: Grid) -> dict[str, int]:
    """Write dimensions and coordinates; return the sizes."""
    scene, inputs = population.scene, read_inputs(study)
    readings = max(len(reading_times(s)[0]) for s in grid.schedules.values())
    labels = {
        "rule": grid.rules,
        "route": grid.routes,
        "protocol": grid.protocols,
        "input": inputs,
        "epoch": ["baseline", "induction", "follow_up"],
    }
    sizes = {k: len(v) for k, v in labels.items()} | {
        "cell": study.cells,
        "contact": len(scene.contacts),
        "stretch": len(scene.tree.stretch_parent),
        "reading": readings,
    }
    file.dimensions = sizes
    for name, values in labels.items():
        _put(file, name, (name,), np.array(values, dtype=object), "1", name.replace("_", " "))
    for name in ("cell", "contact", "stretch", "reading"):
        _put(file, name, (name,), np.arange(sizes[name]), "1", f"number of the {name}")
    distance = scene.tree.node_distance
    _put(
        file,
        "input_of",
        ("contact",),
        np.array([k.input for k in scene.contacts], dtype=object),
        "1",
        "input of the contact",
    )
    _put(
        file,
        "distance",
        ("contact",),
        distance[[k.node for k in scene.contacts]],
        "um",
        "path distance of the contact from the soma",
    )
    _put(
        file,
        "added",
        ("contact",),
        np.array([int(k.added) for k in scene.contacts], np.int8),
        "1",
        "contact that exists only by the route added_contact",
        ("no", "yes"),
    )
    near = distance[scene.tree.stretch_parent]
    _put(file, "stretch_from", ("stretch",), near, "um", "near end of the stretch")
    _put(
        file,
        "stretch_to",
        ("stretch",),
        near + scene.tree.stretch_length,
        "um",
        "far end of the stretch",
    )
    _timing(file, grid, readings)
    _put(
        file,
        "threshold",
        ("cell",),
        population.threshold + scene.rest,
        "mV",
        "threshold of the spike",
    )
    _put(
        file,
        "input_resistance",
        ("cell",),
        population.input_resistance,
        "Mohm",
        "input resistance at the soma",
    )
    _put(
        file,
        "amplitude",
        ("cell",),
        population.amplitude,
        "1",
        "size of a rule's changes in this cell, multiple of the rule's own",
    )
    return sizes


def _timing(file: Any, grid: Grid, readings: int) -> None:
    shape = (len(grid.protocols), readings)
    time, repeats = np.full(shape, np.nan), np.full(shape, np.nan)
    edges = np.full((len(grid.protocols), 3, 2), np.nan)
    control = []
    for k, name in enumerate(grid.protocols):
        schedule = grid.schedules.get(name)
        control.append(_control(name, schedule, grid))
        if schedule is None:
            continue
        at, count, _baseline = reading_times(schedule)
        start = schedule.epochs[1].start
        time[k, : len(at)] = (at - start) / 60_000.0
        repeats[k, : len(at)] = count
        edges[k] = [
            [(e.start - start) / 60_000.0, (e.end - start) / 60_000.0] for e in schedule.epochs
        ]
    since = "time from the start of the induction"
    _put(
        file,
        "control",
        ("protocol",),
        np.array(control, dtype=object),
        "1",
        "control that the arm is",
    )
    _put(file, "time", ("protocol", "reading"), time, "min", since)
    _put(file, "repeats", ("protocol", "reading"), repeats, "1", "repeats completed")
    _put(
        file,
        "epoch_start",
        ("protocol", "epoch"),
        edges[:, :, 0],
        "min",
        f"{since}, start of the epoch",
    )
    _put(
        file,
        "epoch_end",
        ("protocol", "epoch"),
        edges[:, :, 1],
        "min",
        f"{since}, end of the epoch",
    )


def _control(name: str, schedule: Schedule | None, grid: Grid) -> str:
    if schedule is not None:
        return schedule.control
    return name.rpartition(", ")[2].replace(" ", "_")


def _put(
    file: Any,
    name: str,
    dims: tuple[str, ...],
    values: NDArray[Any],
    unit: str,
    long_name: str,
    flags: tuple[str, ...] = (),
) -> None:
    text = values.dtype == object
    dtype = h5py.string_dtype() if text else values.dtype
    variable = file.create_variable(name, dims, dtype=dtype, data=values)
    _describe(variable, unit, long_name, flags)


def _describe(variable: Any, unit: str, long_name: str, flags: tuple[str, ...]) -> None:
    variable.attrs["units"] = unit
    variable.attrs["long_name"] = long_name
    if flags:
        variable.attrs["flag_values"] = np.arange(len(flags), dtype=np.int8)
        variable.attrs["flag_meanings"] = " ".join(flags)


def _variable(file: Any, name: str, kind: Variable, sizes: dict[str, int]) -> Any:
    """Create a variable in chunks of one arm: arms that were not run take no room."""
    dtype, missing = (np.int8, np.int8(-1)) if kind.whole else (np.float32, np.float32(np.nan))
    chunks = tuple(1 if dim in ARM else sizes[dim] for dim in kind.dims)
    made = file.create_variable(name, kind.dims, dtype=dtype, chunks=chunks, fillvalue=missing)
    if kind.whole:
        del made.attrs["_FillValue"]  # -1 is a value of its own: none
    _describe(made, kind.unit, kind.long_name, kind.flags)
    return made


def _attributes(file: Any, study: Study, population: Population) -> None:
    criterion = study.compare.criterion
    short = ", ".join(f"{k}: {v} cells" for k, v in population.short.items())
    file.attrs.update(
        {
            "Conventions": "CF-1.11",
            "coordinates": "control time repeats epoch_start epoch_end input_of distance added "
            "stretch_from stretch_to",
            "title": study.title,
            "study": study.text,
            "study_hash": study_hash(study),
            "seed": study.seed,
            "plastic_version": VERSION,
            "versions": _versions(),
            "dt": study.dt,
            "solver": "exact propagator of the passive membrane, synaptic currents held over the "
            "step (implicit, second order), spikes on the grid of steps, quiet stretches jumped "
            "exactly",
            "criterion": f"{criterion.input} alone fires the cell with probability >= "
            f"{criterion.alone_fires:g}",
            "criterion_input": criterion.input,
            "alone_fires": criterion.alone_fires,
            "at_ceiling": study.compare.at_ceiling,
            "match": study.compare.match,
            "expression": study.compare.expression,
            "learns": ", ".join(study.compare.learns),
            "rest": study.cell.rest,
            "baseline_epsp_not_recruited": short,
            "source": "simulated cells; parameters drawn with the spread the study states",
            **accuracy_of(study).attributes(),
        }
    )
