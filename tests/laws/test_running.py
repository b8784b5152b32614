"""What the laws run a rule with: the same as `impose`, from any start, watched."""

from __future__ import annotations

import math

import numpy as np
import pytest

from plastic import impose, rules
from plastic.laws._running import (
    Seen,
    Watched,
    changed,
    differing,
    longest_time,
    outcome,
    teach,
    with_amplitudes,
)
from plastic.laws._trains import dense
from tests.laws.faulty import Sound


@pytest.mark.parametrize("name", ["pair_timing", "sliding_threshold", "synaptic_scaling"])
def test_an_outcome_is_that_of_the_imposed_spikes(name: str) -> None:
    rule = rules.find(name)()
    *pre, post = dense(4, 30.0, 900.0)
    found = outcome(rule, pre, post, 1500.0)
    wanted = impose(
        rule, {str(k): list(t) for k, t in enumerate(pre)}, list(post), end=1500.0, compiled=False
    )
    for variable, row in found.items():
        np.testing.assert_array_equal(row, np.atleast_1d(wanted[variable].values.T[-1]))


def test_a_stop_sees_the_state_just_before_its_instant() -> None:
    found = teach(Watched(Sound(), 1), [(0.0,)], (20.0,), 30.0, stops=[20.0, 20.5])
    gain = 0.02 * math.exp(-1)
    assert [s["w"][0] for s in found] == [1.0, pytest.approx(1 + gain), pytest.approx(1 + gain)]


def test_a_watched_learner_keeps_what_hooks_returned() -> None:
    learner = Watched(Sound(), 1)
    teach(learner, [(0.0,)], (20.0,), 30.0)
    assert [(t, hook) for t, hook, _ in learner.heard] == [(0.0, "at_pre"), (20.0, "at_post")]
    assert learner.heard[1][2] == {"w": pytest.approx(0.02 * math.exp(-1))}


@pytest.mark.parametrize(
    ("other", "start", "differ"),
    [
        (1.0 + 1e-13, 1.0, False),
        (1.0 + 1e-11, 1.0, True),  # one did not move, the other did
        (1.0 + 1e-10, 0.0, False),  # a billionth of the change
        (1.0 + 1e-8, 0.0, True),
    ],
)
def test_outcomes_agree_to_a_billionth_of_the_change(
    other: float, start: float, differ: bool
) -> None:
    rows = differing({"w": (1.0,)}, {"w": (other,)}, {"w": (start,)})
    assert bool(rows) == differ


def test_digits_that_were_lost_when_a_variable_was_large_are_not_asked_for() -> None:
    """A state of a million leaves an error of 1e-10 when it has gone back to 1."""
    one, other = Seen({"m": (1.0,)}), {"m": (1.0 + 1e-10,)}
    for peak, differ in ((1.0, True), (1e6, False)):
        one.peaks = {"m": peak}
        assert bool(differing(one, other)) == differ


def test_a_learner_knows_how_large_its_variables_have_been() -> None:
    """By hand: 1 + 0.02 exp(-1) after the pair, less after the depression."""
    learner = Watched(Sound(), 1)
    found = teach(learner, [(0.0, 21.0)], (20.0,), 30.0)[-1]
    assert found.peaks["w"] == pytest.approx(1 + 0.02 * math.exp(-1))
    assert found["w"][0] < found.peaks["w"]


def test_exact_is_exact_and_no_number_disagrees_with_itself() -> None:
    assert differing({"w": (1.0,)}, {"w": (math.nextafter(1, 2),)}, exact=True)
    assert differing({"w": (math.nan,)}, {"w": (math.nan,)})
    assert not differing({"w": (1.0, 2.0)}, {"w": (1.0, 2.0)}, exact=True)


def test_parameters_may_leave_their_bounds_here_and_the_rule_stays_as_it_was() -> None:
    rule = Sound()
    assert changed(rule, up=7.0).values == {"up": 7.0, "down": 0.01, "tau": 20.0}
    assert with_amplitudes(rule, 1e-30).values == {"up": 2e-32, "down": 1e-32, "tau": 20.0}
    assert rule == Sound()


def test_the_longest_time_is_that_of_traces_and_parameters() -> None:
    assert longest_time(rules.find("triplet_timing")()) == 114.0
