"""Catalogues: a folder is the list; other packages join by an entry point."""

from __future__ import annotations

import os
import subprocess
import sys
from pathlib import Path

import pytest

import plastic
from plastic.catalogue import Catalogue, class_name
from plastic.errors import UnknownName

GUEST = '''
"""A rule of another package."""
from plastic import Rule, parameter, weight


class Guest(Rule):
    """Potentiate at every postsynaptic spike."""

    step: float = parameter(0.25, "1", low=0, source="invented for a test")
    w = weight(1.0, low=0.0, high=10.0)

    def at_post(self):
        """Add one step."""
        return {"w": self.step}
'''


@pytest.fixture
def room(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Catalogue[object]:
    """A catalogue of its own: two members, one piece of machinery."""
    folder = tmp_path / "shelf"
    folder.mkdir()
    (folder / "__init__.py").write_text("")
    (folder / "_interface.py").write_text("raise RuntimeError('imported')\n")
    (folder / "red_cup.py").write_text("class RedCup:\n    'A cup.'\n")
    (folder / "blue.py").write_text("raise RuntimeError('imported')\n")
    monkeypatch.syspath_prepend(str(tmp_path))
    for name in [n for n in sys.modules if n.split(".")[0] == "shelf"]:
        monkeypatch.delitem(sys.modules, name)
    return Catalogue("shelf", "cup")


def run(code: str, *paths: Path) -> str:
    """Return what `code` prints in a fresh interpreter that looks in `paths` first."""
    own = Path(plastic.__file__).parents[1]
    env = {**os.environ, "PYTHONPATH": os.pathsep.join(map(str, [*paths, own]))}
    done = subprocess.run(
        [sys.executable, "-W", "error", "-c", code],
        env=env,
        capture_output=True,
        text=True,
        check=False,
    )
    assert done.returncode == 0, done.stderr
    return done.stdout


def joined(folder: Path, value: str) -> Path:
    """Install a package that offers a rule called guest, by its metadata alone."""
    (folder / "guest_rule.py").write_text(GUEST)
    info = folder / "guest_rule-1.dist-info"
    info.mkdir()
    (info / "METADATA").write_text("Metadata-Version: 2.1\nName: guest-rule\nVersion: 1\n")
    (info / "entry_points.txt").write_text(f"[plastic.rules]\nguest = {value}\n")
    return folder


@pytest.mark.parametrize(
    ("name", "wanted"), [("pair_timing", "PairTiming"), ("blue", "Blue"), ("a_b_c", "ABC")]
)
def test_the_class_is_the_camel_case_of_the_file(name: str, wanted: str) -> None:
    assert class_name(name) == wanted


def test_the_folder_is_the_list_without_its_machinery(room: Catalogue[object]) -> None:
    assert room.names() == ["blue", "red_cup"]


def test_listing_imports_no_member(room: Catalogue[object]) -> None:
    room.names()
    assert not [n for n in sys.modules if n.startswith("shelf.")]


def test_a_member_is_found_by_its_name(room: Catalogue[object]) -> None:
    found = room.find("red_cup")
    assert (found.__name__, found.__module__) == ("RedCup", "shelf.red_cup")


def test_finding_one_member_imports_no_other(room: Catalogue[object]) -> None:
    room.find("red_cup")  # blue would raise
    assert [n for n in sys.modules if n.startswith("shelf.")] == ["shelf.red_cup"]


@pytest.mark.parametrize("name", ["red_cap", "_interface", "", "RedCup"])
def test_a_name_that_is_not_there_is_refused(room: Catalogue[object], name: str) -> None:
    with pytest.raises(UnknownName) as caught:
        room.find(name)
    assert caught.value.kind == "cup"
    assert caught.value.known == ["blue", "red_cup"]


def test_another_package_joins_by_an_entry_point(tmp_path: Path) -> None:
    said = run(
        "import plastic; print(plastic.rules.names());"
        "rule = plastic.rules.find('guest')(); print(rule);"
        "print(float(plastic.impose(rule, [], [1.0], compiled=False).factor[0, -1]))",
        joined(tmp_path, "guest_rule:Guest"),
    ).splitlines()
    assert "'guest'" in said[0]
    assert said[1:] == ["Guest(step=0.25)", "1.25"]


@pytest.mark.parametrize("value", ["guest_rule:Missing", "no_such_module:Guest"])
def test_a_broken_guest_is_told_when_used_and_the_rest_works(tmp_path: Path, value: str) -> None:
    said = run(
        "import plastic\n"
        "print('guest' in plastic.rules.names(), plastic.rules.find('pair_timing').__name__)\n"
        "try:\n    plastic.rules.find('guest')\n"
        "except plastic.errors.PlasticError as error:\n    print(error)\n",
        joined(tmp_path, value),
    ).splitlines()
    assert said[0] == "True PairTiming"
    assert said[1].startswith(f"the rule 'guest' of {value} cannot be loaded: ")
