"""What a report says as plain values."""

from __future__ import annotations

import json
import math

import pytest

from plastic.checking.verdicts import Report, Verdict
from plastic.laws import Broken, Case, Row
from tests.checking.reports import report_of
from tests.laws.faulty import Sound


def reported(*verdicts: Verdict) -> Report:
    return Report("mine", "rule", verdicts, 10, 0, "abc", {"plastic": "1"})


@pytest.mark.parametrize(
    ("status", "ok"),
    [("holds", True), ("exempt", True), ("idle", True), ("fails", False), ("needless", False)],
)
def test_only_failures_and_needless_exemptions_are_to_mend(status: str, ok: bool) -> None:
    verdict = Verdict("silence", "Nothing moves.", status)  # type: ignore[arg-type]
    assert (verdict.ok, reported(verdict).ok) == (ok, ok)
    assert reported(verdict).failures == ([] if ok else [verdict])


def test_plain_values_survive_json() -> None:
    data = report_of("HardCodedMilliseconds").data()
    assert json.loads(json.dumps(data, allow_nan=False)) == data
    (failed,) = [law for law in data["laws"] if law["status"] == "fails"]
    assert failed["case"]["pre"] == [[0.125]]
    assert failed["case"]["numbers"] == {"times": 2}
    assert set(failed["disagree"][0]) == {"what", "as they are", "stretched"}


def test_what_is_no_number_is_a_word() -> None:
    broken = Broken("lost", (Row("w", math.inf, math.nan),))
    data = reported(Verdict("bounds", "", "fails", 1, "", Case(Sound()), broken)).data()
    assert data["laws"][0]["disagree"] == [{"what": "w", "expected": "inf", "found": "nan"}]


def test_the_case_that_a_law_made_is_what_is_told() -> None:
    broken = Broken("by its own", case=Case(Sound(), ((1.0,),), (2.0,), 3.0))
    data = reported(Verdict("claims", "", "fails", 1, "", Case(Sound()), broken)).data()
    assert (data["laws"][0]["case"]["post"], data["laws"][0]["case"]["end"]) == ([2.0], 3.0)
