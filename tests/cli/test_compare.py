"""`plastic compare` around results that are given."""

import pytest

import plastic
from plastic.cli import main
from tests.report.conftest import fake_dataset


def test_compare_prints_every_table_and_writes_what_is_asked_for(tmp_path, monkeypatch, capsys):
    opened = []
    monkeypatch.setattr(
        plastic, "load", lambda path: opened.append(path) or fake_dataset(), raising=False
    )
    assert main(["compare", str(tmp_path), "--csv", str(tmp_path / "arms.csv")]) == 0
    text = capsys.readouterr().out
    assert opened == [tmp_path / "results.nc"]
    assert text.startswith("An invented pair of pathways\ncriterion: far alone fires the cell")
    assert "bursts: what became of the cells" in text
    assert (tmp_path / "arms.csv").read_text().startswith("rule,route,protocol,")


def test_a_file_that_is_there_is_refused_before_anything_is_read(tmp_path, capsys):
    (tmp_path / "mine.csv").write_text("dear to me")
    assert main(["compare", str(tmp_path), "--csv", str(tmp_path / "mine.csv")]) == 2
    (line,) = capsys.readouterr().err.splitlines()
    assert "mine.csv is there already; give --csv another name" in line
    assert (tmp_path / "mine.csv").read_text() == "dear to me"


def test_figures_are_drawn_again_where_they_are_asked_for(tmp_path, monkeypatch):
    drawn = []
    monkeypatch.setattr(plastic, "load", lambda path: fake_dataset(), raising=False)
    monkeypatch.setattr(
        "plastic.report.figures.write_figures", lambda dataset, folder: drawn.append(folder)
    )
    assert main(["compare", str(tmp_path), "--figures", str(tmp_path / "again")]) == 0
    assert drawn == [tmp_path / "again"]


def test_a_file_of_results_may_be_named_itself(tmp_path, monkeypatch):
    opened = []
    monkeypatch.setattr(
        plastic, "load", lambda path: opened.append(path) or fake_dataset(), raising=False
    )
    assert main(["compare", str(tmp_path / "mine.nc")]) == 0
    assert opened == [tmp_path / "mine.nc"]


@pytest.mark.parametrize("content", [None, b"", b"no results at all"])
def test_results_that_cannot_be_read_are_one_line(content, tmp_path, capsys):
    file = tmp_path / "results.nc"
    if content is not None:
        file.write_bytes(content)
    assert main(["compare", str(tmp_path)]) == 2
    said = capsys.readouterr()
    assert "results.nc" in said.err
    assert len(said.err.splitlines()) == 1
