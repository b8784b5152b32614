"""Laws tried on invented parts: what must be caught, with few spikes, and what must be kept."""

from __future__ import annotations

from typing import Any

from plastic import laws
from plastic.checking.check import check_law
from plastic.laws import Broken, Case

#: spikes that a smallest failing case may have
FEW = 6


def assert_caught(part: type[Any], law: str, *, examples: int = 100) -> Case:
    """Return the smallest case of a part that must break a law."""
    verdict = check_law(part, law, examples=examples)
    assert verdict.status == "fails", (part.__name__, law, verdict.reason)
    assert verdict.case is not None
    assert verdict.case.spikes <= FEW
    return verdict.case


def assert_kept(part: type[Any], law: str, *, examples: int = 60) -> None:
    """Assert that a part keeps a law that has something to say about it."""
    verdict = check_law(part, law, examples=examples)
    assert (verdict.status, verdict.broken) == ("holds", None)
    assert verdict.examples > 0


def told(law: str, case: Case) -> Broken:
    """Return what a law says of one case that breaks it."""
    broken = laws.find(law)().broken(case)
    assert broken is not None
    return broken


def holds(law: str, case: Case) -> bool:
    """Return whether one case keeps a law."""
    return laws.find(law)().broken(case) is None
