"""The law of compiled code."""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest
import xarray as xr

from plastic import rules
from plastic.laws import Case, compiled
from tests.laws.faulty import FAULTS
from tests.laws.trying import assert_caught, assert_kept, told


def test_a_compiled_rule_keeps_it() -> None:
    assert_kept(rules.find("pair_timing"), "compiled")


def test_what_cannot_be_compiled_is_caught_with_the_reason() -> None:
    rule = FAULTS["NotPlainPython"][0]
    assert_caught(rule, "compiled")
    says = told("compiled", Case(rule())).says
    assert says.startswith("it cannot be compiled: NotPlainPython.at_post: it uses the global name")


def test_a_compiled_rule_that_differs_is_told(monkeypatch: pytest.MonkeyPatch) -> None:
    """The compiled road is made to say a millionth more."""
    rule = rules.find("pair_timing")
    real = compiled.impose

    def off(*given: Any, compiled: bool, **options: Any) -> xr.Dataset:
        found = real(*given, compiled=False, **options)
        return found * (1 + 1e-6 * compiled)

    monkeypatch.setattr(compiled, "impose", off)
    broken = told("compiled", Case(rule()))
    assert broken.says == "with the parameters 'default' the compiled rule differs"
    np.testing.assert_allclose(broken.rows[0].other / broken.rows[0].one, 1 + 1e-6, rtol=1e-12)
