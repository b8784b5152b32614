"""From a rule to a compiled module: what is refused, what is the same, what is compiled again."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

import numpy as np
import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from plastic import impose
from plastic.engine import kernel
from plastic.engine.kernel import Rows, numbers_of, text_for
from plastic.errors import RuleError
from plastic.parameters import parameter
from plastic.rules._interface import Changes, Rule, state, trace, weight
from tests.engine.samples import Everything, OnlyPost, OnlyPre, Rated

COMPILED = (Everything, OnlyPost, OnlyPre, Rated)
SCALE = 3.0


def doubled(x: float) -> float:
    return 2 * x


def declared(**body: object) -> type[Rule]:
    """Return a rule with one of each kind of variable, and `body` over it."""
    whole = {
        "__doc__": "A rule.",
        "a": parameter(0.1, "1", source="invented"),
        "t": parameter(0.1, "1", source="invented"),
        "w": weight(1.0, low=0.0, high=2.0),
        "seen": state(0.0),
        "theta": state(0.0, scope="cell"),
        "o": trace("post", tau=20.0),
        **body,
    }
    return type("Wrong", (Rule,), {k: v for k, v in whole.items() if v is not None})


class Bad:
    """Hooks that ordinary Python would run, or not, and that are not compiled."""

    def uses_a_constant(self, o: float) -> Changes:
        return {"w": SCALE * o}

    def uses_a_function(self, o: float) -> Changes:
        return {"w": doubled(o)}

    def uses_a_builtin(self, o: float) -> Changes:
        return {"w": sum([o])}

    def remembers(self, o: float) -> Changes:
        return {"w": self.memory * o}  # type: ignore[attr-defined]

    def calls_itself(self, o: float) -> Changes:
        return {"w": self.helper(o)}  # type: ignore[attr-defined]

    def sets_a_parameter(self, o: float) -> Changes:
        self.a = o
        return {"w": o}

    def shadows_a_parameter(self, o: float) -> Changes:
        a = 2.0
        return {"w": a * self.a * o}

    def asks_for_a_parameter(self, t: float) -> Changes:
        return {"w": t}

    def changes_the_unknown(self, o: float) -> Changes:
        return {"v": o}

    def changes_the_cell(self, o: float) -> Changes:
        return {"w": o, "theta": o}

    def changes_a_trace(self, o: float) -> Changes:
        return {"o": o}

    def changes_an_input(self, o: float) -> Changes:
        return {"w": o}

    def returns_a_number(self, o: float) -> Changes:
        return o  # type: ignore[return-value]

    def returns_early(self, o: float) -> Changes:
        if o > 1:
            return  # type: ignore[return-value]
        return {"w": o}

    def changes_nothing(self, o: float) -> Changes:
        return {}

    def is_short(self, w: float) -> float:
        return w * SCALE


@pytest.mark.parametrize(
    ("hook", "function", "said"),
    [
        ("at_pre", Bad.uses_a_constant, "it uses the global name 'SCALE'; a hook may use its arg"),
        ("at_pre", Bad.uses_a_function, "it uses the global name 'doubled'"),
        ("at_pre", Bad.uses_a_builtin, "it uses the built-in 'sum'"),
        ("at_pre", Bad.remembers, r"self\.memory is no parameter; parameters are a, t$"),
        ("at_pre", Bad.calls_itself, r"self\.helper is no parameter"),
        ("at_pre", Bad.sets_a_parameter, r"\['a'\] name both a parameter and an argument or a"),
        ("at_pre", Bad.shadows_a_parameter, r"\['a'\] name both a parameter and"),
        ("at_pre", Bad.asks_for_a_parameter, r"\['t'\] name both a parameter and"),
        ("at_pre", Bad.changes_the_unknown, "changes 'v'; it may change w, seen$"),
        ("at_pre", Bad.changes_the_cell, "changes 'theta'; it may change w, seen$"),
        ("at_pre", Bad.changes_a_trace, "changes 'o'; it may change w, seen$"),
        ("cell_at_post", Bad.changes_an_input, "changes 'w'; it may change theta$"),
        ("at_pre", Bad.returns_a_number, 'return named changes, like {"w": ...}'),
        ("at_pre", Bad.returns_early, 'return named changes, like {"w": ...}'),
        ("cell_at_post", Bad.returns_a_number, 'return named changes, like {"theta": ...}'),
        ("at_pre", Bad.changes_nothing, "it changes nothing; leave the hook out"),
        ("at_pre", lambda self, o: {"w": o}, "write it as a method, with def"),
    ],
    ids=lambda x: getattr(x, "__name__", None) if callable(x) else None,
)
def test_what_cannot_be_compiled_is_refused(
    hook: str, function: Callable[..., Any], said: str
) -> None:
    with pytest.raises(RuleError, match=rf"^Wrong\.{hook}:? {said}"):
        text_for(declared(**{hook: function}))


def test_a_cell_hook_without_a_state_of_the_cell_may_change_nothing() -> None:
    for function, said in (
        (Bad.changes_an_input, "changes 'w'; it may change nothing"),
        (Bad.returns_a_number, "a state of cell scope"),
    ):
        with pytest.raises(RuleError, match=said):
            text_for(declared(theta=None, cell_at_post=function))


def test_a_factor_reads_weights_and_nothing_global() -> None:
    with pytest.raises(RuleError, match=r"Wrong\.factor: it uses the global name 'SCALE'"):
        text_for(declared(at_pre=Bad.changes_an_input, factor=Bad.is_short))


def test_a_hook_without_a_source_is_refused() -> None:
    space: dict[str, Any] = {}
    exec("def at_pre(self, o):\n    return {'w': o}", space)
    with pytest.raises(RuleError, match=r"Wrong\.at_pre: its source cannot be read"):
        text_for(declared(at_pre=space["at_pre"]))


def test_the_plain_rule_of_these_tests_is_not_refused() -> None:
    """The control of all refusals."""
    text = text_for(declared(at_pre=Bad.changes_an_input))
    assert "def at_pre(o, a, t):\n    return (o,)" in text


# ---- compiled and plain are one


def spikes(whole: bool) -> st.SearchStrategy[list[float]]:
    """Return rising times up to a second; whole ones meet each other and the readings."""
    times = st.integers(0, 60).map(lambda k: 10.0 * k) if whole else st.floats(0, 1000)
    return st.lists(times, max_size=25, unique=True).map(sorted)


@pytest.mark.parametrize("rule", COMPILED, ids=lambda rule: rule.__name__)
@given(data=st.data(), whole=st.booleans())
@settings(max_examples=25, deadline=None, suppress_health_check=[HealthCheck.too_slow])
def test_the_compiled_rule_does_what_its_methods_say(
    rule: type[Rule], data: st.DataObject, whole: bool
) -> None:
    times = {name: data.draw(spikes(whole)) for name in ("near", "far", "post")}
    post = times.pop("post")
    at = np.arange(0.0, 1060.0, 50.0)
    fast, slow = (impose(rule(), times, post, readings=at, compiled=c) for c in (True, False))
    assert list(fast) == list(slow)
    for name in slow:
        np.testing.assert_allclose(fast[name], slow[name], rtol=1e-12, atol=1e-12)


def test_the_rules_compared_use_all_that_a_rule_may_do() -> None:
    """A control: on dense trains every variable moves and every bound that is near is reached."""
    rng = np.random.default_rng(3)
    pre, post = (np.sort(rng.uniform(0, 1000, 60)) for _ in range(2))
    just_after = np.nextafter(np.union1d(pre, post), np.inf)
    found = {rule: impose(rule(), pre, post, readings=just_after) for rule in COMPILED}
    assert all(float(data[name].std()) > 1e-6 for data in found.values() for name in data)
    reached = [found[Everything].w.min(), found[Everything].w.max(), found[Everything].u.max()]
    assert reached == [pytest.approx(bound, rel=1e-12) for bound in (0.98, 1.1, 2.025)]
    assert {hook for rule in COMPILED for hook in rule.hooks()} == set(kernel.HOOKS)


def test_rows_and_numbers_are_in_the_order_of_declaration() -> None:
    rows, numbers = Rows.of(Everything), numbers_of(Everything(start=3.0, highest=9.0))
    assert rows == Rows(("w", "u", "seen"), ("theta",), ("r", "r_last"), ("o", "o_last"))
    assert numbers.parameters.tolist() == [0.02, 0.015, 18.0, 900.0, 3.0, 9.0]
    assert (numbers.starts.tolist(), numbers.cell_starts.tolist()) == ([1.0, 3.0, 0.0], [3.0])
    assert (numbers.low.tolist(), numbers.high.tolist()) == ([0.98, 0.0], [1.1, 9.0])
    assert (numbers.taus_pre.tolist(), numbers.taus_post.tolist()) == ([18, 900], [31, 900])
    assert (numbers.window, numbers_of(Rated(window=7)).window) == (0.0, 7.0)
