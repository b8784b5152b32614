"""Hypothesis strategies of the parts of plastic, for its laws and for your own tests.

    from hypothesis import given
    from plastic.checking import strategies

    @given(rule=strategies.rules(MyRule), trains=strategies.spike_trains(inputs=2))
    def test_mine(rule, trains):
        *pre, post = trains

Everything is drawn from declarations: parameters within their bounds, times in rising order. All
shrink towards the defaults, few spikes and short gaps. Times are multiples of 1/8 ms, so that sums
and shifts of them are exact.
"""

from __future__ import annotations

import math
from typing import Any

from hypothesis import strategies as st
from hypothesis.strategies import DrawFn, SearchStrategy

from plastic.laws._cells import PassiveCell
from plastic.laws._interface import Case, Law, Parameters, Times
from plastic.laws._trains import versions
from plastic.membrane.tree import Dendrite
from plastic.parameters import Parameter, Parametrised
from plastic.protocols.pairing import Pairing
from plastic.rules._interface import Rule

#: eighths of a millisecond in one
PER_MS = 8


def gaps(longest: float = 2000.0) -> SearchStrategy[float]:
    """Return waits of 1/8 ms to `longest` ms, most of them short."""
    ticks = max(1, int(PER_MS * longest))
    ranges = [st.integers(1, min(most * PER_MS, ticks)) for most in (60, 1000)]
    return st.one_of(*ranges, st.integers(1, ticks)).map(lambda k: k / PER_MS)


@st.composite
def spike_trains(
    draw: DrawFn, inputs: int = 1, *, events: int = 10, gap: float = 2000.0
) -> tuple[Times, ...]:
    """Return rising spike times (ms) of some inputs and, last, of the cell; some coincide.

    Parameters
    ----------
    inputs : int
    events : int
        At most so many instants.
    gap : float, ms
        The longest time between two of them.
    """
    sides = inputs + 1
    alone = [1 << side for side in range(sides)]
    together = [who for who in range(1, 1 << sides) if who not in alone]
    # twice as many instants of one side alone as of several
    who = st.sampled_from(alone * math.ceil(2 * len(together) / len(alone)) + together)
    instants = draw(st.lists(st.tuples(gaps(gap), who), max_size=events))
    trains: list[list[float]] = [[] for _ in range(sides)]
    t = 0.0
    for wait, fired in instants:
        t += wait
        for side in range(sides):
            if fired >> side & 1:
                trains[side].append(t)
    return tuple(tuple(train) for train in trains)


@st.composite
def parameters(
    draw: DrawFn, part: type[Parametrised], how: Parameters = "working"
) -> dict[str, float]:
    """Return parameter values of a rule or a route within their declared bounds.

    Parameters
    ----------
    part : class
    how : str
        "published": the defaults and published sets; "working": those, some of them halved or
        doubled; "ends": every parameter at its default or at an end of its range.
    """
    sets = [{}, *map(dict, part.sets.values())] if how != "ends" else [{}]
    base = {n: p.default for n, p in part.parameters.items()} | dict(draw(st.sampled_from(sets)))
    if how == "published":
        return base
    return {
        name: draw(st.sampled_from(_choices(declared, base[name], how)))
        for name, declared in part.parameters.items()
    }


def _choices(declared: Parameter, value: float, how: Parameters) -> list[float]:
    around = (0.5 * value, 2 * value, 0.5) if value == 0 else (0.5 * value, 2 * value)
    others = (declared.low, declared.high) if how == "ends" else around
    allowed = [
        v for v in others if math.isfinite(v) and declared.low <= v <= declared.high and v != value
    ]
    return [value] * (2 * len(allowed) + 1) + allowed if how == "working" else [value, *allowed]


def rules(rule: type[Rule], how: Parameters = "working") -> SearchStrategy[Rule]:
    """Return instances of a rule whose weights start within their bounds; `parameters` says how."""
    made = parameters(rule, how).map(lambda values: rule(**values))
    sound = any(_starts_inside(one) for _, one in versions(rule))
    return made.filter(_starts_inside) if sound else made


def _starts_inside(rule: Rule) -> bool:
    return all(
        rule.number(w.low) <= rule.number(w.start) <= rule.number(w.high)
        for w in rule.weights.values()
    )


@st.composite
def protocols(draw: DrawFn) -> Pairing:
    """Return pairing protocols of two inputs, `weak` and `strong`, up to 50 ms apart."""
    lag = draw(st.integers(-50, 50))
    times, seconds = draw(st.integers(1, 100)), draw(st.integers(1, 10))
    return Pairing.model_validate(
        {
            "pattern": {"weak": [f"{max(0, -lag)} ms"], "strong": [f"{max(0, lag)} ms"]},
            "repeat": {"times": times, "every": f"{seconds} s"},
        }
    )


@st.composite
def cells(draw: DrawFn) -> PassiveCell:
    """Return passive cells: a soma, up to three dendrites, and places on them."""
    sizes = st.tuples(st.integers(60, 900), st.integers(4, 40))
    drawn = draw(st.lists(sizes, max_size=3))
    dendrites = {f"d{k}": Dendrite(float(a), b / 10) for k, (a, b) in enumerate(drawn)}
    permille = st.lists(st.integers(20, 1000), min_size=1, max_size=3)
    places = [(name, d.length * x / 1000) for name, d in dendrites.items() for x in draw(permille)]
    load = draw(st.integers(1, 400)) / 10
    return PassiveCell(dendrites, tuple(places), load, draw(st.integers(0, 2)))


@st.composite
def cases(draw: DrawFn, law: Law, part: type[Any]) -> Case:
    """Return examples of what a law needs, for one part."""
    needs = law.needs
    numbers = {name: draw(st.integers(low, high)) for name, (low, high) in needs.numbers.items()}
    if law.about == "cell":
        return Case(draw(cells()), numbers=numbers)
    if law.about == "route":
        return Case(part(**draw(parameters(part, needs.parameters))), numbers=numbers)
    *pre, post = draw(spike_trains(needs.inputs, events=needs.events, gap=needs.gap))
    last = max([0.0, *post, *(t for train in pre for t in train)])
    rule = draw(rules(part, needs.parameters))
    return Case(rule, tuple(pre), post, last + draw(gaps(needs.gap)), numbers)
