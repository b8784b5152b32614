"""The loop's own text runs as it stands, learns nothing, and is what every rule gets."""

from __future__ import annotations

import ast
import difflib
import inspect
import re
from collections.abc import Iterator
from contextlib import contextmanager
from typing import Any

import numpy as np
import pytest

from plastic.engine import steps, template
from plastic.engine.assembly import empty_log
from plastic.engine.kernel import text_for
from plastic.engine.layout import Log
from plastic.rules.pair_timing import PairTiming
from plastic.rules.triplet_timing import TripletTiming
from tests.engine.scenes import Trial, pairings, pure


@contextmanager
def plain() -> Iterator[None]:
    """Let everything compiled be ordinary Python; wrapped integers are meant to overflow."""
    with pytest.MonkeyPatch.context() as patch, np.errstate(over="ignore"):
        for module in (steps, template):
            for name, value in list(vars(module).items()):
                if hasattr(value, "py_func"):
                    patch.setattr(module, name, value.py_func)
        yield


def open_fields(arrays: Any) -> Any:
    """Return a named tuple whose records may be read as ``record.field`` in ordinary Python."""
    return type(arrays)(*(a.view(np.recarray) if a.dtype.names else a for a in arrays))


IDLE = PairTiming(a_plus=0, a_minus=0)
TRIAL = Trial(
    IDLE,
    pure("dendrite_width"),
    times=pairings(2, 1050.0, first=20.0),  # expression ticks once in between
    end=1150.0,
    readings=np.arange(0.0, 1150.0, 50.0),
)


def run_template(trial: Trial) -> Log:
    """Run the template as it stands, in ordinary Python."""
    wiring, cells = trial.wiring(), trial.population()
    log = empty_log(cells, wiring, 1)
    opened = map(open_fields, (wiring, cells, log))
    with plain():
        assert template.run_cells(*opened, np.zeros(1, np.int64)) == trial.cells
    return log


# ---- as it stands


def test_it_runs_as_ordinary_python_and_learns_nothing() -> None:
    log = run_template(TRIAL)
    assert (log.ended["spikes"] >= 4).all()
    for left in (log.variables, log.factor, log.expressed, log.diameter):
        assert left.size
        assert (left == 1).all()


def test_a_generated_module_takes_the_same_steps() -> None:
    """A rule whose amplitudes are 0, compiled, against the template in ordinary Python."""
    made, own = TRIAL.compiled(), run_template(TRIAL)
    assert made.spike_step.tolist() == own.spike_step.tolist()
    assert made.ended.tolist() == own.ended.tolist()
    for name in ("variables", "factor", "expressed", "diameter"):
        assert getattr(made, name).tolist() == getattr(own, name).tolist()


def function_of(text: str, name: str) -> ast.FunctionDef:
    found = (n for n in ast.parse(text).body if isinstance(n, ast.FunctionDef) and n.name == name)
    return next(found)


def marks(text: str) -> list[str]:
    """Return the numbered comments of the loop."""
    return re.findall(r"^ +# \d\. .*$", text, re.MULTILINE)


def test_the_generated_text_has_the_same_step_loop() -> None:
    own = inspect.getsource(template)
    assert re.findall(r"(\d)\. ", " ".join(marks(own))) == list("12345")
    for rule in (PairTiming, TripletTiming):
        text = text_for(rule)
        assert marks(text) == marks(own)
        for name in ("run_cells", "run_imposed", "run_cell"):
            same = (ast.unparse(function_of(t, name).args) for t in (own, text))
            assert len(set(same)) == 1


def test_two_rules_differ_in_their_hooks_only() -> None:
    """Beyond the marks, every line that differs feeds a hook or adds what it changed."""
    one, other = (
        text_for(rule).split("# ---- end of the rule ----")[1].split("\n")
        for rule in (PairTiming, TripletTiming)
    )
    lines = [line[2:].strip() for line in difflib.ndiff(one, other) if line[0] in "+-"]
    assert lines
    assert all("changes" in line for line in lines)
