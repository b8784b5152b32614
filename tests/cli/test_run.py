"""`plastic run` and `plastic compare` around results that are given; the simulation has its own."""

import warnings
from pathlib import Path

import pytest

import plastic
from plastic.cli import main
from plastic.cli.run import CAUTION, default_out
from plastic.study.half_step import ArmChange, Change, StepCheck
from tests.report.conftest import STUDY, fake_dataset


@pytest.fixture
def study(tmp_path, monkeypatch):
    monkeypatch.chdir(tmp_path)
    path = tmp_path / "pathways.toml"
    path.write_text(STUDY, encoding="utf-8")
    return path


@pytest.fixture
def asked(monkeypatch):
    """Let `plastic.run` return the invented results, and keep what it was asked for."""
    seen = {}

    def run(study, *, out, cells, seed, workers, progress):
        seen.update(study=study, out=out, cells=cells, seed=seed, workers=workers)
        out.mkdir(parents=True, exist_ok=True)
        progress(0, 2)
        progress(2, 2)
        return fake_dataset()

    monkeypatch.setattr(plastic, "run", run, raising=False)
    return seen


def test_the_output_folder_is_named_after_the_study():
    assert default_out(Path("here/two.toml")) == Path("two-results")
    assert default_out(Path("/x/two_roads/study.toml")) == Path("two_roads-results")


def test_options_reach_the_run(study, asked):
    words = ["--out", "there", "--cells", "7", "--seed", "3", "--workers", "2", "--no-figures"]
    assert main(["run", str(study), *words]) == 0
    assert asked["study"].title == "An invented pair of pathways"
    assert (asked["study"].cells, asked["study"].seed) == (7, 3)
    assert [asked[key] for key in ("out", "cells", "seed", "workers")] == [Path("there"), 7, 3, 2]


def test_a_run_prints_protocols_matrices_and_controls_in_this_order(study, asked, capsys):
    assert main(["run", str(study), "--no-figures"]) == 0
    text = capsys.readouterr().out
    heads = [
        "single_pairs: baseline 10 min; 60 repeats", "bursts: baseline 10 min; 60 repeats",
        "single_pairs: repeats to criterion, expressed", "bursts: repeats to criterion, induced",
        "\nControls\n", "Input specificity", "results.nc",
    ]  # fmt: skip
    places = [text.index(head) for head in heads]
    assert places == sorted(places)
    assert "controls: unpaired, reversed, test pulses only, inhibition blocked" in text
    assert "what became of the cells" not in text  # the long table is for `plastic compare`


def test_a_run_ends_with_a_caution_in_one_line(study, asked, capsys):
    assert main(["run", str(study), "--no-figures"]) == 0
    last = capsys.readouterr().out.splitlines()[-1]
    assert last == CAUTION
    assert "do not replace" in last


def test_a_run_says_where_everything_went_and_it_is_there(study, asked, capsys, monkeypatch):
    drawn = []
    monkeypatch.setattr(
        "plastic.report.figures.write_figures", lambda ds, folder, progress: drawn.append(folder)
    )
    assert main(["run", str(study)]) == 0
    text = capsys.readouterr().out
    out = Path("pathways-results")
    for name in ("comparison.csv", "protocols"):
        assert str(out / name) in text
        assert (out / name).exists()
    assert drawn == [out / "figures"]
    assert str(out / "figures") in text


def test_away_from_a_terminal_there_is_no_progress_bar(study, asked, capsys):
    assert main(["run", str(study), "--no-figures"]) == 0
    assert capsys.readouterr().err == ""


def test_a_study_that_cannot_be_used_is_one_line(study, asked, capsys):
    study.write_text(STUDY.replace('title = "', 'titel = "'), encoding="utf-8")
    assert main(["run", str(study)]) == 2
    said = capsys.readouterr().err
    assert "titel" in said
    assert len(said.splitlines()) == 1
    assert not Path("pathways-results").exists()


def test_a_study_that_is_not_there_is_one_line(tmp_path, capsys):
    assert main(["run", str(tmp_path / "none.toml")]) == 2
    assert "there is no such file" in capsys.readouterr().err


def test_half_the_time_step_is_checked_when_asked_for_and_only_then(
    study, asked, capsys, monkeypatch
):
    still = Change(0.0, 0.0)
    arm = ArmChange("r", "q", "p", still, still, still, 1.0, 0, 9, 0, 0.0)
    given = {}

    def check(study, *, workers, progress):
        given.update(title=study.title, workers=workers)
        progress(1, 1)
        return StepCheck(0.1, 3, (arm,))

    monkeypatch.setattr(plastic, "check_dt", check, raising=False)
    assert main(["run", str(study), "--no-figures"]) == 0
    assert "Half the time step" not in capsys.readouterr().out
    assert given == {}
    assert main(["run", str(study), "--no-figures", "--check-dt", "--workers", "2"]) == 0
    text = capsys.readouterr().out
    assert "Half the time step: 0.05 instead of 0.1 ms, in 3 simulated cells" in text
    assert "dt = 0.1 ms is fine" in text
    assert given == {"title": "An invented pair of pathways", "workers": 2}


def test_what_is_unusual_is_one_line_and_the_run_goes_on(study, asked, capsys):
    odd = STUDY.replace('axial = "150 ohm cm"', 'axial = "400 ohm cm"')
    study.write_text(odd.replace('diameter = "2 um"', 'diameter = "15 um"'), encoding="utf-8")
    assert main(["run", str(study), "--no-figures"]) == 0
    assert capsys.readouterr().err.splitlines() == [
        f"plastic: {study}: {what}: possible but unusual; {usual} is usual (common practice)"
        for what, usual in (
            ("cell.membrane.axial = 400 ohm cm", "70 to 300 ohm cm"),
            ("cell.dendrite.apical.diameter = 15 um", "0.2 to 10 um"),
        )
    ]


def test_other_warnings_are_shown_as_they_were(study, asked, monkeypatch):
    def strange(*args, **options):
        warnings.warn("strange", RuntimeWarning, stacklevel=2)
        return fake_dataset()

    monkeypatch.setattr(plastic, "run", strange)
    with pytest.warns(RuntimeWarning, match="strange"):
        main(["run", str(study), "--no-figures", "--out", str(study.parent)])
