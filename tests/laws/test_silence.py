"""The law of silence."""

from __future__ import annotations

import pytest

from plastic import rules
from plastic.checking.check import check_law
from plastic.laws import Case
from tests.laws.faulty import FAULTS, Sound
from tests.laws.trying import assert_caught, assert_kept, told


def test_a_rule_at_rest_keeps_it() -> None:
    assert_kept(Sound, "silence")


def test_a_drift_is_caught_without_a_spike() -> None:
    assert assert_caught(FAULTS["DriftInSilence"][0], "silence").instants == []


def test_the_drift_is_told_in_numbers() -> None:
    """By hand: 1e-6 of a time constant of 20 ms, over 2 s, is 1e-4."""
    (row,) = told("silence", Case(FAULTS["DriftInSilence"][0](), ((),), end=2000.0)).rows
    assert (row.one, row.other) == (1.0, pytest.approx(1.0001, rel=1e-12))


def test_a_rule_that_declares_its_drift_is_exempt_with_its_reason() -> None:
    scaling = rules.find("synaptic_scaling")
    verdict = check_law(scaling, "silence", examples=5)
    assert (verdict.status, verdict.reason) == ("exempt", scaling.in_silence)
