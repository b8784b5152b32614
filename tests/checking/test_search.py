"""The search for the smallest case that breaks a law."""

from __future__ import annotations

import os
from pathlib import Path
from typing import Any, ClassVar

import pytest

from plastic import laws, rules
from plastic.checking import search as searching
from plastic.checking.search import search
from plastic.errors import RuleError
from plastic.laws import Broken, Case, Law, Needs
from plastic.laws.time_units import TimeUnits
from tests.laws.faulty import FAULTS, Sound, variant


class FewSpikes(Law):
    """Broken by four spikes of the cell."""

    needs: ClassVar[Needs] = Needs(numbers={"size": (3, 99)})

    def broken(self, case: Case) -> Broken | None:
        return Broken("four spikes") if len(case.post) >= 4 else None


class Throwing(Law):
    """Broken now and then, whatever the case."""

    calls = 0

    def broken(self, case: Case) -> Broken | None:
        Throwing.calls += 1
        return Broken("chance") if Throwing.calls in (5, 6, 8) else None


def test_the_smallest_case_is_found() -> None:
    """Four spikes of the cell, an eighth of a millisecond apart, and nothing else."""
    found = search(FewSpikes(), Sound, examples=300, seed=0)
    assert found.case == Case(Sound(), ((),), (0.125, 0.25, 0.375, 0.5), 0.625, {"size": 3})
    assert found.broken == Broken("four spikes")


def test_the_same_seed_tries_the_same_examples() -> None:
    seen: list[list[Case]] = []

    class Looking(FewSpikes):
        """Keeps what it saw."""

        def broken(self, case: Case) -> Broken | None:
            seen[-1].append(case)
            return None

    for seed in (1, 1, 2):
        seen.append([])
        assert search(Looking(), Sound, examples=20, seed=seed).examples == len(seen[-1])
    assert seen[0] == seen[1]
    assert seen[0] != seen[2]
    assert len(seen[0]) == 20


def test_a_law_whose_examples_take_long_tries_its_share() -> None:
    class Slow(FewSpikes):
        """Never broken."""

        share: ClassVar[float] = 0.1

        def broken(self, case: Case) -> Broken | None:
            return None

    assert search(Slow(), Sound, examples=200, seed=0).examples == 20


def test_a_law_that_holds_leaves_no_case() -> None:
    found = search(TimeUnits(), Sound, examples=10, seed=0)
    assert (found.case, found.broken, found.examples) == (None, None, 10)


def test_an_outcome_that_changes_by_itself_is_said() -> None:
    Throwing.calls = 0
    found = search(Throwing(), Sound, examples=50, seed=0)
    assert found.broken is not None
    assert found.broken.says == f"chance ({searching.REMEMBERS})"


def test_a_rule_that_changes_itself_does_not_change_what_is_shown() -> None:
    rule, law = FAULTS["ChangedInPlace"]
    found = search(laws.find(law)(), rule, examples=50, seed=0)
    assert found.case is not None
    assert found.case.part.up in (0.01, 0.02, 0.04)


def endless(self: Any, r: float) -> dict[str, float]:
    while True:
        r += 1


def test_an_endless_hook_is_refused_with_its_input_and_the_limit(
    monkeypatch: pytest.MonkeyPatch,
) -> None:
    monkeypatch.setattr(searching, "LONGEST", 0.1)
    rule = variant("Endless", at_post=endless)
    with pytest.raises(
        RuleError,
        match=r"Endless: a hook does not come to an end: no end within "
        r"0\.1 s \(law TimeUnits, Endless\(.*cell \(.*ms\)",
    ):
        search(TimeUnits(), rule, examples=50, seed=0)


def test_nothing_is_written_where_it_runs(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.chdir(tmp_path)
    search(FewSpikes(), rules.find("pair_timing"), examples=50, seed=0)
    assert os.listdir(tmp_path) == []
