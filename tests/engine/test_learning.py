"""The one law of time, in the plain loop; every expected value is written out by hand."""

from __future__ import annotations

import math

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from plastic.engine.learning import Learner
from plastic.errors import RuleError
from plastic.rules._interface import Changes, Rule, state, trace, weight
from tests.engine.samples import Compound, Counting, Leaky, Mirror, Stepped


def weights(learner: Learner, name: str = "w") -> list[float]:
    return [float(v) for v in learner.per_input[name]]


def test_pre_and_post_of_one_instant_do_not_see_each_other() -> None:
    learner = Learner(Mirror(), 1)
    learner.instant(5.0, [0], {0: 1.0})
    assert weights(learner) == [1.0]
    assert learner.per_cell["heard"] == 1.0
    assert {name: row.tolist() for name, row in learner.traces.items()} == {
        "r": [1.0],
        "o": [1.0],
        "last": [1.0],
    }


@pytest.mark.parametrize(("first", "change"), [("pre", 1.0), ("post", -1.0)])
def test_one_moment_apart_the_later_spike_sees_the_earlier(first: str, change: float) -> None:
    """The control of the law above."""
    learner = Learner(Mirror(), 1)
    for t, side in enumerate(sorted(("pre", "post"), key=lambda side: side != first)):
        learner.instant(5.0 + 1e-9 * t, *(([0],) if side == "pre" else ([], {0: 1.0})))
    assert weights(learner) == [pytest.approx(1 + change, abs=1e-9)]


def test_the_cell_reads_its_own_trace_before_it_jumps() -> None:
    learner = Learner(Mirror(), 1)
    learner.instant(0.0, post={0: 1.0})
    learner.instant(10.0, post={0: 1.0})
    assert learner.per_cell["heard"] == pytest.approx(2 + math.exp(-10 / 40), rel=1e-14)


def test_traces_add_or_are_set_and_decay_exactly() -> None:
    learner = Learner(Mirror(tau=15.0), 1)
    for t in (0.0, 4.0, 10.0):
        learner.instant(t, [0])
    learner.advance(31.0)
    summed = sum(math.exp(-(31 - t) / 15) for t in (0, 4, 10))
    assert learner.traces["r"][0] == pytest.approx(summed, rel=1e-14)
    assert learner.traces["last"][0] == pytest.approx(math.exp(-21 / 15), rel=1e-14)


def test_changes_of_one_instant_read_one_state_and_add() -> None:
    """1 + 0.5 - 0.25 * 2 = 1, not 1 * 1.5 * (1 - ...) in either order; the mood is the old one."""
    learner = Learner(Compound(), 1)
    learner.instant(1.0, [0], {0: 1.0})
    assert weights(learner) == [1.0]
    assert learner.per_cell["mood"] == 4.0


def test_bounds_hold_after_the_sum_not_after_each_change() -> None:
    learner = Learner(Compound(up=0.6, down=-0.25), 1)
    learner.instant(1.0, [0], {0: 1.0})
    assert weights(learner) == [pytest.approx(1.1)]  # clipped at 1.2 in between: 0.7
    learner.instant(2.0, post={0: 1.0})
    assert weights(learner) == [1.2]
    learner.instant(3.0, [0])
    assert weights(learner) == [0.0]


def test_each_input_has_its_own_spikes_and_shares_those_of_the_cell() -> None:
    learner = Learner(Mirror(), 3)
    learner.instant(0.0, [0, 2])
    learner.instant(10.0, [1])
    learner.instant(20.0, post={0: 1.0})
    r = math.exp(-20 / 20), math.exp(-10 / 20), math.exp(-20 / 20)
    assert weights(learner) == [pytest.approx(1 + x, rel=1e-14) for x in r]
    learner.instant(30.0, [1])
    o = math.exp(-10 / 40)
    assert weights(learner)[1] == pytest.approx(1 + r[1] - o, rel=1e-14)
    assert weights(learner)[::2] == [pytest.approx(1 + r[0], rel=1e-14)] * 2


