import csv
import math

import pytest

from plastic.cli import main


@pytest.fixture
def files(tmp_path):
    pre, post = tmp_path / "pre.csv", tmp_path / "post.csv"
    pre.write_text("time\n0\n10000\n")
    post.write_text("10\n10010\n")
    return ["--pre", str(pre), "--post", str(post)]


def test_the_final_change_is_the_closed_form_of_two_pairs(files, capsys):
    assert main(["impose", "pair_timing", *files, "--param", "a_plus=0.01"]) == 0
    text = capsys.readouterr().out
    # two pairs of +10 ms, 10 s apart: 2 a_plus exp(-10/16.8)
    assert f"final change: {200 * 0.01 * math.exp(-10 / 16.8):+.6g} % of the baseline" in text
    assert "% after 2 presynaptic and 2 postsynaptic spikes" in text


def test_the_result_is_one_sentence(tmp_path, capsys):
    """Sixty pairs of +10 ms, ten seconds apart: 60 a_plus exp(-10/16.8), in whole percent."""
    for name, late in (("pre", 0), ("post", 10)):
        (tmp_path / name).write_text("\n".join(str(10_000 * k + late) for k in range(60)))
    words = ["--pre", str(tmp_path / "pre"), "--post", str(tmp_path / "post")]
    assert main(["impose", "pair_timing", *words]) == 0
    told = f"{6000 * 0.777 / 60 * math.exp(-10 / 16.8):+.0f} %"
    assert told == "+43 %"
    text = capsys.readouterr().out
    assert f"\n{told} after 60 presynaptic and 60 postsynaptic spikes\n" in text


@pytest.mark.parametrize(("unit", "span", "rate"), [("ms", 0.59, "100"), ("s", 590, "0.1")])
def test_each_train_is_told_on_top_so_that_a_wrong_unit_shows(tmp_path, capsys, unit, span, rate):
    """Sixty spikes ten units apart span 59 intervals."""
    (tmp_path / "pre").write_text("\n".join(str(10 * k) for k in range(60)))
    (tmp_path / "post").write_text("5\n")
    words = ["--pre", str(tmp_path / "pre"), "--post", str(tmp_path / "post"), "--unit", unit]
    assert main(["impose", "pair_timing", *words]) == 0
    first, second = capsys.readouterr().out.splitlines()[:2]
    assert first == (
        f"presynaptic, pre: 60 spikes from 0 to {span:g} s, mean rate {rate} Hz; "
        f"times read in {unit}"
    )
    alone = {"ms": "0.005", "s": "5"}[unit]
    assert second == f"postsynaptic, post: 1 spike at {alone} s; times read in {unit}"


def test_a_column_is_chosen_by_name_in_both_files(files, tmp_path, capsys):
    main(["impose", "pair_timing", *files])
    expected = capsys.readouterr().out
    (tmp_path / "pre.csv").write_text("sweep,spike\n1,0\n1,10000\n")
    (tmp_path / "post.csv").write_text("spike;note\n10;a\n10010;b\n")
    assert main(["impose", "pair_timing", *files, "--column", "spike"]) == 0
    assert capsys.readouterr().out == expected
    assert main(["impose", "pair_timing", *files]) == 2
    assert "say which `column` holds the times" in capsys.readouterr().err


@pytest.mark.parametrize("name", ["pre.csv", "post.csv", "other.csv", "gone/new.csv"])
def test_an_output_that_is_there_is_refused_and_stays(files, tmp_path, capsys, name):
    (tmp_path / "other.csv").write_text("dear to me")
    before = {p.name: p.read_bytes() for p in tmp_path.iterdir()}
    assert main(["impose", "pair_timing", *files, "--out", str(tmp_path / name)]) == 2
    said = capsys.readouterr()
    assert said.out == ""
    (line,) = said.err.splitlines()
    assert name in line
    assert {p.name: p.read_bytes() for p in tmp_path.iterdir()} == before


def test_every_event_is_written_with_the_factor_just_after_it(files, tmp_path, capsys):
    out = tmp_path / "out.csv"
    assert main(["impose", "pair_timing", *files, "--out", str(out)]) == 0
    with out.open(newline="") as file:
        rows = list(csv.reader(file))
    assert rows[0][:3] == ["time (ms)", "spike of", "factor"]
    assert [row[:2] for row in rows[1:]] == [
        ["0", "pre"], ["10", "post"], ["10000", "pre"], ["10010", "post"], ["10010", "end"],
    ]  # fmt: skip
    one = 0.777 / 60 * math.exp(-10 / 16.8)
    assert float(rows[2][2]) == pytest.approx(1 + one, rel=1e-9)
    assert float(rows[-1][2]) == pytest.approx(1 + 2 * one, rel=1e-9)


