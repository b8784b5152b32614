"""Study files: what is read, and what is refused with which words."""

from __future__ import annotations

import re
from pathlib import Path

import pytest

from plastic.errors import PlasticError, StudyError
from plastic.study.file import LARGEST, load_study, parse_study
from plastic.study.model import Study
from plastic.study.starter import STARTER
from tests.study.bad_parts import PARTS
from tests.study.bad_ranges import RANGES
from tests.study.bad_values import VALUES
from tests.study.edits import edited, refused

CASES = {**VALUES, **PARTS, **RANGES}


@pytest.mark.parametrize("case", CASES)
def test_bad_input_is_named_with_key_value_and_what_is_allowed(case: str) -> None:
    old, new, parts = CASES[case]
    error = refused(edited((old, new)))
    message = str(error)
    assert message.startswith("study.toml: ")
    assert "\n" not in message
    assert "pydantic" not in message
    for part in parts:
        assert part in message


JUNK = ["3", "-1", "0", "nan", '"x"', '""', '"3 mV"', "true", "[]", "[3]", "{}", "{ x = 1 }"]


@pytest.mark.parametrize("junk", JUNK)
def test_junk_in_any_place_is_used_or_refused_and_never_crashes(junk: str) -> None:
    lines = STARTER.splitlines()
    places = [k for k, line in enumerate(lines) if re.match(r"\w+ = ", line)]
    assert len(places) > 35
    refusals: list[str] = []
    for k in places:
        key = lines[k].split(" = ")[0]
        text = "\n".join([*lines[:k], f"{key} = {junk}", *lines[k + 1 :]])
        try:
            parse_study(text)
        except PlasticError as error:
            refusals.append(str(error))
    assert len(refusals) > len(places) / 2
    assert not [message for message in refusals if "\n" in message]


def test_the_good_study_that_the_cases_edit_is_good() -> None:
    study = parse_study(STARTER)
    assert isinstance(study, Study)
    assert (study.text, study.file) == (STARTER, "study.toml")


def test_an_error_keeps_its_parts() -> None:
    error = refused(edited(('refractory = "3 ms"', 'refractory = "2 mV"')))
    assert isinstance(error, StudyError)
    assert (error.file, error.key, error.value) == ("study.toml", "cell.refractory", "2 mV")


@pytest.mark.parametrize("text", ["", "  \n\t\n"])
def test_an_empty_study_is_refused(text: str, tmp_path: Path) -> None:
    path = tmp_path / "empty.toml"
    path.write_text(text, encoding="utf-8")
    with pytest.raises(StudyError, match=r"empty\.toml: file: is empty; `plastic new NAME`"):
        load_study(path)


@pytest.mark.parametrize(
    "content", [b"\x89HDF\r\n\x1a\n\0\0\0", b"\xff\xfe\x00t", b"title = '\xe9'"]
)
def test_a_binary_study_is_refused(content: bytes, tmp_path: Path) -> None:
    path = tmp_path / "results.nc"
    path.write_bytes(content)
    with pytest.raises(StudyError, match=r"results\.nc: file: must be a TOML text in UTF-8"):
        load_study(path)


def test_a_study_that_is_not_there_or_no_file_is_refused(tmp_path: Path) -> None:
    with pytest.raises(StudyError, match=r"gone\.toml: file: there is no such file"):
        load_study(tmp_path / "gone.toml")
    with pytest.raises(StudyError, match="file: cannot be read: Is a directory"):
        load_study(tmp_path)


def test_a_data_file_is_no_study(tmp_path: Path) -> None:
    path = tmp_path / "big.toml"
    path.write_bytes(b"#" * (LARGEST + 1))
    with pytest.raises(StudyError, match=r"big\.toml: file: must be at most 1,000,000 bytes"):
        load_study(path)


def test_a_bottomless_text_is_refused() -> None:
    with pytest.raises(StudyError, match="file: is nested too deeply"):
        parse_study("x = " + "[" * 100_000)


