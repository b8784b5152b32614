"""A failing case as text, and lines of Python that repeat it."""

from __future__ import annotations

import contextlib
import io
from pathlib import Path

import pytest

import plastic
from plastic.checking.loading import load
from plastic.checking.shown import SHOWN, aligned, repeat_lines, report_lines, verdict_lines
from plastic.checking.verdicts import Verdict
from plastic.laws import Broken, Case
from plastic.laws._cells import PassiveCell
from plastic.rules._interface import Rule, weight
from tests.checking.reports import report_of
from tests.checking.test_loading import written
from tests.laws.faulty import FAULTS, Sound
from tests.laws.faulty_cells import ONE, PLACES

TEXT = '''
from plastic import Rule, parameter, trace, weight


class Fixed(Rule):
    """A trace with a time constant of its own."""

    gain: float = parameter(0.01, "1", low=0, high=1, source="invented")
    w = weight(1.0, low=0.0, high=2.0)
    r = trace("pre", tau=20.0)

    def at_post(self, r: float) -> dict[str, float]:
        """Potentiate."""
        return {"w": self.gain * r}
'''


def printed(lines: list[str]) -> str:
    """Run lines of Python and return what they print."""
    out = io.StringIO()
    with contextlib.redirect_stdout(out):
        exec("\n".join(lines), {})
    return out.getvalue()


def test_a_failing_case_is_a_table_of_spike_times_and_of_numbers() -> None:
    verdict = report_of("HardCodedMilliseconds")["time_units"]
    lines = verdict_lines(verdict)
    assert lines[0] == "time_units fails: with all times 2 times as long the weights differ"
    table = lines.index("  time (ms)  input 0  cell")
    assert [line.split() for line in lines[table + 1 : table + 3]] == [
        ["0.125", "|"],
        ["0.25", "|"],
    ]
    assert lines[table + 1].index("|") < lines[table + 2].index("|")
    assert "  times = 2" in lines
    head = next(line for line in lines if "numbers that disagree" in line)
    assert head.endswith("difference")
    assert head.index("as they are") < head.index("stretched")


@pytest.mark.parametrize("fault", ["HardCodedMilliseconds", "DriftInSilence"])
def test_the_lines_repeat_the_case(fault: str) -> None:
    (verdict,) = report_of(fault).failures
    case = verdict.case
    assert case is not None
    sound_home = [
        line.replace(f"import {fault}", "import FAULTS").replace(
            f"rule = {fault}(", f"rule = FAULTS['{fault}'][0]("
        )
        for line in repeat_lines(verdict.law, case)
    ]
    assert printed(sound_home).strip() == repr(verdict.broken)


def test_the_lines_of_a_file_and_of_the_catalogue_repeat_the_case(tmp_path: Path) -> None:
    part = load(written(tmp_path, TEXT))
    case = Case(part(gain=0.5), ((0.0,),), (20.0,), 25.0, {"times": 3})
    assert printed(repeat_lines("time_units", case)).startswith("Broken(says='with all times 3")
    lines = repeat_lines("silence", Case(plastic.rules.find("pair_timing")(mu=0.5)))
    assert 'rule = plastic.rules.find("pair_timing")(mu=0.5)' in lines
    assert printed(lines) == "None\n"


def test_the_lines_of_a_cell_repeat_the_case() -> None:
    case = Case(PassiveCell(ONE, PLACES), numbers={"tenths": 5, "node": 1})
    assert printed(repeat_lines("energy", case)) == "None\n"


def test_a_rule_that_nobody_can_import_is_named() -> None:
    class Local(Rule):
        """Lives in a function."""

        w = weight(1.0, low=0.0, high=2.0)

        def at_pre(self) -> dict[str, float]:
            """Nothing."""
            return {"w": 0.0}

    (line,) = [s for s in repeat_lines("silence", Case(Local())) if s.startswith("rule")]
    assert line.startswith("rule = ...  # tests.checking.test_shown.")


def test_a_long_case_is_shortened_in_the_middle() -> None:
    train = tuple(float(k) for k in range(100))
    verdict = Verdict("claims", "W.", "fails", 1, "", Case(Sound(), (train,)), Broken("long"))
    lines = verdict_lines(verdict)
    assert sum("|" in line for line in lines) == SHOWN
    assert any(line.strip() == f"... {100 - SHOWN} more" for line in lines)


def test_what_was_said_before_is_not_said_again() -> None:
    verdict = Verdict("sign", "W.", "fails", 1, "", Case(Sound()), Broken("it raises"))
    assert verdict_lines(verdict, {"it raises": "bounds"}) == ["sign fails as bounds does"]


def test_a_needless_exemption_is_told_with_its_reason() -> None:
    lines = report_lines(report_of("Needless"))
    assert "time_units: the exemption is not needed (no reason at all)" in lines


def test_a_report_has_one_line_per_law_and_a_head() -> None:
    lines = report_lines(report_of("Clean"))
    assert lines[0] == "tests.laws.faulty.Clean: 3 laws hold, 0 to mend (seed 3)"
    assert [line.split()[0] for line in lines[2:]] == [v.law for v in report_of("Clean").verdicts]


def test_columns_are_aligned() -> None:
    assert aligned(["a", "b"], [["long", "x"], ["", "y"]]) == ["a     b", "long  x", "      y"]


def test_faults_of_this_house_can_be_imported() -> None:
    """The premise of the repeated cases above."""
    assert FAULTS["DriftInSilence"][0].__module__ == "tests.laws.faulty"
