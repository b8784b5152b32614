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


def test_a_folder_that_is_not_there_is_named(tmp_path, capsys):
    assert main(["new", str(tmp_path / "no" / "study")]) == 2
    assert "study.toml: No such file or directory" in capsys.readouterr().err
