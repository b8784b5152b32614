"""Controls: what they keep and what they take away."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from plastic.errors import Misfit, UnknownName
from plastic.protocols import CONTROLS, controlled, only_test_pulses, reversed_order, unpaired
from plastic.protocols._controls import UNPAIRED
from tests.protocols.cases import bursts, patterns, written

FAR = ["far"]


def induced(schedule: object, name: str) -> int:
    return len(schedule.pattern[name])  # type: ignore[attr-defined]


@pytest.mark.parametrize("control", CONTROLS)
def test_a_control_says_what_it_is_and_lasts_as_long(control: str) -> None:
    plain = bursts()
    made = controlled(plain, control, FAR)
    assert made.control == control
    assert made.name == f"bursts, {control.replace('_', ' ')}"
    assert made.epochs == plain.epochs
    np.testing.assert_array_equal(made.repeat_ends, plain.repeat_ends)
    for name, pulses in plain.test_times.items():
        np.testing.assert_array_equal(made.test_times[name], pulses)


@given(patterns(), st.sampled_from(["unpaired", "reversed", "inhibition_blocked"]))
def test_a_control_keeps_the_number_of_events_of_every_input(
    pattern: dict[str, list[float]], control: str
) -> None:
    plain = bursts(pattern=written(pattern))
    made = controlled(plain, control, FAR)
    for name in ("far", "near"):
        assert len(made.times[name]) == len(plain.times[name])


@given(patterns())
def test_reversed_twice_is_the_original(pattern: dict[str, list[float]]) -> None:
    # moved away from the start, so that no image falls before it
    plain = bursts(pattern=written({k: [t + 1000 for t in own] for k, own in pattern.items()}))
    twice = reversed_order(reversed_order(plain, FAR), FAR)
    for name in ("far", "near"):
        np.testing.assert_allclose(twice.times[name], plain.times[name], rtol=0, atol=1e-6)


@given(patterns())
def test_the_lag_to_the_last_partner_becomes_minus_the_lag_to_the_first(
    pattern: dict[str, list[float]],
) -> None:
    plain = bursts(pattern=written(pattern))
    back = reversed_order(plain, FAR)

    def lags(schedule: object, which: int) -> np.ndarray:
        own = schedule.pattern  # type: ignore[attr-defined]
        return np.sort(own["near"][which] - own["far"])

    np.testing.assert_allclose(lags(back, -1), np.sort(-lags(plain, 0)), atol=1e-6)
    np.testing.assert_allclose(lags(back, 0), np.sort(-lags(plain, -1)), atol=1e-6)


def test_a_volley_before_a_burst_comes_as_long_after_it() -> None:
    back = reversed_order(bursts(), FAR)
    assert [row["set_lag_ms"] for row in back.set_lags] == [-30, -20, -10]


def test_an_image_before_the_start_moves_the_whole_repeat() -> None:
    plain = bursts(pattern={"far": ["10 ms"], "near": ["0 ms"]})
    back = reversed_order(plain, FAR)
    assert {k: list(t) for k, t in back.pattern.items()} == {"far": [0.0], "near": [10.0]}


@given(patterns())
def test_unpaired_leaves_nothing_within_reach(pattern: dict[str, list[float]]) -> None:
    made = unpaired(bursts(pattern=written(pattern)), FAR)
    tests = made.test_times
    far = np.setdiff1d(made.times["far"], tests["far"])
    near = np.setdiff1d(made.times["near"], tests["near"])
    assert np.min(np.abs(np.subtract.outer(far, near))) >= UNPAIRED


def test_unpaired_moves_the_partner_by_half_the_interval() -> None:
    made = unpaired(bursts(), FAR)
    assert list(made.pattern["far"]) == [0.0]
    assert list(made.pattern["near"]) == [5010.0, 5020.0, 5030.0]


def test_unpaired_is_refused_where_the_repeats_leave_no_room() -> None:
    fast = bursts(
        pattern={"far": ["0 ms"], "near": ["10 ms"]}, repeat={"times": 60, "every": "150 ms"}
    )
    with pytest.raises(Misfit, match="leave 65 ms between events"):
        unpaired(fast, FAR)


def test_injected_spikes_are_a_partner_too() -> None:
    plain = bursts(pattern={"far": ["0 ms"], "injected": ["10 ms"]})
    assert list(unpaired(plain, FAR).pattern["injected"]) == [5010.0]
    assert [r["set_lag_ms"] for r in reversed_order(plain, FAR).set_lags] == [-10]


@pytest.mark.parametrize("control", ["unpaired", "reversed"])
def test_without_a_partner_there_is_nothing_to_unpair_or_turn(control: str) -> None:
    with pytest.raises(Misfit, match="a learning input and a partner"):
        controlled(bursts(pattern={"far": ["0 ms"]}), control, FAR)


def test_a_mirror_image_needs_room_in_its_repeat() -> None:
    plain = bursts(
        pattern={"far": ["0 ms"], "near": ["60 ms"]}, repeat={"times": 2, "every": "100 ms"}
    )
    with pytest.raises(Misfit, match="within one repeat"):
        reversed_order(plain, FAR)


def test_only_test_pulses_remain_and_the_spikes_forced_on_the_cell_go() -> None:
    plain = bursts(pattern={"far": ["0 ms"], "injected": ["10 ms"]})
    made = only_test_pulses(plain)
    np.testing.assert_array_equal(made.times["far"], plain.test_times["far"])
    assert len(made.injected) == 0
    assert made.set_lags == []


def test_blocked_inhibition_changes_no_time() -> None:
    plain = bursts()
    made = controlled(plain, "inhibition_blocked", FAR)
    assert made.inhibition_blocked
    assert not plain.inhibition_blocked
    for name, times in plain.times.items():
        np.testing.assert_array_equal(made.times[name], times)


def test_an_unknown_control_is_answered_with_the_nearest() -> None:
    with pytest.raises(UnknownName, match="did you mean 'reversed'"):
        controlled(bursts(), "reverse", FAR)