def test_a_spike_concerns_the_inputs_of_the_site_it_has_reached() -> None:
    learner = Learner(Mirror(), 3, site_of=[0, 1, 1])
    learner.instant(0.0, [0, 1, 2])
    learner.instant(10.0, post={0: 1.0})
    near = 1 + math.exp(-10 / 20)
    assert weights(learner) == [pytest.approx(near), 1.0, 1.0]
    learner.instant(12.0, post={1: 0.5})
    far = 1 + 0.5 * math.exp(-12 / 20)
    assert weights(learner) == [pytest.approx(near), pytest.approx(far), pytest.approx(far)]
    learner.instant(20.0, [0, 1])
    assert weights(learner)[0] == pytest.approx(near - math.exp(-10 / 40))
    assert weights(learner)[1] == pytest.approx(far - math.exp(-8 / 40))


def test_only_the_soma_moves_the_cell() -> None:
    learner = Learner(Mirror(), 2, site_of=[0, 1])
    learner.instant(1.0, post={1: 1.0})
    assert learner.per_cell["heard"] == 0.0
    learner.instant(2.0, post={0: 1.0})
    assert learner.per_cell["heard"] == 1.0


def test_everything_is_brought_up_to_date_before_an_instant() -> None:
    """An input that does not fire flows too, and a hook reads what has flowed."""
    learner = Learner(Leaky(), 2)
    learner.instant(100.0, [0])
    w = 1 - 0.8 * math.exp(-100 / 300)
    assert weights(learner) == [pytest.approx(w, rel=1e-14)] * 2
    assert weights(learner, "seen") == [pytest.approx(w, rel=1e-14), 0.0]
    assert learner.per_cell["mood"] == pytest.approx(5 * -math.expm1(-100 / 300), rel=1e-14)


def test_bounds_hold_while_it_flows() -> None:
    learner = Learner(Leaky(), 1)
    learner.advance(3000.0)
    assert weights(learner) == [0.9]


@given(cuts=st.lists(st.floats(0, 200), max_size=8))
def test_a_quiet_gap_may_be_cut_anywhere(cuts: list[float]) -> None:
    whole, parts = Learner(Leaky(), 2), Learner(Leaky(), 2)
    for t in [*sorted(cuts), 200.0]:
        parts.advance(t)
    whole.advance(200.0)
    assert weights(parts) == [pytest.approx(x, rel=1e-12) for x in weights(whole)]
    assert parts.per_cell["mood"] == pytest.approx(whole.per_cell["mood"], rel=1e-12)


def test_a_rule_whose_flow_is_a_step_shows_where_it_was_cut() -> None:
    """The control of the law above."""
    whole, parts = Learner(Stepped(), 1), Learner(Stepped(), 1)
    whole.advance(200.0)
    for t in (50.0, 200.0):
        parts.advance(t)
    assert abs(weights(parts)[0] - weights(whole)[0]) > 0.01


def test_time_does_not_run_backwards() -> None:
    learner = Learner(Leaky(), 1)
    learner.advance(50.0)
    before = weights(learner)
    learner.advance(20.0)
    assert (learner.t, weights(learner)) == (50.0, before)


def test_a_window_opens_at_its_first_spike_and_presents_its_counts_as_rates() -> None:
    """Two inputs, 50 ms: 3 and 1 spikes before the close at 60 ms are 60 and 20 Hz; post 40 Hz."""
    learner = Learner(Counting(), 2)
    for t, pre, post in ((10, [0], 0), (20, [0, 1], 1), (30, [0], 0), (59.9, [], 1)):
        learner.instant(float(t), pre, {0: 1.0} if post else None)
    assert weights(learner) == [0.0, 0.0]
    learner.finish(60.0)
    assert weights(learner) == [60.0, 20.0]
    assert weights(learner, "both") == [60.0 * 40, 20.0 * 40]  # the level is the old one, 0
    assert learner.per_cell["level"] == 40.0


def test_a_spike_at_the_close_opens_the_next_window() -> None:
    learner = Learner(Counting(), 1)
    learner.instant(10.0, [0])
    learner.instant(60.0, [0])
    assert weights(learner) == [20.0]
    assert learner.closes == 110.0
    learner.finish(110.0)
    assert weights(learner) == [40.0]


