"""What holds for every learning rule, whoever wrote it.

Each law is run over every member of the catalogue, and over every published parameter set where
parameters matter. A new rule file is tested here without an edit.
"""

from __future__ import annotations

import inspect
import math

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from plastic import impose, rules
from plastic.catalogue import class_name
from plastic.parameters import ParameterError
from plastic.rules._interface import Rule
from plastic.units import INTERNAL

NAMES = rules.names()
SETS = [(name, chosen) for name in NAMES for chosen in ["", *rules.find(name).sets]]
IDS = [f"{name}-{chosen or 'default'}" for name, chosen in SETS]
RULES = [rules.find(name) for name in NAMES]
every_rule = pytest.mark.parametrize("rule", RULES, ids=NAMES)
resting_rule = pytest.mark.parametrize(
    "rule", [rule for rule in RULES if not rule.in_silence], ids=lambda rule: rule.__name__
)
every_set = pytest.mark.parametrize(("name", "chosen"), SETS, ids=IDS)
briefly = settings(max_examples=25, deadline=None)

#: rising times on a dyadic grid: shifting them by whole milliseconds is exact
TIMES = st.lists(st.integers(0, 64 * 500), unique=True, max_size=12).map(
    lambda ticks: np.array(sorted(ticks), dtype=float) / 64
)


def built(name: str, chosen: str) -> Rule:
    rule = rules.find(name)
    return rule.from_set(chosen) if chosen else rule()


def strongest(rule: type[Rule]) -> Rule:
    """Return the rule with every amplitude as large as its declaration allows, at most 1e3."""
    return rule(**{name: min(rule.parameters[name].high, 1e3) for name in rule.amplitudes})


def variables(rule: Rule, *times: object, **options: object) -> dict[str, np.ndarray]:
    found = impose(rule, *times, **options)  # type: ignore[arg-type]
    return {str(name): found[name].values for name in found.data_vars}


def dense(seed: int, rate: float = 40.0, span: float = 2000.0) -> tuple[dict[str, object], object]:
    """Return trains of three inputs and a cell, with spikes that coincide."""
    draw = np.random.default_rng(seed)
    post, *pre = (
        np.unique(draw.uniform(0, span, draw.poisson(rate * span / 1000))) for _ in range(4)
    )
    pre[0] = np.union1d(pre[0], post[::5])
    pre[1] = np.union1d(pre[1], pre[2][::3])
    return {"a": pre[0], "b": pre[1], "c": pre[2]}, post


@pytest.mark.parametrize("name", NAMES)
def test_the_file_the_name_and_the_class_agree(name: str) -> None:
    rule = rules.find(name)
    assert issubclass(rule, Rule)
    assert rule.__name__ == class_name(name)
    assert rule.__module__.split(".")[-1] == name


@every_rule
def test_it_says_what_it_is_what_it_computes_and_what_to_cite(rule: type[Rule]) -> None:
    assert vars(rule).get("__doc__")
    assert rule.summary().endswith(".")
    assert 10 < len(rule.summary()) <= 100
    assert rule.equation
    assert any(name in rule.equation for name in rule.parameters)
    assert rule.references
    assert all(any(c.isdigit() for c in reference) for reference in rule.references)


@every_rule
def test_every_hook_says_what_it_does(rule: type[Rule]) -> None:
    assert [h for h in rule.hooks() if not inspect.getdoc(getattr(rule, h))] == []


@every_rule
def test_every_parameter_has_a_unit_a_source_and_a_default_within_bounds(rule: type[Rule]) -> None:
    for name, declared in rule.parameters.items():
        assert declared.unit == "1" or declared.unit in INTERNAL.values(), name
        assert declared.source.strip(), name
        assert math.isfinite(declared.default), name
        assert declared.low <= declared.default <= declared.high, name


@every_rule
def test_a_parameter_outside_its_bounds_is_refused(rule: type[Rule]) -> None:
    for name, declared in rule.parameters.items():
        for bound, away in ((declared.low, -math.inf), (declared.high, math.inf)):
            beyond = math.nextafter(bound, away) if math.isfinite(bound) else math.nan
            with pytest.raises(ParameterError, match=name):
                rule(**{name: beyond})


@every_rule
def test_no_name_is_both_a_parameter_and_a_variable(rule: type[Rule]) -> None:
    kinds = [rule.parameters, rule.weights, rule.states, rule.traces]
    names = [name for kind in kinds for name in kind]
    assert len(names) == len(set(names))


@every_rule
def test_a_dose_is_a_count(rule: type[Rule]) -> None:
    assert rule.dose is None or (isinstance(rule.dose, int) and rule.dose > 0)


@every_rule
def test_amplitudes_scale_the_change(rule: type[Rule]) -> None:
    """What a population spreads together must set the size of a change and nothing else."""
    assert rule.amplitudes
    small = {n: 1e-4 * rule.parameters[n].default for n in rule.amplitudes}
    times = dense(seed=3, rate=10, span=1000)
    one, two = (
        variables(rule(**{n: k * v for n, v in small.items()}), *times, compiled=False)["factor"]
        for k in (1, 2)
    )
    changed = one[:, -1] - 1
    assert np.abs(changed).min() > 0
    np.testing.assert_allclose((two[:, -1] - 1) / changed, 2, rtol=1e-4)


