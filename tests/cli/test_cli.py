"""The command line as a whole: help, exit statuses, and what it says when things go wrong."""

import os
import re
import subprocess
import sys

import pytest

import plastic
from plastic.cli import COMMANDS, main, show
from plastic.errors import StoreError


def python(*words, **options):
    return subprocess.run(
        [sys.executable, *words], capture_output=True, text=True, timeout=60, check=False, **options
    )


def raising(error):
    def run(args):
        raise error

    return run


def test_help_imports_nothing_heavy():
    ran = python("-X", "importtime", "-m", "plastic", "--help")
    assert ran.returncode == 0
    imported = {line.split("|")[-1].strip().split(".")[0] for line in ran.stderr.splitlines()}
    assert "argparse" in imported  # the control: the list is read as it should be
    heavy = {"numpy", "numba", "xarray", "matplotlib", "pydantic", "pint", "scipy", "rich"}
    assert imported & heavy == set()


def test_help_names_every_command(capsys):
    assert main(["--help"]) == 0
    text = capsys.readouterr().out
    for name in COMMANDS:
        assert re.search(rf"^ +{name} ", text, re.MULTILINE)


@pytest.mark.parametrize("name", COMMANDS)
def test_every_command_has_help_of_its_own(name, capsys):
    assert main([name, "--help"]) == 0
    assert f"usage: plastic {name}" in capsys.readouterr().out


def test_the_version_is_the_package_s(capsys):
    assert main(["--version"]) == 0
    assert capsys.readouterr().out == f"plastic {plastic.__version__}\n"


@pytest.mark.parametrize(
    "words", [[], ["runn"], ["run"], ["list", "rooms"], ["run", "s.toml", "--cells", "0"],
              ["run", "s.toml", "--workers", "two"], ["run", "s.toml", "--seed", "-1"]]
)  # fmt: skip
def test_misuse_leaves_with_2_and_says_how_to_use_it(words, capsys):
    assert main(words) == 2
    said = capsys.readouterr()
    assert "usage: plastic" in said.err
    assert said.out == ""


@pytest.mark.parametrize(
    ("words", "said"),
    [
        (
            ["list", "rule"],
            "'rule'; did you mean 'rules'? (rules, routes, protocols, measures, laws)",
        ),
        (["runn"], "'runn'; did you mean 'run'? (run, cell, "),
        (["foo"], "'foo' (run, cell, "),
    ],
)
def test_a_word_that_is_not_known_is_answered_with_the_nearest(words, said, capsys):
    assert main(words) == 2
    assert f"unknown: {said}" in capsys.readouterr().err


def test_an_error_of_ours_is_one_line_and_2(monkeypatch, capsys):
    monkeypatch.setattr(show, "run", raising(StoreError("made by\nanother study")))
    assert main(["show", "x"]) == 2
    assert capsys.readouterr().err == "plastic: made by another study\n"


def test_ctrl_c_in_a_run_says_that_it_can_go_on(monkeypatch, capsys):
    monkeypatch.setattr(COMMANDS["run"][0], "run", raising(KeyboardInterrupt()))
    assert main(["run", "s.toml"]) == 130
    assert capsys.readouterr().err == (
        "plastic: stopped; finished blocks are kept, the same command resumes\n"
    )


def test_ctrl_c_elsewhere_just_stops(monkeypatch, capsys):
    monkeypatch.setattr(show, "run", raising(KeyboardInterrupt()))
    assert main(["show", "x"]) == 130
    assert capsys.readouterr().err == "plastic: stopped\n"


def test_a_file_that_cannot_be_written_is_named(monkeypatch, capsys):
    error = PermissionError(13, "Permission denied", "results.nc")
    monkeypatch.setattr(show, "run", raising(error))
    assert main(["show", "x"]) == 2
    assert capsys.readouterr().err == "plastic: results.nc: Permission denied\n"


def test_anything_else_is_one_line_that_asks_for_a_report(monkeypatch, capsys):
    monkeypatch.delenv("PLASTIC_TRACEBACK", raising=False)
    monkeypatch.setattr(show, "run", raising(ZeroDivisionError("by zero")))
    assert main(["show", "x"]) == 1
    said = capsys.readouterr().err
    assert len(said.splitlines()) == 1
    assert "ZeroDivisionError: by zero" in said
    assert "please report" in said
    assert "Traceback" not in said


def test_the_traceback_is_there_for_who_asks(monkeypatch, capsys):
    monkeypatch.setenv("PLASTIC_TRACEBACK", "1")
    monkeypatch.setattr(show, "run", raising(ZeroDivisionError("by zero")))
    assert main(["show", "x"]) == 1
    assert "Traceback" in capsys.readouterr().err


@pytest.mark.skipif(os.name != "posix", reason="a closed pipe is a signal of POSIX systems")
def test_a_reader_that_leaves_is_no_error():
    with subprocess.Popen(
        [sys.executable, "-m", "plastic", "list"], stdout=subprocess.PIPE, stderr=subprocess.PIPE
    ) as started:
        started.stdout.close()
        told = started.stderr.read()
        assert started.wait(timeout=60) == 141
    assert told == b""


def test_a_terminal_without_our_signs_shows_another_and_goes_on():
    told = python(
        "-m", "plastic", "show", "sliding_threshold",
        env={**os.environ, "PYTHONIOENCODING": "ascii"},
    )  # fmt: skip
    assert told.returncode == 0
    assert "BCM rule" in told.stdout