def test_line_ends_and_byte_order_marks_do_not_matter(tmp_path: Path) -> None:
    path = tmp_path / "study.toml"
    path.write_bytes(b"\xef\xbb\xbf" + STARTER.replace("\n", "\r\n").encode())
    assert load_study(path).compare == parse_study(STARTER).compare


def test_the_command_line_may_replace_seed_and_cells_and_is_checked_too() -> None:
    study = parse_study(STARTER, seed=7, cells=3)
    assert (study.seed, study.cells) == (7, 3)
    with pytest.raises(StudyError, match=r"study\.toml: cells = 0: must be a whole number from 1"):
        parse_study(STARTER, cells=0)


RECORDED = (
    'use = "pairing"                # others: train, test_pulses, spike_times\n'
    'pattern = { weak = ["0 ms"], strong = ["10 ms", "20 ms", "30 ms"] }\n'
    'repeat = { times = 60, every = "10 s" }        # from the start of one repeat to the next\n',
    'use = "spike_times"\nfiles = { weak = "weak.csv" }\nunit = "s"\n',
)
ALONE = ('controls = ["unpaired", "test_pulses_only"]', 'controls = ["test_pulses_only"]')


def test_recorded_times_are_looked_for_beside_the_study(tmp_path: Path) -> None:
    (tmp_path / "weak.csv").write_text("0.5\n1.5\n", encoding="utf-8")
    (tmp_path / "study.toml").write_text(edited(RECORDED, ALONE), encoding="utf-8")
    study = load_study(tmp_path / "study.toml")
    assert list(study.schedules()["bursts"].pattern["weak"]) == [500, 1500]


@pytest.mark.parametrize(
    ("content", "extra", "said"),
    [
        ("1.5\n0.5\n", "", "line 2 = '0.5': must be later than the one before (s)"),
        ("time_ms\n1\n", "", "line 1 = 'time_ms': says ms, but the unit given is 's'"),
        ("sweep,spike\n1,2\n", 'column = "spikes"\n', "line 1: no column is called 'spikes'; did "
         "you mean 'spike'? (known: spike, sweep)"),
        ("0.5\n1.5\n", 'repeat = { times = 2, every = "1 s" }\n',
         "the last time, 1500 ms, must come before the next repeat, after 1000 ms"),
    ],
    ids=["out of order", "unit", "column", "repeat"],
)  # fmt: skip
def test_recorded_times_that_cannot_be_used_are_named_with_study_key_file_and_line(
    tmp_path: Path, content: str, extra: str, said: str
) -> None:
    (tmp_path / "weak.csv").write_text(content, encoding="utf-8")
    with pytest.raises(StudyError) as caught:
        parse_study(edited((RECORDED[0], RECORDED[1] + extra), ALONE), base=tmp_path)
    assert str(caught.value) == f"study.toml: protocol.bursts.files.weak = 'weak.csv': {said}"


def test_a_recording_that_is_not_there_is_named_with_study_key_and_place(tmp_path: Path) -> None:
    with pytest.raises(StudyError, match=r"bursts\.files\.weak = .*elsewhere.*: no such file"):
        parse_study(edited(RECORDED, ALONE), base=tmp_path / "elsewhere")


@pytest.mark.parametrize("name", ['""', '" "'])
@pytest.mark.parametrize("table", ["input.weak", "protocol.bursts", "cell.dendrite.apical"])
def test_a_table_without_a_name_is_refused_in_plain_words(table: str, name: str) -> None:
    room = table.rpartition(".")[0]
    error = refused(edited((f"[{table}]", f"[{room}.{name}]")))
    assert str(error) == f"study.toml: {room}.{name}: must have a name"


@pytest.mark.parametrize("table", ["cell", "compare", "input.weak", "protocol.bursts"])
def test_double_brackets_are_answered_with_single_ones(table: str) -> None:
    text = STARTER.replace(f"[{table}]", f"[[{table}]]", 1)
    assert str(refused(text)) == (
        f"study.toml: {table}: must be one table; write [{table}], in single brackets"
    )