def test_a_spike_of_the_cell_opens_a_window_only_at_the_soma() -> None:
    learner = Learner(Counting(), 1, site_of=[1])
    learner.instant(10.0, post={1: 1.0})
    assert math.isinf(learner.closes)
    learner.instant(20.0, post={0: 1.0})
    assert learner.closes == 70.0


def test_silence_rests_while_a_window_is_open() -> None:
    """10 ms before the window and 40 ms after it, not the 50 ms of the window."""
    learner = Learner(Counting(), 1)
    learner.instant(10.0, [0])
    learner.instant(30.0, [0])
    learner.finish(100.0)
    assert weights(learner, "silence") == [50.0]


def test_rates_are_presented_to_the_state_before_them() -> None:
    learner = Learner(Counting(), 2)
    learner.present(np.array([3.0, 5.0]), 7.0)
    learner.present(np.array([1.0, 0.0]), 2.0)
    assert weights(learner) == [4.0, 5.0]
    assert weights(learner, "both") == [3 * 7 + 0 + 1 * 2 + 7, 5 * 7 + 0 + 0 + 7]
    assert learner.per_cell["level"] == 9.0


@pytest.mark.parametrize("value", [math.nan, math.inf])
def test_a_change_that_is_no_number_says_where_and_with_what(value: float) -> None:
    class Broken(Rule):
        """Breaks at a presynaptic spike."""

        w = weight(1.0, low=0.0, high=2.0)
        o = trace("post", tau=20.0)

        def at_pre(self, o: float) -> Changes:
            return {"w": o * value}

    learner = Learner(Broken(), 1)
    learner.instant(0.0, post={0: 1.0})
    with pytest.raises(
        RuleError, match=rf"Broken\.at_pre changed w by {value} at 20 ms .*'o': 0\.3"
    ):
        learner.instant(20.0, [0])


@pytest.mark.parametrize("o", [0.0, 1e-3, 2.0], ids=["1/0", "too large", "log of less than 0"])
def test_mathematics_that_fails_says_where_and_with_what(o: float) -> None:
    class Careless(Rule):
        """Divides by what may be nothing."""

        w = weight(1.0, low=0.0, high=2.0)
        o = trace("post", tau=20.0)

        def at_pre(self, o: float) -> Changes:
            return {"w": math.log(1 - o) * math.exp(1.0 / o)}

    learner = Learner(Careless(), 1)
    learner.traces["o"][0] = o
    with pytest.raises(RuleError, match=rf"^Careless\.at_pre: .+ at 0 ms with .*'o': {o}"):
        learner.instant(0.0, [0])


def test_a_hook_that_returns_nothing_changes_nothing() -> None:
    class Silent(Rule):
        """Speaks only when it has heard something."""

        w = weight(1.0, low=0.0, high=2.0)
        o = trace("post", tau=20.0)

        def at_pre(self, o: float) -> Changes:
            if o > 0:
                return {"w": o}
            return None  # type: ignore[return-value]

    learner = Learner(Silent(), 1)
    learner.instant(0.0, [0], {0: 1.0})
    assert weights(learner) == [1.0]
    learner.instant(0.5, [0])
    assert weights(learner) == [pytest.approx(1 + math.exp(-0.5 / 20))]


def test_a_held_bound_replaces_the_rules_own_only_where_it_is_lower() -> None:
    learner = Learner(Compound(), 3, highest=np.array([[1.05, 5.0, 1.2]]))
    learner.instant(0.0, post={0: 1.0})
    assert weights(learner) == [1.05, 1.2, 1.2]


def test_the_factor_is_what_the_rule_says_of_its_weights() -> None:
    class Product(Rule):
        """Two weights that multiply."""

        w = weight(2.0, low=0.0, high=9.0)
        v = weight(4.0, low=0.0, high=9.0)
        u = state(3.0)

        def at_pre(self) -> Changes:
            return {"w": 1.0, "v": 2.0, "u": 1.0}

        def factor(self, w: float, v: float) -> float:
            return w * v / 8.0

    learner = Learner(Product(), 2)
    assert learner.factor().tolist() == [1.0, 1.0]
    learner.instant(1.0, [1])
    assert learner.factor().tolist() == [1.0, 3 * 6 / 8]
    default = Learner(Compound(), 2)
    default.instant(1.0, [0])
    assert default.factor().tolist() == [0.5, 1.0]
