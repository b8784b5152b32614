"""`plastic.run`: the same bits by every road, what the command line changes, refusals."""

from __future__ import annotations

import shutil
import subprocess
import sys
from collections.abc import Callable
from pathlib import Path

import numpy as np
import pytest
import xarray as xr

import plastic
from plastic.cli import main
from plastic.errors import StudyError
from plastic.study.population import populate
from plastic.study.run import SLICE
from plastic.study.store import BLOCKS, RESULTS, largest_bytes
from tests.study.small import CONTROLS, RULES, study, text

#: more cells than a block holds, so that there are several of every arm
SEVERAL = SLICE + 5

#: a run that sends itself a signal: just before or just after the third block takes its name
ENDED = """
import os, signal, sys
from plastic.cli import main
from plastic.study import store

when, name, *words = sys.argv[1:]
real, seen = os.replace, []
# a job in the background of a shell starts deaf to it
signal.signal(signal.SIGINT, signal.default_int_handler)

def replace(part, target):
    if str(target).endswith(".npz"):
        seen.append(target)
    if len(seen) == 3 and when == "before":
        os.kill(os.getpid(), getattr(signal, name))
    real(part, target)
    if len(seen) == 3 and when == "after":
        os.kill(os.getpid(), getattr(signal, name))

store.os.replace = replace
sys.exit(main(["run", *words]))
"""


@pytest.fixture
def file(tmp_path: Path) -> Path:
    made = tmp_path / "bundles.toml"
    made.write_text(text(CONTROLS))
    return made


def command(file: Path, out: str, *words: str) -> subprocess.CompletedProcess[str]:
    """Run ``python -m plastic run`` in the folder of the study."""
    every = ["-m", "plastic", "run", file.name, "--out", out, "--no-figures", *words]
    return subprocess.run([sys.executable, *every], cwd=file.parent, capture_output=True, text=True)


def ended(file: Path, when: str, name: str, *words: str) -> subprocess.CompletedProcess[str]:
    """Run the study until it is sent a signal."""
    every = [when, name, file.name, "--out", "run", "--no-figures", *words]
    return subprocess.run(
        [sys.executable, "-c", ENDED, *every], cwd=file.parent, capture_output=True, text=True
    )


# ---- the same bits by every road


def test_one_and_several_workers_give_the_same_bits(tmp_path: Path) -> None:
    made = study(RULES, cells=SEVERAL)
    for workers in (1, 2, 5):
        plastic.run(made, out=tmp_path / f"{workers}", workers=workers)
    one, two, five = ((tmp_path / f"{n}" / RESULTS).read_bytes() for n in (1, 2, 5))
    assert one == two == five


def test_a_cell_has_the_same_bits_whatever_the_number_of_cells() -> None:
    few, many = (plastic.run(study(cells=n)) for n in (3, SEVERAL))
    xr.testing.assert_identical(few.drop_attrs(), many.isel(cell=slice(0, 3)).drop_attrs())


def test_an_arm_has_the_same_bits_whatever_the_arms_beside_it() -> None:
    alone, beside = plastic.run(study()), plastic.run(study(RULES, CONTROLS))
    both = beside.sel(rule=["pair_timing"], protocol=["pairs"])
    xr.testing.assert_identical(alone.drop_attrs(), both.drop_attrs())


@pytest.mark.parametrize("when", ["before", "after"])
def test_a_killed_run_resumes_to_the_same_bits(file: Path, finished: Path, when: str) -> None:
    killed = ended(file, when, "SIGKILL", "--workers", "1")
    assert killed.returncode == -9
    run = file.parent / "run"
    blocks = {p.name: p.stat().st_mtime_ns for p in (run / BLOCKS).glob("*.npz")}
    assert len(blocks) == (2 if when == "before" else 3)
    assert not (run / RESULTS).exists()
    assert main(["run", str(file), "--out", str(run), "--no-figures"]) == 0
    kept = {name: (run / BLOCKS / name).stat().st_mtime_ns for name in blocks}
    assert kept == blocks  # what was finished is not run again
    assert (run / RESULTS).read_bytes() == (finished / RESULTS).read_bytes()


