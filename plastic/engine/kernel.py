"""From a rule to a compiled module: generate, write to the cache, import.

The text of `template.py` is kept but for the part between its two marks, which is replaced by the
rule's hooks as plain functions of numbers and by the few lines that connect them to the arrays.
The file's name is a hash of everything it depends on (its own text, the engine's primitives, the
versions of numba and Python), so a stale file can never be loaded, and a rule is compiled once.
Parameters and routes are data: changing them compiles nothing.
"""

from __future__ import annotations

import ast
import builtins
import functools
import hashlib
import importlib.util
import inspect
import os
import platform
import re
import sys
import tempfile
import textwrap
import threading
from dataclasses import dataclass
from pathlib import Path
from types import ModuleType
from typing import Any

import numba
import numpy as np
from numpy.typing import NDArray

from plastic.engine import layout, probe, steps, template
from plastic.errors import RuleError
from plastic.rules._interface import HOOKS, Rule

START = "# ---- the rule "
END = "# ---- end of the rule "
ALLOWED = {"math", "min", "max", "abs", "float", "int", "bool", "range", "True", "False"}
_lock = threading.Lock()
_loaded: dict[str, ModuleType] = {}
_by_rule: dict[type[Rule], ModuleType] = {}


@dataclass(frozen=True)
class Numbers:
    """The declarations of one rule as arrays, in the order of the generated code."""

    parameters: NDArray[np.float64]
    starts: NDArray[np.float64]
    cell_starts: NDArray[np.float64]
    low: NDArray[np.float64]
    high: NDArray[np.float64]
    taus_pre: NDArray[np.float64]
    taus_post: NDArray[np.float64]
    window: float


@dataclass(frozen=True)
class Rows:
    """The names of a rule's variables, in the order of the generated arrays."""

    inputs: tuple[str, ...]
    cell: tuple[str, ...]
    pre: tuple[str, ...]
    post: tuple[str, ...]

    @classmethod
    def of(cls, rule: type[Rule]) -> Rows:
        """Return the rows of `rule`: weights first, then states of input scope."""
        states = [n for n, s in rule.states.items() if s.scope == "input"]
        return cls(
            (*rule.weights, *states),
            tuple(n for n, s in rule.states.items() if s.scope == "cell"),
            tuple(n for n, tr in rule.traces.items() if tr.source == "pre"),
            tuple(n for n, tr in rule.traces.items() if tr.source == "post"),
        )


def numbers_of(rule: Rule) -> Numbers:
    """Return the rule's declared numbers as arrays."""
    rows, number = Rows.of(type(rule)), rule.number
    starts = [
        number((rule.weights[n] if n in rule.weights else rule.states[n]).start)
        for n in rows.inputs
    ]
    return Numbers(
        np.array(list(rule.values.values()), dtype=float),
        np.array(starts, dtype=float),
        np.array([number(rule.states[n].start) for n in rows.cell], dtype=float),
        np.array([number(w.low) for w in rule.weights.values()], dtype=float),
        np.array([number(w.high) for w in rule.weights.values()], dtype=float),
        np.array([number(rule.traces[n].tau) for n in rows.pre], dtype=float),
        np.array([number(rule.traces[n].tau) for n in rows.post], dtype=float),
        float(getattr(rule, "window", 0.0)) if rule.reads == "rates" else 0.0,
    )


def module_for(rule: type[Rule]) -> ModuleType:
    """Return the compiled module of a rule class, generating it when it is not in the cache."""
    if rule not in _by_rule:
        _by_rule[rule] = _module(f"rule_{rule.__name__.lower()}", text_for(rule))
    return _by_rule[rule]


@functools.cache
def probes() -> ModuleType:
    """Return the compiled module of the readings, generating it when it is not in the cache."""
    return _module("probe", _cached(_paste(inspect.getsource(probe), _sources(probe))))


