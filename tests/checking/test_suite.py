"""One pytest test per law, in a user's own suite."""

from __future__ import annotations

import os
import re
import subprocess
import sys
from pathlib import Path

import pytest

from plastic.checking.check import laws_about
from plastic.checking.suite import law_tests
from tests.checking.test_shown import TEXT
from tests.house.sources import ROOT
from tests.laws.faulty import FAULTS, Sound

SUITE = """
from plastic.checking.suite import law_tests
from mine import Fixed

test_fixed = law_tests(Fixed, examples=20)
"""

test_a_sound_rule = law_tests(Sound, examples=10)


def test_the_ids_are_the_laws(tmp_path: Path) -> None:
    """A user's suite: a rule in one file, three lines in another."""
    (tmp_path / "mine.py").write_text(TEXT)
    (tmp_path / "test_mine.py").write_text(SUITE)
    done = subprocess.run(
        [sys.executable, "-m", "pytest", "-v", "-p", "no:cacheprovider", "-rA",
         "--deselect", "test_mine.py::test_fixed[compiled]", "test_mine.py"],
        cwd=tmp_path, capture_output=True, text=True, check=False,
        env={**os.environ, "PYTHONPATH": str(ROOT), "PYTHONDONTWRITEBYTECODE": "1"},
    )  # fmt: skip
    said = dict(re.findall(r"test_fixed\[(\w+)\] (PASSED|FAILED|SKIPPED)", done.stdout))
    assert set(said) == set(laws_about("rule")) - {"compiled"}
    assert [law for law, word in said.items() if word == "FAILED"] == ["time_units"]
    assert said["silence"] == "PASSED"
    assert said["counts_only"] == "SKIPPED"
    assert "time_units fails: with all times" in done.stdout
    assert "Traceback" not in done.stdout


def test_a_failing_law_fails_with_its_case_and_without_a_traceback() -> None:
    faulty = law_tests(FAULTS["DriftInSilence"][0], examples=5)
    with pytest.raises(
        pytest.fail.Exception, match=r"silence fails: .* of silence change"
    ) as caught:
        faulty("silence")
    assert not caught.value.pytrace


def test_an_idle_law_is_skipped_with_its_reason() -> None:
    with pytest.raises(pytest.skip.Exception, match="idle: reads spikes"):
        law_tests(Sound)("counts_only")


def test_a_name_is_enough() -> None:
    with pytest.raises(pytest.skip.Exception, match="exempt: a silent cell is below its goal"):
        law_tests("synaptic_scaling", examples=5)("silence")
