"""The tests mirror the package, every test can fail, and the top level stays small."""

from __future__ import annotations

import ast
import shutil
import subprocess
from collections.abc import Iterator
from pathlib import Path

import pytest

from tests.house.sources import PACKAGE, ROOT, TESTS

#: what a room's manual is tested under; the members it describes are tested by the contract
MANUAL = "_interface"
TOP_LEVEL = {"README.md", "DEVELOPERS.md", "pyproject.toml", "plastic", "experiments", "tests"}
#: calls that fail a test when what they say does not hold
FAILING = {"raises", "warns", "fail", "deprecated_call"}


def untested(package: Path, tests: Path) -> list[str]:
    """Return the files of the package without a test of their name in the mirrored room."""
    missing = []
    for path in sorted(package.rglob("*.py")):
        inner = path.relative_to(package)
        if path.stem in ("__init__", "__main__", MANUAL):
            continue
        wanted = f"test_{path.stem.strip('_')}.py"
        room = tests / inner.parts[0] if len(inner.parts) > 1 else tests
        found = room.rglob(wanted) if len(inner.parts) > 1 else room.glob(wanted)
        if not any(found):
            missing.append(str(inner))
    return missing


def functions_under_test(tree: ast.Module) -> Iterator[ast.FunctionDef]:
    """Yield every test function of a module."""
    for node in ast.walk(tree):
        if isinstance(node, ast.FunctionDef) and node.name.startswith("test_"):
            yield node


def own_nodes(function: ast.FunctionDef) -> Iterator[ast.AST]:
    """Yield the nodes of a function without those of functions inside it."""
    waiting: list[ast.AST] = list(function.body)
    while waiting:
        node = waiting.pop()
        yield node
        if not isinstance(node, (ast.FunctionDef, ast.Lambda, ast.ClassDef)):
            waiting += ast.iter_child_nodes(node)


def bare_returns(tree: ast.Module) -> list[str]:
    """Return the tests that can leave before their end."""
    return [
        f"{test.name}:{node.lineno}"
        for test in functions_under_test(tree)
        for node in own_nodes(test)
        if isinstance(node, ast.Return)
    ]


def called(node: ast.AST) -> str:
    """Return the last name of what a call calls, or nothing."""
    if not isinstance(node, ast.Call):
        return ""
    function = node.func
    return function.attr if isinstance(function, ast.Attribute) else getattr(function, "id", "")


def can_fail(function: ast.FunctionDef, asserting: set[str]) -> bool:
    """Return whether a function asserts, expects an error, or calls one that does."""
    return any(
        isinstance(node, ast.Assert)
        or called(node) in FAILING | asserting
        or called(node).startswith(("assert_", "_assert"))
        for node in ast.walk(function)
    )


def toothless(trees: dict[str, ast.Module]) -> list[str]:
    """Return the tests that assert nothing, in their own lines or in a function they call."""
    functions = [
        node
        for tree in trees.values()
        for node in ast.walk(tree)
        if isinstance(node, ast.FunctionDef) and not node.name.startswith("test_")
    ]
    asserting: set[str] = set()
    while True:
        more = {f.name for f in functions if can_fail(f, asserting)} - asserting
        if not more:
            break
        asserting |= more
    return [
        f"{name}: {test.name}"
        for name, tree in trees.items()
        for test in functions_under_test(tree)
        if not can_fail(test, asserting)
    ]


def parsed_tests() -> dict[str, ast.Module]:
    """Return every file of the tests, parsed."""
    return {
        str(p.relative_to(TESTS)): ast.parse(p.read_text()) for p in sorted(TESTS.rglob("*.py"))
    }


def test_every_file_of_the_package_has_its_test() -> None:
    assert untested(PACKAGE, TESTS) == []


def test_a_file_without_its_test_is_seen(tmp_path: Path) -> None:
    package, tests = tmp_path / "plastic", tmp_path / "tests"
    for name in ("__init__", "units", "errors", "rules/_interface", "rules/_draws", "rules/old"):
        (package / name).parent.mkdir(parents=True, exist_ok=True)
        (package / f"{name}.py").touch()
    for name in ("test_units", "rules/test_draws", "published/test_old", "rules/test_errors"):
        (tests / name).parent.mkdir(parents=True, exist_ok=True)
        (tests / f"{name}.py").touch()
    assert untested(package, tests) == ["errors.py", "rules/old.py"]


def test_every_folder_of_tests_is_a_package() -> None:
    """Two tests of one name would hide each other."""
    folders = {path.parent for path in TESTS.rglob("test_*.py")}
    assert sorted(str(f) for f in folders if not (f / "__init__.py").exists()) == []


def test_no_test_leaves_by_a_return() -> None:
    found = {name: bare_returns(tree) for name, tree in parsed_tests().items()}
    assert {name: tests for name, tests in found.items() if tests} == {}


def test_a_return_in_a_test_is_seen_and_one_in_its_helper_is_not() -> None:
    source = (
        "def test_a(x):\n    if x:\n        return\n    assert x\n"
        "def test_b(x):\n    def inner():\n        return x\n    assert inner()\n"
    )
    assert bare_returns(ast.parse(source)) == ["test_a:3"]


def test_every_test_can_fail() -> None:
    assert toothless(parsed_tests()) == []


def test_a_test_that_asserts_nothing_is_seen() -> None:
    source = (
        "def test_a():\n    run()\n"
        "def test_b():\n    assert run()\n"
        "def test_c():\n    outer()\n"
        "def test_d():\n    with pytest.raises(ValueError):\n        run()\n"
        "def test_e():\n    np.testing.assert_allclose(1, 1)\n"
        "def outer():\n    holds(1)\n"
        "def holds(x):\n    assert x\n"
        "def run():\n    return 1\n"
    )
    assert toothless({"x.py": ast.parse(source)}) == ["x.py: test_a"]


def test_the_top_level_holds_what_it_should_and_nothing_else() -> None:
    if shutil.which("git") is None or not (ROOT / ".git").exists():
        pytest.skip("not a working copy: git does not know the files here")
    listed = subprocess.run(
        ["git", "-C", str(ROOT), "ls-files", "--cached", "--others", "--exclude-standard"],
        capture_output=True,
        text=True,
        check=True,
    ).stdout.splitlines()
    tops = {line.split("/")[0] for line in listed}
    assert {top for top in tops if not top.startswith(".")} <= TOP_LEVEL
    assert {"plastic", "tests", "pyproject.toml"} <= tops
