import pytest

from plastic.cli import main
from plastic.study.file import load_study


def test_a_new_study_can_be_read_as_it_is(tmp_path, monkeypatch, capsys):
    monkeypatch.chdir(tmp_path)
    assert main(["new", "first"]) == 0
    assert "plastic run first.toml" in capsys.readouterr().out
    assert load_study("first.toml").cells > 0


def test_a_name_with_its_ending_is_taken_as_it_is(tmp_path, monkeypatch):
    monkeypatch.chdir(tmp_path)
    assert main(["new", "first.toml"]) == 0
    assert [path.name for path in tmp_path.iterdir()] == ["first.toml"]


def test_nothing_is_ever_overwritten(tmp_path, monkeypatch, capsys):
    monkeypatch.chdir(tmp_path)
    (tmp_path / "first.toml").write_text("mine")
    assert main(["new", "first"]) == 2
    assert (tmp_path / "first.toml").read_text() == "mine"
    assert capsys.readouterr().err == (
        "plastic: first.toml is there already; choose another name\n"
    )  # fmt: skip


def test_a_folder_that_is_not_there_is_named(tmp_path, monkeypatch, capsys):
    monkeypatch.chdir(tmp_path)
    assert main(["new", "sub/x"]) == 2
    assert capsys.readouterr().err == (
        "plastic: sub/x.toml: there is no folder sub; make it first\n"
    )  # fmt: skip
    (tmp_path / "sub").mkdir()
    assert main(["new", "sub/x"]) == 0
    assert (tmp_path / "sub" / "x.toml").exists()


@pytest.mark.parametrize("name", ["", " ", ".", "..", ".toml", "/", "sub/"])
def test_what_is_no_name_is_refused_and_nothing_is_written(name, tmp_path, monkeypatch, capsys):
    monkeypatch.chdir(tmp_path)
    assert main(["new", name]) == 2
    assert capsys.readouterr().err == (
        f"plastic: {name!r} is no name; write one such as: plastic new first\n"
    )
    assert list(tmp_path.iterdir()) == []
