"""Strategies draw what declarations allow, and shrink to what is simple."""

from __future__ import annotations

from itertools import pairwise

import pytest
from hypothesis import find, given, settings
from hypothesis import strategies as st

from plastic import laws, routes, rules
from plastic.checking import strategies
from plastic.laws import Case
from plastic.laws._cells import PassiveCell
from plastic.laws._interface import Times
from plastic.protocols.pairing import Pairing
from plastic.rules._interface import Rule, weight
from tests.laws.faulty import Sound, variant

briefly = settings(max_examples=40, deadline=None, database=None)
calm = settings(max_examples=300, deadline=None, database=None)


@briefly
@given(trains=strategies.spike_trains(inputs=2, events=7, gap=100.0))
def test_trains_rise_on_a_grid_of_eighths(trains: tuple[Times, ...]) -> None:
    assert len(trains) == 3
    instants = sorted({t for train in trains for t in train})
    assert len(instants) <= 7
    for train in trains:
        assert all(a < b for a, b in pairwise(train))
        assert all(t * 8 == int(t * 8) for t in train)
    assert all(0 < b - a <= 100 for a, b in pairwise([0.0, *instants]))


def test_the_simplest_trains_are_silent_and_coincidences_are_drawn() -> None:
    assert find(strategies.spike_trains(), lambda _: True, settings=calm) == ((), ())
    pre, post = find(strategies.spike_trains(), lambda t: bool({*t[0]} & {*t[1]}), settings=calm)
    assert (pre, post) == ((0.125,), (0.125,))


def test_long_gaps_are_drawn() -> None:
    assert find(strategies.gaps(1e6), lambda t: t > 5e5, settings=calm) > 5e5


@pytest.mark.parametrize("how", ["published", "working", "ends"])
@pytest.mark.parametrize("name", rules.names())
def test_parameters_are_the_defaults_at_their_simplest(name: str, how: str) -> None:
    rule = rules.find(name)
    drawn = find(strategies.parameters(rule, how), lambda _: True, settings=calm)  # type: ignore[arg-type]
    assert rule(**drawn) == rule()


@briefly
@given(data=st.data(), name=st.sampled_from(rules.names()))
def test_rules_are_within_their_bounds_and_start_there(data: st.DataObject, name: str) -> None:
    rule: Rule = data.draw(strategies.rules(rules.find(name), "ends"))
    for declared in rule.weights.values():
        low, start, high = map(rule.number, (declared.low, declared.start, declared.high))
        assert low <= start <= high


def test_a_rule_that_never_starts_within_its_bounds_is_drawn_all_the_same() -> None:
    beyond = variant("Beyond", w=weight(9.0, low=0.0, high=4.0))
    assert find(strategies.rules(beyond), lambda _: True, settings=calm) == beyond()


def test_ends_and_published_sets_are_drawn() -> None:
    rule = rules.find("triplet_timing")
    ends = find(strategies.rules(rule, "ends"), lambda r: r.a3_plus == 1, settings=calm)  # type: ignore[attr-defined]
    assert ends == rule(a3_plus=1)
    published = strategies.rules(rule, "published")
    found = find(published, lambda r: r.tau_x == 946, settings=calm)  # type: ignore[attr-defined]
    assert found == rule.from_set("hippocampal_minimal")


@briefly
@given(protocol=strategies.protocols())
def test_protocols_pair_two_inputs(protocol: Pairing) -> None:
    pattern = protocol.induction().pattern
    (weak,), (strong,) = pattern["weak"], pattern["strong"]
    assert -50 <= strong - weak <= 50
    assert min(weak, strong) == 0


@briefly
@given(cell=strategies.cells())
def test_cells_are_leaky_everywhere(cell: PassiveCell) -> None:
    assert (cell.capacitance > 0).all()
    assert cell.matrix.shape == (cell.tree.n_nodes, cell.tree.n_nodes)


@briefly
@given(data=st.data(), name=st.sampled_from(laws.names()))
def test_cases_are_what_their_law_needs(data: st.DataObject, name: str) -> None:
    law = laws.find(name)()
    part = {"rule": Sound, "route": routes.find("quantal_size"), "cell": PassiveCell}[law.about]
    case: Case = data.draw(strategies.cases(law, part))
    assert isinstance(case.part, part)
    assert set(case.numbers) == set(law.needs.numbers)
    for number, (low, high) in law.needs.numbers.items():
        assert low <= case.numbers[number] <= high
    assert len(case.instants) <= law.needs.events
    assert case.end >= max([0.0, *case.instants])