def _module(label: str, text: str) -> ModuleType:
    versions = f"{numba.__version__} {np.__version__} {platform.python_version()}"
    parts = [text, inspect.getsource(steps), inspect.getsource(layout), versions]
    name = f"plastic_{label}_{hashlib.sha256(chr(0).join(parts).encode()).hexdigest()[:16]}"
    with _lock:
        if name not in _loaded:
            _loaded[name] = _import(_written(name, text), name)
        return _loaded[name]


def cache_folder() -> Path:
    """Return the folder of generated modules: PLASTIC_CACHE, or the user's cache folder."""
    given = os.environ.get("PLASTIC_CACHE")
    base = os.environ.get("XDG_CACHE_HOME") or os.path.join(os.path.expanduser("~"), ".cache")
    return Path(given) if given else Path(base) / "plastic"


def _written(name: str, text: str) -> Path:
    """Write the module once, atomically; fall back to a temporary folder if the cache is closed."""
    for folder in (cache_folder(), Path(tempfile.gettempdir()) / f"plastic-{os.getuid()}"):
        path = folder / f"{name}.py"
        try:
            folder.mkdir(parents=True, exist_ok=True)
            if path.exists() and path.read_text() == text:
                return path
            handle, part = tempfile.mkstemp(dir=folder, suffix=".part")
            with os.fdopen(handle, "w") as file:
                file.write(text)
            os.replace(part, path)
            return path
        except OSError:
            continue
    raise RuleError(f"no folder for compiled rules can be written; set PLASTIC_CACHE ({name})")


def _import(path: Path, name: str) -> ModuleType:
    spec = importlib.util.spec_from_file_location(name, path)
    if spec is None or spec.loader is None:
        raise RuleError(f"the generated module {path} cannot be imported")
    module = importlib.util.module_from_spec(spec)
    sys.modules[name] = module
    spec.loader.exec_module(module)
    return module


#: functions of the loop whose text is put in the place of their call: numba hands an array to a
#: function as nine numbers, which costs more than most of these do
PASTED = (
    "settle",
    "bound",
    "learn",
    "traces_jump",
    "express",
    "release",
    "mean_open",
    "hold_currents",
    "eliminate",
    "fade",
    "advance",
    "highest_of",
)


def text_for(rule: type[Rule]) -> str:
    """Return the text of the module generated for a rule class."""
    base = inspect.getsource(template)
    head, rest = base.split(START, 1)
    loop = rest.split(END, 1)[1].split("\n", 1)[1]
    opening, doc, imports = head.split('"""', 2)
    title = (
        f'"""Generated by plastic for the rule {rule.__name__}; do not edit.\n\n{doc.lstrip()}"""'
    )
    plain, connections = _rule_part(rule)
    sources = _sources(template) | connections
    return f"{opening}{title}{imports}{plain}\n{_cached(_paste(loop, sources))}"


#: entry points that numba keeps compiled on disk
CACHED = (
    "run_cells",
    "run_imposed",
    "run_shapes",
    "run_thresholds",
    "run_chances",
    "run_two_contacts",
    "run_tails",
)


def _cached(text: str) -> str:
    for name in CACHED:
        text = text.replace(f"@compiled\ndef {name}(", f"@kept\ndef {name}(")
    return text


def _sources(module: ModuleType) -> dict[str, str]:
    """Return the text of the pasted functions that a module has."""
    return {
        name: inspect.getsource(_python(getattr(module, name)))
        for name in PASTED
        if hasattr(module, name)
    }


def _python(function: Any) -> Any:
    """Return the plain function behind a compiled one."""
    return getattr(function, "py_func", function)


