"""`plastic cell`: the sheet in the terminal, its figures in a folder."""

from __future__ import annotations

from pathlib import Path

import pytest

import plastic
from plastic.analysis.cell_sheet import CellSheet
from plastic.cli import main
from plastic.cli.cell import default_out
from tests.analysis.cells import bundle, full_sheet, study


@pytest.fixture
def file(tmp_path: Path) -> Path:
    path = tmp_path / "mine.toml"
    path.write_text(study(bundle("a", 320.0, 2.0)).text)
    return path


def test_the_sheet_is_printed_and_its_figures_are_written(
    file: Path, tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    assert main(["cell", str(file), "--out", str(tmp_path / "out")]) == 0
    said = capsys.readouterr()
    assert said.out.startswith("An invented cell: the nominal cell\n")
    for part in ("Inputs\n", "Summation at the soma\n", "Accuracy of the simulation\n"):
        assert part in said.out
    assert said.err == ""
    written = sorted(path.suffix for path in (tmp_path / "out").iterdir())
    assert written == [".csv"] * 3 + [".png"] * 6 + [".svg"] * 6
    assert "15 files" in said.out


def test_without_figures_nothing_is_written(
    file: Path, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.chdir(tmp_path)
    assert main(["cell", str(file), "--no-figures"]) == 0
    assert [path.name for path in tmp_path.iterdir()] == ["mine.toml"]


def test_the_folder_has_the_name_of_the_study(
    file: Path, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.chdir(tmp_path)
    monkeypatch.setattr(plastic, "cell_sheet", lambda path: full_sheet(), raising=False)
    assert main(["cell", str(file)]) == 0
    assert (tmp_path / "mine-cell" / "cell_inputs.csv").exists()
    assert default_out(Path("some/where/study.toml")) == Path("where-cell")


def test_what_could_not_be_done_is_told(
    file: Path, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> None:
    noted = CellSheet(**{**vars(full_sheet()), "notes": ("a: cannot be recruited",)})
    monkeypatch.setattr(plastic, "cell_sheet", lambda path: noted, raising=False)
    assert main(["cell", str(file), "--no-figures"]) == 0
    assert capsys.readouterr().out.endswith("a: cannot be recruited\n")


@pytest.mark.parametrize(
    ("content", "told"),
    [
        (None, "there is no such file"),
        ("", "is empty"),
        ("title = 3", "cell: missing"),
        ("title = ", "is not TOML"),
    ],
)
def test_a_study_that_cannot_be_used_is_one_line_and_2(
    content: str | None, told: str, tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    path = tmp_path / "bad.toml"
    if content is not None:
        path.write_text(content)
    assert main(["cell", str(path)]) == 2
    said = capsys.readouterr()
    assert said.out == ""
    assert len(said.err.splitlines()) == 1
    assert told in said.err


def test_a_folder_that_cannot_be_made_is_2(
    file: Path, tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    (tmp_path / "taken").write_text("a file")
    assert main(["cell", str(file), "--out", str(tmp_path / "taken")]) == 2
    assert "taken" in capsys.readouterr().err
