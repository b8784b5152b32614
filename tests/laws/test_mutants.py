"""Faults made mechanically: what is made, and that the laws catch it."""

from __future__ import annotations

import pytest

from plastic import rules
from tests.laws.mutants import catcher, mutants

PAIR = {mutant.fault: mutant for mutant in mutants(rules.find("pair_timing"))}


def test_hooks_and_declarations_are_changed_one_thing_at_a_time() -> None:
    assert len(PAIR) > 60
    assert {
        "at_pre: -self.a_minus -> self.a_minus",
        "at_post: self.a_plus * share * r1 -> self.a_plus * share",
        "at_post: self.a_plus -> self.a_minus",
        "at_pre: 1.0 -> 2.0",
        "r1: tau='tau_plus' -> 'tau_minus'",
        "r1: jump=set",
        "o1: follows pre",
        "w: low=0.0 -> -1.0",
    } <= set(PAIR)


def test_every_mutant_differs_from_the_rule() -> None:
    assert all(mutant.rule is not rules.find("pair_timing") for mutant in PAIR.values())


@pytest.mark.parametrize(
    ("fault", "law"),
    [
        ("at_pre: -self.a_minus -> self.a_minus", "claims"),
        ("r1: jump=set", "claims"),
        ("w: low=0.0 -> -1.0", "claims"),
        ("w: high='w_max' -> 1e+300", "claims"),
        ("at_post: w / self.w_max -> w", "claims"),
    ],
)
def test_a_mutant_is_caught(fault: str, law: str) -> None:
    mutant = PAIR[fault]
    assert mutant.rule is not None
    assert catcher(mutant.rule, 10)[0] == law


def test_without_claims_signs_survive_and_hidden_units_do_not(
    monkeypatch: pytest.MonkeyPatch,
) -> None:
    """The control: a law of form cannot know which way a rule should go; a claim does."""
    sign = PAIR["at_pre: -self.a_minus -> self.a_minus"].rule
    unit = PAIR["r1: tau='tau_plus' -> 20.0"].rule
    assert sign is not None
    assert unit is not None
    for rule in (sign, unit):
        monkeypatch.setattr(rule, "claims", ())
    assert catcher(sign, 5)[0] == ""
    assert catcher(unit, 20)[0] == "time_units"
