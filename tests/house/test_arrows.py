"""Imports point down only. This file *is* the architecture."""

from __future__ import annotations

import ast
import os
import subprocess
import sys
from collections.abc import Mapping

import pytest

import plastic
from tests.house.sources import ROOT, imported, inside_functions, modules

#: floors of the house, lowest first; a module may import from its own room and from lower floors
FLOORS = (
    ("version", "errors", "units", "parameters", "catalogue", "draws", "quantities"),
    ("membrane", "rules", "routes", "protocols"),
    ("engine",),
    ("study", "measures", "recordings", "laws"),
    ("analysis", "checking"),
    ("report",),
    ("cli",),
)
GROUND = FLOORS[0]
#: what a room may import on its own floor, besides itself
SIDEWAYS = {"study": {"measures"}}
#: rooms that may import less than everything below them
ONLY = {"measures": {*GROUND, "membrane"}}
#: modules that stand outside: the door, and what runs it
EXEMPT = {"plastic", "plastic.__main__"}
VAGUE = {"utils", "util", "helpers", "common", "misc", "tools", "core", "base"}

MODULES = modules()


def floor(room: str) -> int:
    """Return the floor of a room, or -1 when the house does not know it."""
    return next((k for k, rooms in enumerate(FLOORS) if room in rooms), -1)


def allowed(source: str, target: str) -> bool:
    """Return whether a module of the room `source` may import from the room `target`."""
    if target == "plastic":
        return source == "cli"  # the door: only who stands outside uses it
    if source in GROUND or source == target:
        return floor(target) == floor(source)
    below = floor(target) < floor(source) or target in SIDEWAYS.get(source, set())
    return below and target in ONLY.get(source, {target})


def room_of(name: str) -> str:
    """Return the room of a module: its folder, or itself on the ground floor."""
    return name.split(".")[1] if "." in name else name


def wrong_arrows(trees: Mapping[str, ast.AST]) -> list[str]:
    """Return every import that does not point down, as text."""
    return [
        f"{name}:{line} imports {target}"
        for name, tree in trees.items()
        if name not in EXEMPT
        for line, target in imported(name, tree, trees)
        if not allowed(room_of(name), room_of(target))
    ]


def cycles(trees: Mapping[str, ast.AST]) -> list[str]:
    """Return modules that import themselves by way of others, as text."""
    edges = {n: {t for _, t in imported(n, tree, trees) if t in trees} for n, tree in trees.items()}
    found = []
    for start in edges:
        seen: set[str] = set()
        waiting = list(edges[start])
        while waiting:
            step = waiting.pop()
            if step == start:
                found.append(start)
                break
            if step not in seen:
                seen.add(step)
                waiting += edges[step]
    return found


def parsed(**sources: str) -> dict[str, ast.Module]:
    """Return an invented house, for controls: dots of a name are written as two underscores."""
    return {name.replace("__", "."): ast.parse(text) for name, text in sources.items()}


def test_every_room_has_its_floor() -> None:
    rooms = {room_of(name) for name in MODULES if name not in EXEMPT}
    assert {room for room in rooms if floor(room) < 0} == set()


def test_imports_point_down_only() -> None:
    assert wrong_arrows(MODULES) == []


@pytest.mark.parametrize(
    ("name", "text"),
    [
        ("plastic__membrane__cable", "from plastic.rules import names"),
        ("plastic__rules__pair", "import plastic.routes"),
        ("plastic__routes__neck", "from plastic import rules"),
        ("plastic__engine__loop", "from plastic.study.file import load"),
        ("plastic__measures__peak", "from plastic.engine import layout"),
        ("plastic__measures__peak", "from plastic.study.file import load"),
        ("plastic__recordings__sweeps", "from plastic.study import file"),
        ("plastic__study__store", "from plastic.analysis import cell_sheet"),
        ("plastic__analysis__sheet", "from plastic.report import tables"),
        ("plastic__laws__sign", "from plastic.checking import search"),
        ("plastic__laws__sign", "from plastic.study.file import load"),
        ("plastic__checking__check", "from plastic.report import tables"),
        ("plastic__checking__check", "from plastic.analysis import cell_sheet"),
        ("plastic__engine__loop", "from plastic.laws import find"),
        ("plastic__study__file", "from plastic.report import tables"),
        ("plastic__rules__pair", "from ..routes import names"),
        ("plastic__errors", "from plastic.membrane import cable"),
        ("plastic__rules__pair", "import plastic"),
        ("plastic__report__page", "def late():\n    from plastic.cli import main"),
    ],
)
def test_an_arrow_that_points_up_or_sideways_is_seen(name: str, text: str) -> None:
    house = parsed(
        plastic="",
        plastic__rules="",
        plastic__routes="",
        plastic__engine="",
        plastic__study="",
        plastic__analysis="",
        plastic__laws="",
        plastic__checking="",
        plastic__membrane="",
        plastic__report="",
        plastic__cli="",
    )
    assert len(wrong_arrows({**house, **parsed(**{name: text})})) == 1


