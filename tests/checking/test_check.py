"""`plastic.check`: all laws about a part, with exemptions that must be needed."""

from __future__ import annotations

import hashlib
import inspect
from pathlib import Path

import pytest

import plastic
from plastic.checking.check import about_of, exemptions, laws_about, name_of
from plastic.checking.loading import load
from plastic.errors import Misfit, UnknownName
from plastic.laws._cells import PassiveCell
from tests.checking.reports import LAWS, report_of
from tests.checking.test_loading import one, written
from tests.laws.faulty import FAULTS, Sound, variant


def test_a_sound_rule_is_told_law_by_law() -> None:
    report = report_of("Clean")
    assert report.ok
    assert [(v.law, v.status) for v in report.verdicts] == [
        ("silence", "holds"), ("time_units", "holds"), ("half_period", "holds"), ("claims", "idle"),
    ]  # fmt: skip
    assert (report["silence"].examples, report["half_period"].examples) == (40, 4)


def test_a_faulty_rule_is_told_with_its_case() -> None:
    verdict = report_of("HardCodedMilliseconds")["time_units"]
    assert (verdict.status, verdict.ok) == ("fails", False)
    assert verdict.case is not None
    assert verdict.case.spikes == 2
    assert not report_of("HardCodedMilliseconds").ok


def test_an_exempt_law_that_fails_is_exempt_with_its_reason() -> None:
    verdict = report_of("Exempt")["time_units"]
    assert (verdict.status, verdict.reason) == ("exempt", "the table it was fitted to is in ms")
    assert report_of("Exempt").ok


@pytest.mark.parametrize(
    ("rule", "law"), [("Needless", "time_units"), ("Elsewhere", "counts_only")]
)
def test_an_exempt_law_that_holds_fails(rule: str, law: str) -> None:
    report = report_of(rule)
    assert report[law].status == "needless"
    assert [v.law for v in report.failures] == [law]


@pytest.mark.parametrize("body", [{"exempt": {"silenc": "no"}}, {"promises": ("silenc",)}])
def test_an_exemption_or_a_promise_of_no_law_is_refused(body: dict[str, object]) -> None:
    with pytest.raises(UnknownName, match="did you mean 'silence'"):
        plastic.check(variant("Misspelt", **body), only=[])


def test_moving_in_silence_is_an_exemption() -> None:
    assert list(exemptions(plastic.rules.find("synaptic_scaling"))) == ["silence"]


@pytest.mark.parametrize("part", [Sound, Sound(up=0.5)], ids=["class", "instance"])
def test_a_class_and_its_instance_are_one_part(part: object) -> None:
    report = plastic.check(part, examples=5, only=["silence"])
    assert report.name == "tests.laws.faulty.Sound"


def test_what_is_no_part_is_refused() -> None:
    with pytest.raises(Misfit, match="got int but expected a rule or a route"):
        plastic.check(3)


def test_an_unknown_law_is_refused() -> None:
    with pytest.raises(UnknownName, match="did you mean 'silence'"):
        plastic.check(Sound, only=["silenc"])


def test_laws_on_examples_come_first_and_each_is_there_once() -> None:
    found = [name for kind in ("rule", "route", "cell") for name in laws_about(kind)]
    assert sorted(found) == plastic.laws.names()
    drawn = [plastic.laws.find(name).drawn for name in laws_about("rule")]
    assert drawn == sorted(drawn, reverse=True)
    assert set(LAWS) < set(laws_about("rule"))


def test_names_are_those_of_catalogues_files_and_modules(tmp_path: Path) -> None:
    path = written(tmp_path, one())
    assert name_of(plastic.rules.find("pair_timing")) == "pair_timing"
    assert name_of(load(path)) == f"{path}:Mine"
    assert (name_of(PassiveCell), about_of(PassiveCell)) == ("cells", "cell")


def test_a_report_names_seed_versions_and_the_text_that_was_checked() -> None:
    rule = plastic.rules.find("pair_timing")
    report = plastic.check(rule, examples=1, seed=8, only=["silence"])
    text = hashlib.sha256(inspect.getsource(rule).encode()).hexdigest()
    assert text.startswith(report.source)
    assert len(report.source) == 16
    assert report.seed == 8
    assert report.versions["plastic"] == plastic.__version__
    assert list(report.versions) == ["plastic", "python", "hypothesis", "numpy", "numba"]


def test_the_same_seed_gives_the_same_report() -> None:
    again = plastic.check(FAULTS["TimeOfDay"][0], examples=40, seed=3, only=LAWS)
    assert again == report_of("TimeOfDay")
