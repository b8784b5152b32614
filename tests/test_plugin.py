"""A rule is one new file: put beside the others, it is everywhere, with no other edit."""

from __future__ import annotations

import os
import shutil
import subprocess
import sys
from pathlib import Path

import numpy as np
import pytest
import xarray as xr

from tests.house.sources import PACKAGE
from tests.study.small import text

RULE = '''
"""A rule for the demonstration: the weight doubles with every presynaptic event."""

from __future__ import annotations

from plastic.parameters import parameter
from plastic.rules._interface import Changes, Rule, weight


class DoublingDemo(Rule):
    """Doubling: whatever the cell does, w becomes 2 w with each event, up to its bound."""

    gain: float = parameter(1.0, "1", low=0, high=5, source="invented for a test")
    w_max: float = parameter(8.0, "1", low=1, high=1e6, source="invented for a test")

    equation = "dw = gain w"

    w = weight(1.0, low=0.0, high="w_max")

    def at_pre(self, w: float) -> Changes:
        """Double."""
        return {"w": self.gain * w}
'''


@pytest.fixture(scope="module")
def house(tmp_path_factory: pytest.TempPathFactory) -> Path:
    """A copy of the package with one file more."""
    folder = tmp_path_factory.mktemp("house")
    shutil.copytree(PACKAGE, folder / "plastic", ignore=shutil.ignore_patterns("__pycache__"))
    (folder / "plastic" / "rules" / "doubling_demo.py").write_text(RULE)
    return Path(folder)


def plastic_there(house: Path, *words: str) -> str:
    """Run the command line of the copy and return what it prints."""
    done = subprocess.run(
        [sys.executable, "-m", "plastic", *words], cwd=house, capture_output=True, text=True,
        env={**os.environ, "PYTHONPATH": str(house)},
    )  # fmt: skip
    assert done.returncode == 0, done.stderr
    return done.stdout


def test_the_copy_is_what_runs(house: Path) -> None:
    code = "import plastic; print(plastic.__file__)"
    told = subprocess.run(
        [sys.executable, "-c", code], cwd=house, capture_output=True, text=True, check=True,
        env={**os.environ, "PYTHONPATH": str(house)},
    )  # fmt: skip
    assert Path(told.stdout.strip()) == house / "plastic" / "__init__.py"


def test_a_new_rule_is_listed_with_what_it_says_of_itself(house: Path) -> None:
    listed = plastic_there(house, "list", "rules")
    (line,) = [row for row in listed.splitlines() if "doubling_demo" in row]
    assert "Doubling" in line


def test_a_new_rule_is_shown_with_its_equation_and_parameters(house: Path) -> None:
    shown = plastic_there(house, "show", "doubling_demo")
    for told in ("dw = gain w", "w_max", "invented for a test"):
        assert told in shown


def test_a_new_rule_runs_on_spike_times(house: Path) -> None:
    """By hand: two presynaptic events double twice."""
    (house / "pre.txt").write_text("10\n30\n")
    (house / "post.txt").write_text("20\n")
    words = ("impose", "doubling_demo", "--pre", "pre.txt", "--post", "post.txt")
    assert "final change: +300 % of the baseline" in plastic_there(house, *words)


def test_a_new_rule_runs_in_a_study_and_does_what_it_says(house: Path) -> None:
    """By hand: test pulses at 10, 30, 50, ... s each double the weight, to its bound of 64."""
    (house / "bundles.toml").write_text(
        text(
            ('"pair_timing"', '{ use = "doubling_demo", w_max = 64 }'),
            ("[compare]", '[compare]\nat_ceiling = "hidden"'),
        )
    )
    plastic_there(house, "run", "bundles.toml", "--out", "run", "--no-figures")
    with xr.open_dataset(house / "run" / "results.nc") as found:
        arm = found.sel(rule="doubling_demo", route="quantal_size", protocol="pairs")
        factor, minutes = arm["factor"].sel(input="upper").values, arm["time"].values
    seconds = 60 * (minutes[minutes <= 0] + 2)
    pulses = np.searchsorted(np.arange(10, 120, 20), seconds)
    assert pulses.tolist() == [0, 1, 3, 4, 6]
    np.testing.assert_array_equal(factor[:, :5], np.tile(2.0**pulses, (4, 1)))
    assert np.all(factor[:, 5:] == 64)
