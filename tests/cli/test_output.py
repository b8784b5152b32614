"""What a command writes never takes the place of something that is there."""

from __future__ import annotations

from pathlib import Path

import pytest

from plastic.cli._output import refuse_existing, write_new
from plastic.errors import StoreError


def test_nothing_to_write_and_a_new_name_are_fine(tmp_path: Path) -> None:
    refuse_existing(None, "--out")
    refuse_existing(tmp_path / "new.csv", "--out")
    write_new(tmp_path / "new.csv", "a,b\n", "--out")
    assert (tmp_path / "new.csv").read_text() == "a,b\n"


@pytest.mark.parametrize("kind", ["file", "folder", "link"])
def test_what_is_there_is_refused_by_name_and_option(tmp_path: Path, kind: str) -> None:
    place = tmp_path / "mine"
    if kind == "folder":
        place.mkdir()
    else:
        (tmp_path / "dear").write_text("dear to me")
        place.symlink_to("dear") if kind == "link" else place.write_text("dear to me")
    with pytest.raises(StoreError, match=r"mine is there already; give --csv another name"):
        refuse_existing(place, "--csv")


def test_a_file_that_appears_meanwhile_keeps_its_content(tmp_path: Path) -> None:
    place = tmp_path / "mine"
    refuse_existing(place, "--out")
    place.write_text("dear to me")
    with pytest.raises(StoreError, match="is there already"):
        write_new(place, "new", "--out")
    assert place.read_text() == "dear to me"


def test_a_folder_that_is_not_there_is_named_before_any_work(tmp_path: Path) -> None:
    with pytest.raises(StoreError, match=r"there is no folder .*gone; make it first"):
        refuse_existing(tmp_path / "gone" / "new.csv", "--out")
