"""What README.md promises: its example prints what it says, its commands are what CI runs."""

from __future__ import annotations

import os
import re
import subprocess
import sys
from pathlib import Path

import pytest

from tests.house.sources import ROOT

README = (ROOT / "README.md").read_text(encoding="utf-8")
CI = ROOT / ".ci" / "run"


def blocks(language: str) -> list[str]:
    """Return the fenced blocks of a language, in order."""
    return re.findall(rf"^```{language}\n(.*?)^```$", README, re.MULTILINE | re.DOTALL)


def block_after(mark: str, language: str) -> str:
    """Return the fenced block that follows a mark."""
    _, found, rest = README.partition(f"<!-- {mark} -->\n```{language}\n")
    assert found, mark
    return rest.split("```\n")[0]


@pytest.fixture(scope="module")
def ran(tmp_path_factory: pytest.TempPathFactory) -> tuple[Path, str]:
    """Run the example as it stands, as a script in an empty folder."""
    folder = tmp_path_factory.mktemp("readme")
    (folder / "example.py").write_text(block_after("the example", "python"), encoding="utf-8")
    done = subprocess.run(
        [sys.executable, "-W", "error", "example.py"],
        cwd=folder, capture_output=True, text=True,
        env={**os.environ, "MPLBACKEND": "Agg", "PYTHONPATH": str(ROOT)},
    )  # fmt: skip
    assert done.returncode == 0, done.stderr
    assert done.stderr == ""
    return folder, done.stdout


def test_the_example_prints_what_the_readme_shows(ran: tuple[Path, str]) -> None:
    assert ran[1] == block_after("its output", "")
    assert len(ran[1].splitlines()) == 2


def test_the_example_draws_a_figure_of_the_size_that_the_readme_shows(
    ran: tuple[Path, str],
) -> None:
    """The first bytes of a PNG are its signature and, from 16 on, width and height."""
    drawn = (ran[0] / "rate.png").read_bytes()
    (shown,) = re.findall(r"!\[[^\]]{30,}\]\(([^)]+\.png)\)", README)
    assert drawn[:8] == b"\x89PNG\r\n\x1a\n"
    assert drawn[16:24] == (ROOT / shown).read_bytes()[16:24]


def test_the_numbers_in_the_text_are_those_of_the_output() -> None:
    """At 0.1 Hz one predicts 43 %, the other nothing."""
    said = re.search(r"at 0\.1 Hz one predicts (\d+) %, the other nothing", README)
    first = [
        float(row.split("[")[1].split()[0]) for row in block_after("its output", "").split("\n")[:2]
    ]
    assert said is not None
    assert first == [int(said[1]) / 100, 0.0]


def test_both_commands_are_single_lines_that_need_only_python() -> None:
    commands = blocks("")[:2]
    for command in commands:
        (line,) = command.splitlines()
        assert line.startswith("python3 -m venv .venv && ")
        assert line.count("&&") == 2
    assert "plastic run experiments/two_roads/study.toml" in commands[0]
    assert "-m pytest" in commands[1]


def test_every_file_that_the_readme_names_is_there() -> None:
    linked = re.findall(r"\]\(([^)#]+)\)", README)
    named = re.findall(r"`(experiments/[\w/.]*)`", README)
    assert len(linked) >= 2
    assert [name for name in linked + named if not (ROOT / name).exists()] == []
    assert (ROOT / "experiments" / "two_roads" / "study.toml").exists()


def test_every_command_and_option_that_the_readme_tables_is_one_that_there_is() -> None:
    from plastic.cli import COMMANDS, parser

    told = re.findall(r"^\| `plastic (\w+)([^`]*)`", README, re.MULTILINE)
    also = re.findall(r"`plastic (\w+) [A-Z]", README)
    assert {name for name, _ in told} | set(also) == set(COMMANDS)
    actions = next(a for a in parser()._actions if a.choices)
    for name, rest in told:
        known = actions.choices[name].format_help()  # type: ignore[index]
        for option in re.findall(r"--\w+", rest):
            assert option in known, (name, option)


@pytest.mark.skipif(not CI.exists(), reason="a source archive holds no CI")
def test_ci_finds_the_test_command_of_the_readme_by_its_own_way(tmp_path: Path) -> None:
    (finding,) = re.findall(r"^command=\$\(.*\)$", CI.read_text(), re.MULTILINE)

    def found(folder: Path) -> str:
        told = subprocess.run(
            ["bash", "-euc", f'{finding}; printf %s "$command"'],
            cwd=folder, capture_output=True, text=True, check=True,
        )  # fmt: skip
        return told.stdout

    assert found(ROOT) == blocks("")[1].strip()
    (tmp_path / "README.md").write_text(README.replace("<!-- the tests -->", ""))
    assert found(tmp_path) == ""  # control: without the mark nothing is found


@pytest.mark.skipif(not CI.exists(), reason="a source archive holds no CI")
def test_ci_is_a_bash_script_that_may_be_run() -> None:
    assert os.access(CI, os.X_OK)
    assert subprocess.run(["bash", "-n", str(CI)], check=False).returncode == 0
