"""Faults made mechanically from a rule, and which law catches each: `python -m tests.laws.mutants`.

Every operator, sign, constant, name and term of the hooks, and every bound, time constant, start
and jump of the declarations is changed, one at a time. A fault that no law and no claim catches is
listed as a survivor.
"""

from __future__ import annotations

import argparse
import ast
import copy
import inspect
import sys
from collections.abc import Callable, Iterator
from dataclasses import dataclass

from plastic import rules
from plastic.checking.check import check_law, laws_about
from plastic.errors import PlasticError
from plastic.rules._interface import HOOKS, Rule

#: laws that catch most, and quickly, come first; the compiled rule is compared elsewhere
FIRST = ("claims", "time_units", "both_sides", "sign", "bounds", "amplitudes", "everything_counts")
ORDER = [*FIRST, *(n for n in laws_about("rule") if n not in (*FIRST, "compiled"))]
OTHER = {
    ast.Add: ast.Sub, ast.Sub: ast.Add, ast.Mult: ast.Div, ast.Div: ast.Mult, ast.Pow: ast.Mult,
    ast.Lt: ast.GtE, ast.Gt: ast.LtE,
}  # fmt: skip
#: faults that change nothing, and why
EXPLAINED = {
    **{
        f"{hook}: self.mu -> self.{name}": "x to the power 0 is 1: the test of mu saves time only"
        for hook in ("at_pre", "at_post")
        for name in ("a_plus", "a_minus")
    },
    "w: low=0.0 -> -1.0": "a weight that shrinks in proportion never passes 0",
    "flow: 600.0 -> 300.0": "e^300 is as far above every bound as e^600",
}
Edit = Callable[[], None]


@dataclass(frozen=True)
class Mutant:
    """A rule with one fault: the class, or why the class cannot be made at all."""

    fault: str
    rule: type[Rule] | None
    refused: str = ""


def mutants(rule: type[Rule]) -> Iterator[Mutant]:
    """Yield every mutant of a rule."""
    tree = ast.parse(inspect.getsource(inspect.getmodule(rule)))  # type: ignore[arg-type]
    total = len(list(_edits(copy.deepcopy(tree), rule)))
    for k in range(total):
        changed = copy.deepcopy(tree)
        fault, edit = list(_edits(changed, rule))[k]
        edit()
        yield _made(changed, rule, fault)


def _made(tree: ast.Module, rule: type[Rule], fault: str) -> Mutant:
    space: dict[str, object] = {"__name__": f"mutant_of_{rule.__name__}"}
    try:
        exec(compile(ast.fix_missing_locations(tree), rule.__name__, "exec"), space)
        made = space[rule.__name__]
        assert isinstance(made, type)
        assert issubclass(made, Rule)
        made()
        for name in made.sets:
            made.from_set(name)
    except (PlasticError, ArithmeticError) as error:
        return Mutant(fault, None, str(error))
    return Mutant(fault, made)


def _edits(tree: ast.Module, rule: type[Rule]) -> Iterator[tuple[str, Edit]]:
    (body,) = (n for n in tree.body if isinstance(n, ast.ClassDef) and n.name == rule.__name__)
    for part in body.body:
        if isinstance(part, ast.FunctionDef) and part.name in HOOKS:
            yield from _in_hook(part, rule)
        elif isinstance(part, ast.Assign) and isinstance(part.value, ast.Call):
            yield from _in_declaration(part, rule)


def _in_hook(hook: ast.FunctionDef, rule: type[Rule]) -> Iterator[tuple[str, Edit]]:
    arguments = [a.arg for a in hook.args.args[1:]]
    for parent in ast.walk(hook):
        if isinstance(parent, ast.arg):
            continue
        for field, node in _expressions(parent):
            for words, new in _others(node, rule, arguments):
                told = f"{hook.name}: {ast.unparse(node)} -> {words}"
                yield told, lambda parent=parent, field=field, new=new: _put(parent, field, new)


def _expressions(parent: ast.AST) -> Iterator[tuple[tuple[str, int | None], ast.expr]]:
    for name, value in ast.iter_fields(parent):
        if name in ("annotation", "returns", "keys", "func", "args" if _is_doc(parent) else ""):
            continue
        if isinstance(value, ast.expr):
            yield (name, None), value
        elif isinstance(value, list):
            yield from (((name, k), v) for k, v in enumerate(value) if isinstance(v, ast.expr))


def _is_doc(node: ast.AST) -> bool:
    return isinstance(node, ast.Expr)


def _put(parent: ast.AST, field: tuple[str, int | None], new: ast.expr) -> None:
    name, k = field
    if k is None:
        setattr(parent, name, new)
    else:
        getattr(parent, name)[k] = new