def _paste(text: str, sources: dict[str, str]) -> str:
    """Put the bodies of functions in the place of their calls, until no such call is left."""
    bodies = {name: _body(source) for name, source in sources.items()}
    tree = ast.parse(text)
    defined = {n.name: n for n in tree.body if isinstance(n, ast.FunctionDef)}
    lines = text.split("\n")
    for name in sorted((n for n in defined if n in bodies), key=lambda n: -defined[n].lineno):
        pasted = defined[name]  # its text now stands wherever it was called
        del lines[pasted.lineno - 2 : (pasted.end_lineno or pasted.lineno) + 2]
    while True:
        calls = [
            node
            for node in ast.walk(ast.parse("\n".join(lines)))
            if isinstance(node, (ast.Expr, ast.Assign)) and _called(node) in bodies
        ]
        if not calls:
            return "\n".join(lines)
        for node in sorted(calls, key=lambda n: -n.lineno):
            call = node.value
            assert isinstance(call, ast.Call)
            parameters, body, result = bodies[str(_called(node))]
            given = dict(zip(parameters, (ast.unparse(a) for a in call.args), strict=True))
            target = ast.unparse(node.targets[0]) if isinstance(node, ast.Assign) else ""
            made = [*body, f"{target} = {result}"] if target and result else body
            pad = " " * node.col_offset
            new = [pad + _renamed(line, given) if line.strip() else "" for line in made]
            lines[node.lineno - 1 : node.end_lineno] = new or [pad + "pass"]


def _called(node: ast.Expr | ast.Assign) -> str | None:
    call = node.value
    return call.func.id if isinstance(call, ast.Call) and isinstance(call.func, ast.Name) else None


def _renamed(line: str, given: dict[str, str]) -> str:
    pattern = r"(?<![\w.])(" + "|".join(map(re.escape, given)) + r")(?!\w)"
    return re.sub(pattern, lambda m: given[m[1]], line) if given else line


def _body(source: str) -> tuple[list[str], list[str], str]:
    """Return a function's parameters, the lines of its body and what it returns at its end."""
    node = ast.parse(source).body[0]
    assert isinstance(node, ast.FunctionDef)
    parameters = [a.arg for a in node.args.args]
    statements = node.body[1:] if ast.get_docstring(node) else node.body
    lines = source.split("\n")
    result = ""
    if statements and isinstance(statements[-1], ast.Return):
        result = ast.unparse(statements[-1].value) if statements[-1].value else ""
        statements = statements[:-1]
    if not statements:
        return parameters, [], result
    block = lines[statements[0].lineno - 1 : statements[-1].end_lineno]
    return parameters, [line[4:] for line in block], result


def _rule_part(rule: type[Rule]) -> tuple[str, dict[str, str]]:
    """Return the rule's part of the module, and the text that connects each hook to the arrays."""
    rows, hooks = Rows.of(rule), rule.hooks()
    sizes = f"{len(rule.weights)}, {len(rows.inputs)}, {len(rows.cell)}"
    pieces = [
        f"# ---- the rule {rule.__name__} ----\n"
        f"RATES = {rule.reads == 'rates'}\n"
        f"N_WEIGHTS, N_VARIABLES, N_CELL = {sizes}\n"
        f"N_PRE, N_POST = {len(rows.pre)}, {len(rows.post)}\n"
        f"PRE_ADDS = {_adds(rule, rows.pre)}\n"
        f"POST_ADDS = {_adds(rule, rows.post)}\n"
        f"HAS_FLOW, HAS_CELL_FLOW = {'flow' in hooks}, {'cell_flow' in hooks}",
    ]
    connections = {}
    for hook in HOOKS:
        changed: tuple[str, ...] = ()
        if hook in hooks:
            changed, text = _plain_function(rule, hook)
            pieces.append(text)
        for door in CONNECTIONS[hook]:
            connections[door] = _connection(rule, rows, hook, door, hooks.get(hook), changed)
    if "factor" in vars(rule):
        pieces.append(_plain_function(rule, "factor")[1])
    pieces += [_factor(rule, rows), "# ---- end of the rule ----"]
    return "\n\n\n".join(pieces) + "\n", connections


def _adds(rule: type[Rule], names: tuple[str, ...]) -> tuple[bool, ...]:
    """Return whether each trace adds; never empty, since the compiler wants a type."""
    return tuple(rule.traces[n].jump == "add" for n in names) or (True,)


