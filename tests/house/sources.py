"""The project's own Python files, parsed."""

from __future__ import annotations

import ast
from collections.abc import Iterator, Mapping
from pathlib import Path

ROOT = Path(__file__).parents[2]
PACKAGE = ROOT / "plastic"
TESTS = ROOT / "tests"


def modules() -> dict[str, ast.Module]:
    """Return every module of the package by dotted name; a package's is that of its __init__."""
    found = {}
    for path in sorted(PACKAGE.rglob("*.py")):
        parts = path.relative_to(ROOT).with_suffix("").parts
        name = ".".join(parts[:-1] if parts[-1] == "__init__" else parts)
        found[name] = ast.parse(path.read_text(), str(path))
    return found


def imported(name: str, tree: ast.AST, known: Mapping[str, object]) -> Iterator[tuple[int, str]]:
    """Yield line and dotted name of every module of the package that `name` imports.

    ``from plastic.engine import layout`` is an import of ``plastic.engine.layout`` when that is a
    module, of ``plastic.engine`` when it is not. The packages above a module are not listed, and
    a package's own ``__version__`` is no import of it.
    """
    for node in ast.walk(tree):
        if isinstance(node, ast.Import):
            targets = [alias.name for alias in node.names]
        elif isinstance(node, ast.ImportFrom):
            base = node.module or ""
            if node.level:  # relative to the package that holds the module
                package = name if is_package(name, known) else name.rpartition(".")[0]
                above = package.split(".")[: len(package.split(".")) - node.level + 1]
                base = ".".join([*above, *filter(None, [node.module])])
            names = [alias.name for alias in node.names if not alias.name.startswith("__")]
            inner = [f"{base}.{name}" for name in names]
            targets = [one if one in known else base for one in inner]
        else:
            continue
        yield from (
            (node.lineno, t) for t in dict.fromkeys(targets) if t.split(".")[0] == "plastic"
        )


def is_package(name: str, known: Mapping[str, object]) -> bool:
    """Return whether a module holds others."""
    return any(other.startswith(name + ".") for other in known)


def inside_functions(tree: ast.AST) -> list[int]:
    """Return the lines of imports that stand inside a function."""
    functions = (
        node for node in ast.walk(tree) if isinstance(node, (ast.FunctionDef, ast.AsyncFunctionDef))
    )
    lines = {
        node.lineno
        for function in functions
        for node in ast.walk(function)
        if isinstance(node, (ast.Import, ast.ImportFrom))
    }
    return sorted(lines)