def test_units_of_the_files_and_of_parameters_are_read(files, tmp_path, capsys):
    main(["impose", "pair_timing", *files, "--param", "tau_plus=20 ms"])
    expected = capsys.readouterr().out
    (tmp_path / "pre.csv").write_text("0\n10\n")
    (tmp_path / "post.csv").write_text("0.010\n10.010\n")
    words = [*files, "--unit", "s", "--param", "tau_plus=0.02 s"]
    assert main(["impose", "pair_timing", *words]) == 0
    assert capsys.readouterr().out.splitlines()[-1] == expected.splitlines()[-1]


def test_a_set_is_used_and_may_be_changed(files, capsys):
    assert main(["impose", "pair_timing", *files, "--set", "near_balanced"]) == 0
    text = capsys.readouterr().out
    assert f"final change: {200 * 0.005 * math.exp(-10 / 20):+.6g} %" in text


def test_spikes_at_one_instant_are_one_row_and_do_not_see_each_other(tmp_path, capsys):
    for name in ("pre.csv", "post.csv"):
        (tmp_path / name).write_text("5\n")
    words = ["--pre", str(tmp_path / "pre.csv"), "--post", str(tmp_path / "post.csv")]
    assert main(["impose", "pair_timing", *words]) == 0
    text = capsys.readouterr().out
    assert "both" in text
    assert "final change: +0 %" in text


def test_a_long_table_is_shortened_and_says_so(tmp_path, capsys):
    times = "\n".join(str(100 * k) for k in range(40))
    (tmp_path / "pre.csv").write_text(times)
    (tmp_path / "post.csv").write_text(times)
    words = ["--pre", str(tmp_path / "pre.csv"), "--post", str(tmp_path / "post.csv")]
    assert main(["impose", "pair_timing", *words]) == 0
    text = capsys.readouterr().out
    assert "... 29 more" in text
    assert "--out FILE.csv keeps them all" in text


def test_an_illustrative_rule_says_that_it_is(files, capsys):
    assert main(["impose", "sliding_threshold", *files]) == 0
    assert "illustrative: no published spiking constants" in capsys.readouterr().out


BAD_FILES = {
    "unsorted": ("3\n2\n", "line 2 = '2'"),
    "negative": ("-1\n2\n", "line 1 = '-1'"),
    "nan": ("1\nnan\n", "line 2 = 'nan'"),
    "infinite": ("1\ninf\n", "line 2 = 'inf'"),
    "words": ("1\n2\nthree\n", "line 3 = 'three'"),
    "empty": ("", "holds no spike times"),
    "header only": ("time\n", "holds no spike times"),
}


@pytest.mark.parametrize("kind", BAD_FILES)
def test_bad_times_are_named_with_file_line_and_value(kind, files, tmp_path, capsys):
    text, said = BAD_FILES[kind]
    (tmp_path / "post.csv").write_text(text)
    assert main(["impose", "pair_timing", *files]) == 2
    err = capsys.readouterr().err
    assert err.startswith("plastic: post.csv: ")
    assert said in err
    assert len(err.splitlines()) == 1


def test_a_binary_file_is_named(files, tmp_path, capsys):
    (tmp_path / "post.csv").write_bytes(bytes(range(256)))
    assert main(["impose", "pair_timing", *files]) == 2
    assert "post.csv: is not text" in capsys.readouterr().err


def test_a_file_that_is_not_there_is_named(files, tmp_path, capsys):
    (tmp_path / "post.csv").unlink()
    assert main(["impose", "pair_timing", *files]) == 2
    assert "no such file" in capsys.readouterr().err


BAD_WORDS = {
    "rule": (["pair_timin"], "did you mean 'pair_timing'?"),
    "set": (["pair_timing", "--set", "visual"], "no parameter set is called 'visual'"),
    "name": (["pair_timing", "--param", "a_plu=1"], "did you mean 'a_plus'?"),
    "value": (["pair_timing", "--param", "a_plus=x"], "a_plus = 'x'"),
    "range": (["pair_timing", "--param", "a_plus=5"], "a_plus = 5.0 is not in [0, 1]"),
    "nan": (["pair_timing", "--param", "a_plus=nan"], "a_plus = nan is not in [0, 1]"),
    "dimension": (["pair_timing", "--param", "tau_plus=3 mV"], "in mV, not a time"),
    "form": (["pair_timing", "--param", "a_plus"], "must be NAME=VALUE"),
    "unit": (["pair_timing", "--unit", "mV"], "not a time"),
}


@pytest.mark.parametrize("kind", BAD_WORDS)
def test_bad_words_are_named_with_what_is_allowed(kind, files, capsys):
    words, said = BAD_WORDS[kind]
    assert main(["impose", *words, *files]) == 2
    err = capsys.readouterr().err
    assert said in err
    assert len(err.splitlines()) == 1