#: hook -> the functions that connect it: their arguments, the last of which takes the changes
CONNECTIONS = {
    "at_pre": {
        "add_at_pre": "p, S, C, X, Y, fx, fy, i, site, t, D",
        "move_at_pre": "p, C, X, Y, fx, fy, i, site, t, S",
    },
    "at_post": {"add_at_post": "p, S, C, X, Y, fx, fy, i, site, t, amplitude, D"},
    "at_presentation": {"add_at_presentation": "p, S, C, i, t, pre_rate, post_rate, D"},
    "cell_at_post": {"add_cell_at_post": "p, C, Y, fy, t, DC"},
    "cell_at_presentation": {"add_cell_at_presentation": "p, C, t, post_rate, DC"},
    "flow": {"add_flow": "p, S, i, dt, D"},
    "cell_flow": {"add_cell_flow": "p, C, dt, DC"},
}


def _connection(
    rule: type[Rule],
    rows: Rows,
    hook: str,
    door: str,
    arguments: tuple[str, ...] | None,
    changed: tuple[str, ...],
) -> str:
    """Return the function that feeds a hook from the arrays and adds what it changes."""
    signature = CONNECTIONS[hook][door]
    lines = [f"def {door}({signature}):"]
    if arguments is None:
        return "\n".join([*lines, "    return"])
    reads = [_read(rows, hook, name) for name in arguments]
    reads += [f"p[{k}]" for k in range(len(rule.parameters))]
    lines.append(f"    changes = {hook}({', '.join(reads)})")
    into = signature.split(", ")[-1]
    for k, name in enumerate(changed):
        place = (
            f"DC[{rows.cell.index(name)}]"
            if into == "DC"
            else f"{into}[{rows.inputs.index(name)}, i]"
        )
        lines.append(f"    {place} += changes[{k}]")
    return "\n".join(lines)


def _read(rows: Rows, hook: str, name: str) -> str:
    """Return the expression that reads one argument of a hook from the arrays."""
    if name in rows.inputs:
        return f"S[{rows.inputs.index(name)}, i]"
    if name in rows.cell:
        return f"C[{rows.cell.index(name)}]"
    if name in rows.pre:
        return f"X[{rows.pre.index(name)}, i] * fx[{rows.pre.index(name)}]"
    if name in rows.post:
        site = "0" if hook.startswith("cell_") else "site"
        return f"Y[{rows.post.index(name)}, {site}] * fy[{rows.post.index(name)}]"
    return name


def _factor(rule: type[Rule], rows: Rows) -> str:
    lines = ["@compiled", "def factor_of(p, S, i):"]
    if "factor" not in vars(rule):
        first = next(iter(rule.weights.values()))
        start = first.start
        value = (
            f"p[{list(rule.parameters).index(start)}]"
            if isinstance(start, str)
            else repr(float(start))
        )
        return "\n".join([*lines, f"    return S[0, i] / {value}"])
    names = tuple(inspect.signature(rule.factor).parameters)[1:]
    reads = [_read(rows, "factor", n) for n in names] + [
        f"p[{k}]" for k in range(len(rule.parameters))
    ]
    return "\n".join([*lines, f"    return factor({', '.join(reads)})"])


def _plain_function(rule: type[Rule], hook: str) -> tuple[tuple[str, ...], str]:
    """Return the names a hook changes and its text as a function of plain numbers."""
    owner = f"{rule.__name__}.{hook}"
    try:
        source = textwrap.dedent(inspect.getsource(getattr(rule, hook)))
    except (OSError, TypeError) as error:
        raise RuleError(f"{owner}: its source cannot be read, so it cannot be compiled") from error
    function = ast.parse(source).body[0]
    if not isinstance(function, ast.FunctionDef):
        raise RuleError(f"{owner}: write it as a method, with def")
    arguments = list(inspect.signature(getattr(rule, hook)).parameters)[1:]
    changed = () if hook == "factor" else _changed(owner, rule, hook, function)
    _Plain(owner, rule, changed, hook).visit(function)
    clash = {*arguments, *_own_names(function)} & set(rule.parameters)
    if clash:
        raise RuleError(
            f"{owner}: {sorted(clash)} name both a parameter and an argument or a local name"
        )
    if changed and not isinstance(function.body[-1], ast.Return):  # a path that changes nothing
        function.body.append(ast.Return(ast.Tuple([ast.Constant(0.0)] * len(changed), ast.Load())))
    parameters = [ast.arg(a) for a in [*arguments, *rule.parameters]]
    function.args = ast.arguments([], parameters, None, [], [], None, [])
    function.name, function.returns = hook, None
    function.decorator_list = [ast.Name("compiled", ast.Load())]
    ast.fix_missing_locations(function)
    _no_globals(owner, function)
    return changed, ast.unparse(function)