def test_an_interrupted_run_leaves_with_130_keeps_its_blocks_and_resumes(
    file: Path, finished: Path
) -> None:
    stopped = ended(file, "after", "SIGINT", "--workers", "1")
    assert stopped.returncode == 130
    told = "plastic: stopped; finished blocks are kept, the same command resumes"
    assert stopped.stderr.splitlines() == [told]
    run = file.parent / "run"
    kept = list((run / BLOCKS).iterdir())
    assert len(kept) >= 3
    assert all(p.suffix == ".npz" for p in kept)
    assert not (run / RESULTS).exists()
    assert main(["run", str(file), "--out", str(run), "--no-figures"]) == 0
    assert (run / RESULTS).read_bytes() == (finished / RESULTS).read_bytes()


def test_a_run_that_is_finished_is_not_run_again(finished: Path, tmp_path: Path) -> None:
    folder = Path(shutil.copytree(finished, tmp_path / "run"))
    shutil.rmtree(folder / BLOCKS)
    seen: list[tuple[int, int]] = []
    again = plastic.run(study(CONTROLS), out=folder, progress=lambda *at: seen.append(at))
    assert seen == [(1, 1)]
    assert list((folder / BLOCKS).iterdir()) == []
    xr.testing.assert_identical(again, plastic.load(finished))


def test_progress_counts_every_block_once_and_says_what_was_there(
    finished: Path, tmp_path: Path
) -> None:
    folder = Path(shutil.copytree(finished, tmp_path / "run"))
    (folder / RESULTS).unlink()
    blocks = sorted((folder / BLOCKS).iterdir())
    for gone in blocks[:4]:
        gone.unlink()
    seen: list[tuple[int, int]] = []
    plastic.run(study(CONTROLS), out=folder, workers=1, progress=lambda *at: seen.append(at))
    total = len(blocks)
    assert (seen[0], seen[-1]) == ((total - 4, total), (total, total))
    assert [done for done, _ in seen] == sorted({done for done, _ in seen})


# ---- what the command line changes


def test_cells_and_seed_of_the_command_line_take_the_place_of_those_of_the_file(
    file: Path,
) -> None:
    done = command(file, "other", "--cells", "3", "--seed", "11")
    assert done.returncode == 0, done.stderr
    found = plastic.load(file.parent / "other")
    assert (found.sizes["cell"], found.attrs["seed"]) == (3, 11)
    drawn = populate(study(seed=11, cells=3))
    np.testing.assert_allclose(found["threshold"], drawn.threshold - 68.0)


def test_a_study_in_hand_is_changed_as_a_file_is(file: Path) -> None:
    by_hand = plastic.run(study(CONTROLS), cells=3, seed=11)
    xr.testing.assert_identical(by_hand, plastic.run(file, cells=3, seed=11))


@pytest.mark.parametrize("change", [{"cells": 0}, {"cells": -3}, {"seed": -1}])
def test_a_change_that_no_study_allows_is_refused(file: Path, change: dict[str, int]) -> None:
    for made in (study(), file):
        with pytest.raises(StudyError, match="must be a whole number from"):
            plastic.run(made, **change)


@pytest.mark.parametrize("road", [lambda file: file, lambda file: study(CONTROLS)])
def test_a_study_too_large_for_the_machine_is_refused_with_an_estimate_before_it_starts(
    file: Path, road: Callable[[Path], object], tmp_path: Path
) -> None:
    out = tmp_path / "run"
    with pytest.raises(StudyError, match=r"would give [\d,.]+ GB of results; .* at most") as caught:
        plastic.run(road(file), out=out, cells=10**9)
    assert (caught.value.key, caught.value.value) == ("cells", 10**9)
    assert not out.exists()


def test_the_estimate_is_at_least_the_file_and_not_far_above_it(finished: Path) -> None:
    size = (finished / RESULTS).stat().st_size
    assert 0.5 * size < largest_bytes(study(CONTROLS)) < 3 * size


def test_a_refusal_on_the_command_line_is_one_line_and_status_2(
    file: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    assert main(["run", str(file), "--cells", "1000000000"]) == 2
    said = capsys.readouterr().err
    assert len(said.splitlines()) == 1
    assert "GB of results" in said
