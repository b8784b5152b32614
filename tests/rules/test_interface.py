"""The rule interface: what a declaration may say, and how a wrong one is refused."""

from __future__ import annotations

import math

import pytest

from plastic.errors import RuleError
from plastic.parameters import parameter
from plastic.rules._interface import HOOKS, Changes, Rule, State, Trace, state, trace, weight

FREE = {"low": -math.inf, "high": math.inf}


class Counter(Rule):
    """A rule that counts."""

    step: float = parameter(0.5, "1", source="ours")
    begin: float = parameter(2.0, "1", source="ours")
    tau: float = parameter(20.0, "ms", low=1, source="ours")

    amplitudes = ("step",)

    v = weight("begin", low=0.0, high=100.0)
    u = weight(1.0, low=0.0, high=100.0)
    seen = state(0.0)
    level = state("begin", scope="cell")
    x = trace("pre", tau="tau", jump="set")
    y = trace("post", tau=30.0)

    def at_pre(self, x: float, y: float, seen: float, level: float, t: float) -> Changes:
        """Everything of an input hook."""
        return {"v": self.step * x, "seen": 1.0}

    def at_post(self, x: float, amplitude: float) -> Changes:
        """A second hook."""
        return {"u": self.step * x * amplitude}

    def cell_at_post(self, y: float, level: float, t: float) -> Changes:
        """Everything of a cell hook."""
        return {"level": self.step * y}

    def flow(self, dt: float, v: float, seen: float) -> Changes:
        """An input's flow."""
        return {"v": 0.0 * dt}

    def cell_flow(self, dt: float, level: float) -> Changes:
        """The cell's flow."""
        return {"level": 0.0 * dt}


def declared(**body: object) -> type[Rule]:
    """Return a rule of one weight and one hook, with `body` over it."""

    def at_pre(self: Rule) -> Changes:
        return {"w": 0.0}

    whole = {"__doc__": "A rule.", "w": weight(1.0, low=0.0, high=2.0), "at_pre": at_pre, **body}
    return type("Wrong", (Rule,), {k: v for k, v in whole.items() if v is not None})


def test_the_plain_declaration_of_these_tests_is_accepted() -> None:
    assert list(declared().weights) == ["w"]


def test_variables_are_found_by_kind_and_know_their_names() -> None:
    assert {n: w.name for n, w in Counter.weights.items()} == {"v": "v", "u": "u"}
    assert Counter.states == {
        "seen": State(0.0, "input", "seen"),
        "level": State("begin", "cell", "level"),
    }
    assert Counter.traces == {
        "x": Trace("pre", "tau", "set", "x"),
        "y": Trace("post", 30.0, "add", "y"),
    }


def test_variables_are_no_attributes_of_the_instance() -> None:
    assert not {"v", "seen", "level", "x"} & set(dir(Counter()))


def test_hooks_list_their_arguments_without_self() -> None:
    assert Counter.hooks() == {
        "at_pre": ("x", "y", "seen", "level", "t"),
        "at_post": ("x", "amplitude"),
        "cell_at_post": ("y", "level", "t"),
        "flow": ("dt", "v", "seen"),
        "cell_flow": ("dt", "level"),
    }


def test_a_declared_number_is_itself_or_the_parameter_it_names() -> None:
    rule = Counter(begin=3.0)
    assert (rule.number(1.5), rule.number("begin")) == (1.5, 3.0)


def test_the_default_factor_is_the_first_weight_over_its_start() -> None:
    rule = Counter(begin=4.0)
    assert rule.factor(v=4.0, u=9.0) == 1.0
    assert rule.factor(v=6.0, u=9.0) == 1.5


def test_the_summary_is_the_first_line() -> None:
    assert Counter.summary() == "A rule that counts."


def test_a_rule_without_a_weight_is_refused() -> None:
    with pytest.raises(RuleError, match="Wrong: a rule needs at least one weight"):
        declared(w=None)


def test_a_rule_without_a_hook_is_refused() -> None:
    with pytest.raises(RuleError, match="Wrong: a rule needs a hook; known hooks are at_pre, "):
        declared(at_pre=None)


def test_a_rule_is_final() -> None:
    with pytest.raises(RuleError, match="Heir: a rule needs at least one weight"):
        type("Heir", (Counter,), {})


@pytest.mark.parametrize("name", ["at_spike", "at_presynaptic", "cell_at_pre", "cell_step"])
def test_an_unknown_hook_is_refused(name: str) -> None:
    with pytest.raises(RuleError, match=rf"Wrong\.{name}: no such hook; known hooks are at_pre"):
        declared(**{name: lambda self: {}})


