import csv

import pytest
from PIL import Image

from plastic.report.figures.picture import file_name, labels, numbers, where, write_rows
from plastic.report.figures.portrait import lag_window
from plastic.report.figures.style import WIDTHS
from plastic.rules.triplet_timing import TripletTiming


@pytest.fixture(scope="module")
def picture():
    return lag_window({"triplet_timing": TripletTiming()})


def test_files_have_the_size_of_the_page(picture, tmp_path):
    paths = picture.save(tmp_path)
    assert sorted(path.name for path in paths) == [
        "lag_window-180mm.png", "lag_window-180mm.svg", "lag_window-85mm.png",
        "lag_window-85mm.svg", "lag_window.csv",
    ]  # fmt: skip
    for width in WIDTHS:
        with Image.open(tmp_path / f"lag_window-{width}mm.png") as image:
            assert abs(image.width - width / 25.4 * 300) <= 1
            assert image.info["dpi"][0] == pytest.approx(300, abs=0.5)
        drawn = (tmp_path / f"lag_window-{width}mm.svg").read_text(encoding="utf-8")
        assert "triplet timing</text>" in drawn  # text stays text
        assert float(drawn.split('width="')[1].split("pt")[0]) == pytest.approx(
            width / 25.4 * 72, abs=0.01
        )


def test_the_same_numbers_give_the_same_file(picture, tmp_path):
    for folder in ("one", "two"):
        (tmp_path / folder).mkdir()
        picture.save(tmp_path / folder)
    for path in (tmp_path / "one").iterdir():
        assert path.read_bytes() == (tmp_path / "two" / path.name).read_bytes()


def test_numbers_are_written_so_that_they_come_back_the_same(tmp_path):
    rows = [{"rule": "a, b", "x": 1 / 3}, {"rule": "c", "x": float("nan"), "y": 2.0}]
    write_rows(tmp_path / "rows.csv", rows)
    with (tmp_path / "rows.csv").open(newline="") as file:
        found = list(csv.DictReader(file))
    assert [row["rule"] for row in found] == ["a, b", "c"]
    assert float(found[0]["x"]) == 1 / 3
    assert found[1]["x"] == "nan"
    assert found[0]["y"] == ""


def test_rows_are_chosen_by_their_words():
    rows = [{"rule": "a", "x": 1.0}, {"rule": "b", "x": 2.0}, {"rule": "a", "x": 3.0}]
    assert labels(rows, "rule") == ["a", "b"]
    assert numbers(where(rows, rule="a"), "x") == [1.0, 3.0]


def test_a_file_name_has_no_signs_that_a_shell_would_mind():
    assert file_name("matrix-bursts, test pulses only/2") == "matrix-bursts_test_pulses_only_2"