@pytest.mark.parametrize(
    ("name", "text"),
    [
        ("plastic__study__run", "from plastic.measures import names"),
        ("plastic__measures__peak", "from plastic.membrane import release\nimport plastic.errors"),
        ("plastic__cli__run", "from plastic.study.file import load_study\nimport plastic"),
        ("plastic__laws__sign", "from plastic.engine.learning import Learner"),
        ("plastic__checking__check", "from plastic.laws import find"),
        ("plastic__units", "from plastic.errors import PlasticError"),
        ("plastic__study__store", "from plastic import __version__"),
        ("plastic__engine__loop", "from . import layout\nimport numpy"),
    ],
)
def test_an_arrow_that_points_down_is_allowed(name: str, text: str) -> None:
    assert (
        wrong_arrows(parsed(**{name: text, "plastic__engine": "", "plastic__engine__layout": ""}))
        == []
    )


def test_no_module_imports_itself_by_way_of_others() -> None:
    assert cycles(MODULES) == []


def test_a_cycle_is_seen() -> None:
    house = parsed(
        plastic__a="from plastic.b import x",
        plastic__b="import plastic.c",
        plastic__c="from plastic import a",
        plastic__d="import plastic.a",
    )
    assert cycles(house) == ["plastic.a", "plastic.b", "plastic.c"]


def test_imports_stand_at_the_top_except_at_the_edge() -> None:
    late = {n: inside_functions(t) for n, t in MODULES.items() if room_of(n) != "cli"}
    assert {name: lines for name, lines in late.items() if lines} == {}


def test_an_import_inside_a_function_is_seen() -> None:
    source = "import os\nclass A:\n    def f(self):\n        if os:\n            import re\n"
    assert inside_functions(ast.parse(source)) == [5]
    assert inside_functions(ast.parse("if True:\n    import re\n")) == []


def test_no_room_and_no_file_has_a_vague_name() -> None:
    assert {part for name in MODULES for part in name.split(".")} & VAGUE == set()


def test_opening_the_door_and_listing_loads_nothing_slow() -> None:
    """``plastic list`` must be quick: no compiler, no labelled arrays, no plotting."""
    code = (
        "import sys, plastic\n"
        "for room in plastic._ROOMS:\n    getattr(plastic, room).names()\n"
        "print(*sorted({n.split('.')[0] for n in sys.modules}))\n"
        "plastic.impose\n"
        "print('numba' in sys.modules, 'xarray' in sys.modules)"
    )
    done = subprocess.run(
        [sys.executable, "-c", code],
        capture_output=True,
        text=True,
        cwd=ROOT,
        check=False,
        env={**os.environ, "PYTHONPATH": str(ROOT)},
    )
    assert done.returncode == 0, done.stderr
    loaded, control = done.stdout.splitlines()
    assert set(loaded.split()) & {"numba", "llvmlite", "xarray", "pandas", "matplotlib"} == set()
    assert control == "True True"  # the control: what imposes does load them


def test_listing_imports_no_member() -> None:
    code = (
        "import sys, plastic\n"
        "for room in plastic._ROOMS:\n"
        "    names = getattr(plastic, room).names()\n"
        "    print(*[n for n in names if f'plastic.{room}.{n}' in sys.modules])"
    )
    done = subprocess.run(
        [sys.executable, "-c", code],
        capture_output=True,
        text=True,
        cwd=ROOT,
        check=False,
        env={**os.environ, "PYTHONPATH": str(ROOT)},
    )
    assert done.returncode == 0, done.stderr
    assert done.stdout.split("\n") == [""] * (len(plastic._ROOMS) + 1)