def _others(
    node: ast.expr, rule: type[Rule], arguments: list[str]
) -> Iterator[tuple[str, ast.expr]]:
    """Yield what might stand in the place of an expression by mistake."""
    made: list[ast.expr] = []
    if isinstance(node, ast.BinOp):
        made += [ast.BinOp(node.left, OTHER[type(node.op)](), node.right), node.left, node.right]
    elif isinstance(node, ast.UnaryOp):
        made.append(node.operand)
    elif isinstance(node, ast.Compare):
        made.append(ast.Compare(node.left, [OTHER[type(node.ops[0])]()], node.comparators))
    elif isinstance(node, ast.Constant) and isinstance(node.value, (int, float)):
        made += [ast.Constant(2 * node.value + (node.value == 0))]
        made += [ast.Constant(0.5 * node.value)] if node.value else []
    elif isinstance(node, ast.Attribute) and node.attr in rule.parameters:
        unit = rule.parameters[node.attr].unit
        alike = [n for n, p in rule.parameters.items() if p.unit == unit and n != node.attr]
        made += [ast.Attribute(node.value, n, ast.Load()) for n in alike[:2]]
    elif isinstance(node, ast.Name) and node.id in arguments and isinstance(node.ctx, ast.Load):
        made += [ast.Name(n, ast.Load()) for n in arguments if n != node.id][:1]
        made.append(ast.UnaryOp(ast.USub(), node))
    for new in made:
        yield ast.unparse(ast.fix_missing_locations(copy.deepcopy(new))), copy.deepcopy(new)


def _in_declaration(line: ast.Assign, rule: type[Rule]) -> Iterator[tuple[str, Edit]]:
    call = line.value
    assert isinstance(call, ast.Call)
    name = ast.unparse(line.targets[0])
    if not isinstance(call.func, ast.Name) or call.func.id not in ("weight", "state", "trace"):
        return
    times = [n for n, p in rule.parameters.items() if p.unit == "ms"]
    for word in call.keywords:
        told = ast.unparse(word.value)
        for new in _declared_otherwise(word, times):
            shown = f"{name}: {word.arg}={told} -> {ast.unparse(new)}"
            yield shown, lambda word=word, new=new: setattr(word, "value", new)
    first = call.args[0]
    if isinstance(first, ast.Constant) and first.value in ("pre", "post"):
        side = ast.Constant("post" if first.value == "pre" else "pre")
        yield f"{name}: follows {side.value}", lambda: call.args.__setitem__(0, side)
        if not any(word.arg == "jump" for word in call.keywords):
            word = ast.keyword("jump", ast.Constant("set"))
            yield f"{name}: jump=set", lambda: call.keywords.append(word)


def _declared_otherwise(word: ast.keyword, times: list[str]) -> list[ast.expr]:
    value = word.value.value if isinstance(word.value, ast.Constant) else None
    if word.arg == "tau":
        return [*[ast.Constant(n) for n in times if n != value][:2], ast.Constant(20.0)]
    if word.arg == "jump":
        return [ast.Constant("add" if value == "set" else "set")]
    if word.arg == "low":
        return [ast.Constant(-1.0), ast.Constant(0.5)]
    if word.arg == "high":
        return [ast.Constant(1e300), ast.Constant(1.0)]
    return []


def catcher(rule: type[Rule], examples: int) -> tuple[str, int]:
    """Return the first law that a rule breaks, and the spikes of its smallest case; or nothing."""
    for name in ORDER:
        try:
            verdict = check_law(rule, name, examples=examples)
        except PlasticError as error:
            return f"refused: {error}"[:60], 0
        if not verdict.ok:
            shown = verdict.broken.case if verdict.broken and verdict.broken.case else verdict.case
            return name, shown.spikes if shown else 0
    return "", 0


def main() -> None:
    """Print the table of mutants."""
    parser = argparse.ArgumentParser(description=__doc__)
    parser.add_argument("rules", nargs="*", default=rules.names())
    parser.add_argument("--examples", type=int, default=60)
    given = parser.parse_args()
    caught = survived = 0
    for name in given.rules:
        for mutant in mutants(rules.find(name)):
            law, spikes = "refused when declared", 0
            if mutant.rule is not None:
                law, spikes = catcher(mutant.rule, given.examples)
            caught, survived = caught + bool(law), survived + (not law)
            told = law or f"SURVIVES {EXPLAINED.get(mutant.fault, '')}"
            print(f"{name:24} {mutant.fault:60} {told:22} {spikes}", flush=True)
    share = caught / max(caught + survived, 1)
    print(f"{caught + survived} faults, {caught} caught ({share:.1%}), {survived} survive")
    sys.exit(0)


if __name__ == "__main__":
    main()