def test_the_refusal_of_a_hook_lists_them_all() -> None:
    with pytest.raises(RuleError) as caught:
        declared(at_spike=lambda self: {})
    assert all(hook in str(caught.value) for hook in HOOKS)


def wants_r1(self: Rule, r1: float) -> Changes:
    return {"w": r1}


def wants_theta(self: Rule, theta: float) -> Changes:
    return {"theta": theta}


def wants_w(self: Rule, w: float) -> Changes:
    return {"w": w}


def wants_dt(self: Rule, dt: float) -> Changes:
    return {"w": dt}


def wants_amplitude(self: Rule, amplitude: float) -> Changes:
    return {"w": amplitude}


OF_CELL = {"theta": state(0.0, scope="cell")}
OF_PRE = {"r1": trace("pre", tau=20.0)}


@pytest.mark.parametrize(
    ("body", "said"),
    [
        ({"at_pre": wants_r1}, r"at_pre: nothing is called 'r1' there; known names are t, w$"),
        ({"at_pre": wants_dt}, r"at_pre: nothing is called 'dt' there; known names are t, w$"),
        ({"at_pre": wants_amplitude}, "at_pre: nothing is called 'amplitude' there"),
        ({"flow": wants_r1, **OF_PRE}, "flow: nothing is called 'r1' there"),
        ({"flow": wants_theta, **OF_CELL}, "flow: nothing is called 'theta' there"),
        ({"cell_flow": wants_w}, "cell_flow: nothing is called 'w' there"),
        ({"cell_at_post": wants_w}, "cell_at_post: nothing is called 'w' there"),
        ({"cell_at_post": wants_r1, **OF_PRE}, "cell_at_post: nothing is called 'r1' there"),
    ],
    ids=[
        "undeclared",
        "dt at an event",
        "amplitude before a spike of the cell",
        "trace in flow",
        "cell in flow",
        "weight in cell flow",
        "weight at the cell",
        "pre trace at the cell",
    ],
)
def test_an_argument_that_nobody_provides_is_refused(body: dict[str, object], said: str) -> None:
    with pytest.raises(RuleError, match=said):
        declared(**body)


@pytest.mark.parametrize(
    "body",
    [
        {"w": weight(1.0, low="w_min", high=2.0)},
        {"w": weight(1.0, low=0.0, high="w_max")},
        {"w": weight("w_0", low=0.0, high=2.0)},
        {"r1": trace("pre", tau="tau_plus")},
        {"theta": state("theta_0", scope="cell")},
    ],
    ids=["low", "high", "start", "tau", "start of a state"],
)
def test_a_number_that_names_no_parameter_is_refused(body: dict[str, object]) -> None:
    with pytest.raises(
        RuleError, match=r"Wrong: '(w|tau|theta)_[a-z0]+' is no parameter of the rule"
    ):
        declared(**body)


def test_an_amplitude_that_is_no_parameter_is_refused() -> None:
    with pytest.raises(RuleError, match="Wrong: amplitude 'a_plus' is no parameter of the rule"):
        declared(amplitudes=("a_plus",))


def test_a_rate_power_that_is_of_no_parameter_is_refused() -> None:
    with pytest.raises(RuleError, match="Wrong: rate power 'eta' is no parameter of the rule"):
        declared(rate_powers={"eta": -2})


def test_an_exemption_without_a_reason_is_refused() -> None:
    with pytest.raises(RuleError, match="Wrong: the exemption from 'silence' needs a reason"):
        declared(exempt={"silence": " "})


def test_a_rule_that_reads_rates_needs_its_window() -> None:
    with pytest.raises(RuleError, match="needs the parameter 'window'"):
        declared(reads="rates")


def test_a_trace_follows_pre_or_post() -> None:
    with pytest.raises(RuleError, match="a trace follows 'pre' or 'post', not 'voltage'"):
        trace("voltage", tau=20.0)  # type: ignore[arg-type]


def test_a_trace_adds_or_sets() -> None:
    with pytest.raises(RuleError, match="a trace's jump is 'add' or 'set', not 'grow'"):
        trace("pre", tau=20.0, jump="grow")  # type: ignore[arg-type]


def test_a_state_belongs_to_an_input_or_to_the_cell() -> None:
    with pytest.raises(RuleError, match="cells"):
        declared(theta=state(0.0, scope="cells"))  # type: ignore[arg-type]