def _changed(owner: str, rule: type[Rule], hook: str, function: ast.FunctionDef) -> tuple[str, ...]:
    """Return the variables that a hook's returns name, checked against its scope."""
    rows = Rows.of(rule)
    allowed = rows.cell if hook.startswith("cell_") else rows.inputs
    found: list[str] = []
    for node in ast.walk(function):
        if not isinstance(node, ast.Return):
            continue
        if not isinstance(node.value, ast.Dict):
            like = allowed[0] if allowed else "a state of cell scope"
            raise RuleError(f'{owner}: return named changes, like {{"{like}": ...}}')
        for key in node.value.keys:
            name = key.value if isinstance(key, ast.Constant) else None
            if name not in allowed:
                raise RuleError(
                    f"{owner} changes {name!r}; it may change {', '.join(allowed) or 'nothing'}"
                )
            if name not in found:
                found.append(str(name))
    if not found:
        raise RuleError(f"{owner}: it changes nothing; leave the hook out")
    return tuple(found)


class _Plain(ast.NodeTransformer):
    """Turn ``self.x`` into ``x`` and ``return {"w": e}`` into ``return (e, ...)``."""

    def __init__(self, owner: str, rule: type[Rule], changed: tuple[str, ...], hook: str) -> None:
        self.owner, self.rule, self.changed, self.hook = owner, rule, changed, hook

    def visit_Attribute(self, node: ast.Attribute) -> Any:
        if isinstance(node.value, ast.Name) and node.value.id == "self":
            if node.attr not in self.rule.parameters:
                raise RuleError(
                    f"{self.owner}: self.{node.attr} is no parameter; parameters are "
                    f"{', '.join(self.rule.parameters)}"
                )
            return ast.Name(node.attr, node.ctx)
        return self.generic_visit(node)

    def visit_Return(self, node: ast.Return) -> Any:
        self.generic_visit(node)
        if self.hook == "factor" or not isinstance(node.value, ast.Dict):
            return node
        given = {
            key.value: value
            for key, value in zip(node.value.keys, node.value.values, strict=True)
            if isinstance(key, ast.Constant)
        }
        node.value = ast.Tuple(
            [given.get(name, ast.Constant(0.0)) for name in self.changed], ast.Load()
        )
        return node

    def visit_arg(self, node: ast.arg) -> ast.arg:
        return ast.arg(node.arg)


def _own_names(function: ast.FunctionDef) -> set[str]:
    """Return the names that a function gives values to."""
    names = (n for n in ast.walk(function) if isinstance(n, ast.Name))
    return {n.id for n in names if isinstance(n.ctx, ast.Store)}


def _no_globals(owner: str, function: ast.FunctionDef) -> None:
    """Refuse a hook that reads anything but its arguments, its own names and mathematics."""
    known = {a.arg for a in function.args.args} | _own_names(function) | ALLOWED | {"compiled"}
    for node in ast.walk(function):
        if isinstance(node, ast.Name) and node.id not in known:
            kind = "built-in" if hasattr(builtins, node.id) else "global name"
            raise RuleError(
                f"{owner}: it uses the {kind} {node.id!r}; a hook may use its arguments, self, "
                "its own names and math"
            )