@every_set
def test_every_set_can_be_built_and_starts_within_its_bounds(name: str, chosen: str) -> None:
    rule = built(name, chosen)
    for declared in rule.weights.values():
        low, start, high = map(rule.number, (declared.low, declared.start, declared.high))
        assert low <= start <= high


@every_set
def test_the_factor_is_one_at_the_start(name: str, chosen: str) -> None:
    rule = built(name, chosen)
    starts = {n: rule.number(w.start) for n, w in rule.weights.items()}
    assert rule.factor(**starts) == 1.0


@every_set
def test_silence_changes_nothing_unless_the_rule_says_why(name: str, chosen: str) -> None:
    rule = built(name, chosen)
    found = variables(rule, [], [], end=3.6e6, readings=[0, 1, 3.6e6], compiled=False)
    still = {variable: bool((v == v.T[0:1].T).all()) for variable, v in found.items()}
    assert all(still.values()) == (not rule.in_silence)
    assert still["factor"] == (not rule.in_silence)


@every_set
def test_the_compiled_rule_is_the_plain_one(name: str, chosen: str) -> None:
    """Random trains with coincident spikes; the reference loop calls the methods as they stand."""
    for seed in range(2):
        times, at = dense(seed), np.linspace(0, 2200, 12)
        plain, compiled = (
            variables(built(name, chosen), *times, readings=at, compiled=way)
            for way in (False, True)
        )
        assert plain.keys() == compiled.keys()
        for variable, values in plain.items():
            np.testing.assert_allclose(
                compiled[variable], values, rtol=1e-10, atol=1e-10, err_msg=variable
            )
        assert np.ptp(plain["factor"]) > 0  # the trains do teach something


@every_rule
def test_the_strongest_rule_compiled_is_the_plain_one(rule: type[Rule]) -> None:
    """Bounds are touched all the time."""
    times, at = dense(seed=9), np.linspace(0, 2200, 12)
    plain, compiled = (
        variables(strongest(rule), *times, readings=at, compiled=way) for way in (False, True)
    )
    for variable, values in plain.items():
        np.testing.assert_allclose(compiled[variable], values, rtol=1e-10, atol=1e-10)


@every_rule
@briefly
@given(pre=TIMES, other=TIMES, post=TIMES)
def test_bounds_hold_whatever_the_spikes(
    rule: type[Rule], pre: np.ndarray, other: np.ndarray, post: np.ndarray
) -> None:
    strong = strongest(rule)
    at = np.arange(0.0, 1001.0, 20.0)
    found = variables(strong, {"a": pre, "b": other}, post, readings=at, compiled=False)
    for name, declared in rule.weights.items():
        assert (found[name] >= strong.number(declared.low)).all()
        assert (found[name] <= strong.number(declared.high)).all()
    assert np.isfinite(found["factor"]).all()


@every_rule
def test_a_bound_is_reached(rule: type[Rule]) -> None:
    """The control of the law above: without bounds these trains would pass them."""
    strong = strongest(rule)
    found = variables(strong, *dense(seed=1), readings=np.arange(0.0, 2000, 10), compiled=False)
    touched = [
        (found[n] == strong.number(w.low)).any() or (found[n] == strong.number(w.high)).any()
        for n, w in rule.weights.items()
    ]
    assert any(touched)


@resting_rule
@briefly
@given(pre=TIMES, post=TIMES, late=st.integers(1, 10**6))
def test_the_hour_does_not_matter(
    rule: type[Rule], pre: np.ndarray, post: np.ndarray, late: int
) -> None:
    """Shifting every spike changes nothing: rules that rest in silence know lags, not times."""
    first = variables(rule(), pre, post, readings=[700], compiled=False)
    shifted = variables(rule(), pre + late, post + late, readings=[700 + late], compiled=False)
    for variable, values in first.items():
        np.testing.assert_allclose(shifted[variable], values, rtol=1e-9, atol=1e-12)


@every_rule
@briefly
@given(a=TIMES, b=TIMES, post=TIMES)
def test_the_order_of_inputs_does_not_matter(
    rule: type[Rule], a: np.ndarray, b: np.ndarray, post: np.ndarray
) -> None:
    there = impose(rule(), {"a": a, "b": b}, post, readings=[700], compiled=False)
    back = impose(rule(), {"b": b, "a": a}, post, readings=[700], compiled=False)
    assert there.equals(back.reindex_like(there))


@every_rule
@briefly
@given(pre=TIMES, post=TIMES, cuts=TIMES)
def test_a_reading_changes_nothing(
    rule: type[Rule], pre: np.ndarray, post: np.ndarray, cuts: np.ndarray
) -> None:
    """A quiet gap may be cut anywhere, and a reading may fall on a spike."""
    once = variables(rule(), pre, post, readings=[900], compiled=False)
    often = variables(rule(), pre, post, readings=[*cuts, 900.0], compiled=False)
    for variable, values in once.items():
        np.testing.assert_allclose(often[variable].T[-1], values.T[-1], rtol=1e-12, atol=1e-14)
