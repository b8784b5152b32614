"""The guide "Write your own rule", followed word for word."""

from __future__ import annotations

import os
import subprocess
import sys
from pathlib import Path

import pytest

from tests.house.sources import ROOT

GUIDE = (ROOT / "DEVELOPERS.md").read_text(encoding="utf-8")


def block(mark: str) -> str:
    """Return the fenced block that follows a mark of the guide."""
    _, found, rest = GUIDE.partition(f"<!-- guide: {mark} -->\n```")
    assert found, mark
    return rest.split("\n", 1)[1].split("```\n")[0]


def run(folder: Path, *words: str) -> subprocess.CompletedProcess[str]:
    return subprocess.run(
        [sys.executable, *words], cwd=folder, capture_output=True, text=True, check=False,
        env={**os.environ, "PYTHONPATH": str(ROOT), "PYTHONDONTWRITEBYTECODE": "1"},
    )  # fmt: skip


def command(folder: Path, mark: str) -> subprocess.CompletedProcess[str]:
    """Run the one command that stands at a mark."""
    (line,) = block(mark).splitlines()
    name, *words = line.split()
    assert name == "plastic"
    return run(folder, "-m", "plastic", *words)


def mended(text: str) -> str:
    """Return the first draft with what the guide says to replace and to add."""
    lines = text.rstrip("\n").split("\n")
    lines[-1] = block("the exact flow").rstrip("\n")
    at = next(k for k, line in enumerate(lines) if line.strip().startswith("amplitudes"))
    lines[at] += "\n" + block("the claims").rstrip("\n")
    return (
        "import math\n\n" + "\n".join(lines).replace("import Rule,", "import Claim, Rule,") + "\n"
    )


@pytest.fixture(scope="module")
def folder(tmp_path_factory: pytest.TempPathFactory) -> Path:
    """A new user's folder, with the rule as it is in the end."""
    made = tmp_path_factory.mktemp("guide")
    (made / "mine.py").write_text(mended(block("mine.py")))
    return made


@pytest.mark.slow
def test_the_first_check_finds_what_the_guide_says_and_nothing_else(tmp_path: Path) -> None:
    (tmp_path / "mine.py").write_text(block("mine.py"))
    done = command(tmp_path, "first check")
    assert done.returncode == 1, done.stderr
    assert block("what it finds") in done.stdout
    assert "TiredPairs: 15 laws hold, 1 to mend" in done.stdout
    assert [p.name for p in tmp_path.iterdir()] == ["mine.py"]


@pytest.mark.slow
def test_the_mended_rule_keeps_every_law_and_gets_its_certificate(folder: Path) -> None:
    done = command(folder, "second check")
    assert done.returncode == 0, done.stdout
    assert "TiredPairs" in (folder / "mine.html").read_text()


def test_the_comparison_prints_what_the_guide_shows(folder: Path) -> None:
    (folder / "compare.py").write_text(block("compare.py"))
    done = run(folder, "-W", "error", "compare.py")
    assert (done.stdout, done.stderr) == (block("the comparison"), "")


def test_the_suite_has_one_test_per_law(folder: Path) -> None:
    (folder / "test_mine.py").write_text(block("test_mine.py"))
    done = run(folder, "-m", "pytest", "-p", "no:cacheprovider", "--collect-only", "-q")
    assert "test_mine.py::test_tired_pairs[quiet_gaps]" in done.stdout
    assert "test_mine.py::test_tired_pairs[claims]" in done.stdout


def test_the_claims_of_the_guide_are_what_makes_it_pass(folder: Path) -> None:
    """The control: with a claim that is wrong the same file leaves with 1."""
    wrong = (folder / "mine.py").read_text().replace("0.3, 0.4", "0.5, 0.6")
    (folder / "wrong.py").write_text(wrong)
    done = run(
        folder, "-c",
        "import sys, plastic; sys.exit(not plastic.check('wrong.py', only=['claims']).ok)",
    )  # fmt: skip
    assert done.returncode == 1, done.stderr
