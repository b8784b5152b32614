"""What is compiled is what is written."""

from __future__ import annotations

from typing import Any, ClassVar

import numpy as np

from plastic.engine.imposed import impose
from plastic.errors import RuleError
from plastic.laws._interface import Broken, Case, Law, Row
from plastic.laws._trains import dense, versions


class Compiled(Law):
    """The compiled rule does what its plain Python does, with every published set.

    Compiling takes seconds, once: it is tried on the same dense trains for every set.
    """

    drawn: ClassVar[bool] = False

    def broken(self, case: Case) -> Broken | None:
        """Compare every variable at ten times."""
        for name, rule in versions(type(case.part)):
            *pre, post = dense(7, 30.0, 1500.0)
            at = np.linspace(0.0, 1800.0, 10)
            shown = Case(rule, tuple(pre), post, 1800.0)
            plain, compiled = (_run(rule, pre, post, at, way) for way in (False, True))
            if isinstance(compiled, str):
                return Broken(f"it cannot be compiled: {compiled}", case=Case(rule))
            for variable in plain.data_vars:
                one, other = plain[variable].values, compiled[variable].values
                apart = ~np.isclose(one, other, rtol=1e-9, atol=1e-12)
                if apart.any():
                    k = np.argmax(apart)
                    row = Row(str(variable), float(one.flat[k]), float(other.flat[k]))
                    says = f"with the parameters {name!r} the compiled rule differs"
                    return Broken(says, (row,), "plain", "compiled", shown)
        return None


def _run(rule: Any, pre: list[Any], post: Any, at: Any, compiled: bool) -> Any:
    """Return the outcome, or why the rule cannot be compiled."""
    inputs = {str(k): list(train) for k, train in enumerate(pre)}
    try:
        return impose(rule, inputs, list(post), end=1800.0, readings=at, compiled=compiled)
    except RuleError as error:
        if not compiled:
            raise
        return str(error)
