"""The starter study."""

from __future__ import annotations

from plastic.study.file import parse_study
from plastic.study.starter import STARTER


def test_the_starter_is_a_small_good_study() -> None:
    study = parse_study(STARTER)
    assert study.cells == 20
    assert len(study.compare.rules) == 2
    assert len(study.compare.routes) == 3
    assert list(study.schedules()) == ["bursts", "bursts, unpaired", "bursts, test pulses only"]


def test_the_starter_says_that_it_is_invented_and_fits_a_screen() -> None:
    assert "invented" in STARTER.splitlines()[0]
    assert max(map(len, STARTER.splitlines())) <= 100
