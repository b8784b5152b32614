"""`plastic check`: laws on the catalogue and on files, with an exit status for each outcome."""

from __future__ import annotations

import json
from pathlib import Path

import pytest

import plastic
from plastic.checking import loading
from plastic.cli import main
from tests.checking.test_loading import one, written
from tests.checking.test_shown import TEXT

QUICK = ["--examples", "4"]


def test_a_route_that_keeps_all_laws_leaves_with_0(capsys: pytest.CaptureFixture[str]) -> None:
    assert main(["check", "quantal_size", *QUICK]) == 0
    said = capsys.readouterr()
    assert said.out.startswith("quantal_size: 5 laws hold, 0 to mend (seed 0)\n")
    assert said.err == ""


def test_a_rule_that_breaks_one_leaves_with_1_and_its_case(
    tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    path = written(tmp_path, TEXT)
    assert main(["check", f"{path}:Fixed", "--examples", "20"]) == 1
    said = capsys.readouterr()
    assert "time_units fails: with all times" in said.out
    assert "to see it again:" in said.out
    assert said.err == f"plastic: {path}:Fixed is run as Python\n"
    assert [p.name for p in tmp_path.iterdir()] == ["mine.py"]


@pytest.mark.parametrize(
    ("words", "said"),
    [
        ([], "got no part but expected NAME"),
        (["--all", "pair_timing"], "got names and --all"),
        (["pair_timin"], "did you mean 'pair_timing'?"),
        (["none.py"], "none.py: no such file"),
    ],
)
def test_misuse_leaves_with_2(
    words: list[str], said: str, capsys: pytest.CaptureFixture[str]
) -> None:
    assert main(["check", *words]) == 2
    assert said in capsys.readouterr().err


@pytest.mark.parametrize("words", [["--examples", "0"], ["--seed", "-1"], ["--examples", "few"]])
def test_numbers_that_are_none_leave_with_2(words: list[str]) -> None:
    assert main(["check", "quantal_size", *words]) == 2


def test_a_file_that_does_not_import_is_one_line(
    tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    assert main(["check", written(tmp_path, one(argument="rr"))]) == 2
    lines = capsys.readouterr().err.splitlines()
    assert len(lines) == 2
    assert "line 5: Mine.at_post: nothing is called 'rr' there" in lines[1]


def test_json_is_everything(capsys: pytest.CaptureFixture[str]) -> None:
    assert main(["check", "quantal_size", "spine_neck", "--json", "--seed", "5", *QUICK]) == 0
    found = json.loads(capsys.readouterr().out)
    wanted = [plastic.check(n, examples=4, seed=5).data() for n in ("quantal_size", "spine_neck")]
    assert found == wanted


@pytest.mark.parametrize(("name", "start"), [("c.html", "<!DOCTYPE html>"), ("c.txt", "Certif")])
def test_a_certificate_is_written(tmp_path: Path, name: str, start: str) -> None:
    assert main(["check", "quantal_size", *QUICK, "--certificate", str(tmp_path / name)]) == 0
    assert (tmp_path / name).read_text().startswith(start)


def test_a_certificate_is_never_written_over_a_file(
    tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    (tmp_path / "c.txt").write_text("mine")
    assert main(["check", "quantal_size", "--certificate", str(tmp_path / "c.txt")]) == 2
    said = capsys.readouterr()
    assert "give --certificate another name" in said.err
    assert said.out == ""  # before the work
    assert (tmp_path / "c.txt").read_text() == "mine"


def test_all_is_every_name(
    monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> None:
    assert set(loading.names()) == {*plastic.rules.names(), *plastic.routes.names(), "cells"}
    monkeypatch.setattr(loading, "names", lambda: ["quantal_size", "spine_neck"])
    assert main(["check", "--all", *QUICK]) == 0
    assert [line for line in capsys.readouterr().out.splitlines() if "laws hold" in line] == [
        "quantal_size: 5 laws hold, 0 to mend (seed 0)",
        "spine_neck: 5 laws hold, 0 to mend (seed 0)",
    ]
