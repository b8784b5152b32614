"""The version: one number, said once."""

from __future__ import annotations

import re

import pytest

import plastic
from plastic.cli import main
from plastic.version import VERSION
from tests.house.sources import ROOT


def test_the_version_is_a_release_number_said_in_one_place() -> None:
    """Release segments of PEP 440 (published standard)."""
    assert re.fullmatch(r"\d+(\.\d+)*((a|b|rc)\d+)?", VERSION)
    assert plastic.__version__ == VERSION
    text = (ROOT / "pyproject.toml").read_text()
    assert 'dynamic = ["version"]' in text
    assert VERSION not in text


def test_the_command_line_says_it(capsys: pytest.CaptureFixture[str]) -> None:
    assert main(["--version"]) == 0
    assert capsys.readouterr().out == f"plastic {VERSION}\n"
