"""What holds for every catalogue: the folder is the list, and one new file is enough."""

from __future__ import annotations

import importlib
import inspect
import os
import shutil
import subprocess
import sys
from pathlib import Path

import pytest

import plastic
from plastic.errors import UnknownName

PACKAGE = Path(plastic.__file__).parent
ROOMS = [room for room in plastic._ROOMS if (PACKAGE / room).is_dir()]
MEMBERS = [
    (room, name) for room in ROOMS for name in importlib.import_module(f"plastic.{room}").names()
]
every_room = pytest.mark.parametrize("room", ROOMS)
every_member = pytest.mark.parametrize(
    ("room", "name"), MEMBERS, ids=[f"{r}.{n}" for r, n in MEMBERS]
)

RULE = '''"""A rule that arrived as one file."""

from __future__ import annotations

from plastic.parameters import parameter
from plastic.rules._interface import Changes, Rule, trace, weight


class LatePairs(Rule):
    """Potentiate by what is left of the last presynaptic spike."""

    step: float = parameter(0.25, "1", low=0, source="invented for a test")
    tau: float = parameter(10.0, "ms", low=1, source="invented for a test")

    equation = "post: dw = step r"

    w = weight(1.0, low=0.0, high=10.0)
    r = trace("pre", tau="tau", jump="set")

    def at_post(self, r: float) -> Changes:
        """Potentiate."""
        return {"w": self.step * r}
'''

ROUTE = '''"""A route that arrived as one file."""

from __future__ import annotations

from plastic.parameters import parameter
from plastic.routes._interface import Route


class LateQuantum(Route):
    """Quanta rise, at most threefold."""

    highest: float = parameter(3.0, "1", low=1, source="invented for a test")
    target = "quantum"
    evidence = "hypothesis"
'''

USE = """
import plastic
print(*plastic.rules.names())
print(*plastic.routes.names())
rule = plastic.rules.find("late_pairs")(step=0.5)
for compiled in (False, True):
    print(repr(float(plastic.impose(rule, [0.0, 5.0], [10.0], compiled=compiled).factor[0, -1])))
route = plastic.routes.find("late_quantum")
print(float(route().multiple(2.0)), float(route().multiple(9.0)), route.summary())
print(plastic.routes.Mixture.pure("late", route()).name, plastic.__file__)
"""


def test_every_room_of_the_door_exists() -> None:
    assert list(plastic._ROOMS) == ROOMS


@every_room
def test_names_are_sorted_and_the_files_of_the_folder(room: str) -> None:
    files = {p.stem for p in (PACKAGE / room).glob("*.py") if not p.stem.startswith("_")}
    names = importlib.import_module(f"plastic.{room}").names()
    assert names == sorted(set(names))
    assert files <= set(names)
    assert names


@every_room
def test_an_unknown_name_is_refused_with_the_nearest_and_all(room: str) -> None:
    catalogue = importlib.import_module(f"plastic.{room}")
    name = catalogue.names()[0]
    with pytest.raises(UnknownName, match=f"did you mean {name!r}") as caught:
        catalogue.find(name[:-1] + "z")
    assert caught.value.known == catalogue.names()


@every_member
def test_every_member_is_a_class_that_says_what_it_is(room: str, name: str) -> None:
    member = importlib.import_module(f"plastic.{room}").find(name)
    assert isinstance(member, type)
    assert vars(member).get("__doc__")
    first = (inspect.getdoc(member) or "").split("\n")[0]
    assert first.endswith((".", "?"))
    assert member.summary() == first


def test_one_new_file_is_enough(tmp_path: Path) -> None:
    """A rule and a route dropped into a copy of the package are listed, found and imposed."""
    copy = tmp_path / "plastic"
    shutil.copytree(PACKAGE, copy, ignore=shutil.ignore_patterns("__pycache__"))
    (copy / "rules" / "late_pairs.py").write_text(RULE)
    (copy / "routes" / "late_quantum.py").write_text(ROUTE)
    done = subprocess.run(
        [sys.executable, "-W", "error", "-c", USE],
        cwd=tmp_path,
        capture_output=True,
        text=True,
        env={**os.environ, "PYTHONPATH": str(tmp_path)},
        check=False,
    )
    assert done.returncode == 0, done.stderr
    listed, routes, plain, compiled, multiples, where = done.stdout.splitlines()
    assert listed.split() == sorted([*plastic.rules.names(), "late_pairs"])
    assert routes.split() == sorted([*plastic.routes.names(), "late_quantum"])
    assert plain == compiled == repr(1 + 0.5 * 2.718281828459045**-0.5)
    assert multiples == "2.0 3.0 Quanta rise, at most threefold."
    assert where == f"late {copy / '__init__.py'}"
