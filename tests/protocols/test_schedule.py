"""Exact times: epochs, repeats, test pulses, lags, overlaps."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from plastic.errors import Misfit
from plastic.protocols._schedule import MANY, build
from tests.protocols.cases import bursts, patterns, written


@given(patterns(), st.integers(1, 8), st.integers(600, 20_000))
def test_every_time_of_the_pattern_comes_back_in_every_repeat(
    pattern: dict[str, list[float]], times: int, every: int
) -> None:
    schedule = bursts(
        pattern=written(pattern), repeat={"times": times, "every": f"{every} ms"}, test=None
    )
    for name, own in pattern.items():
        expected = [120_000 + k * every + t for k in range(times) for t in own]
        np.testing.assert_allclose(schedule.times[name], expected, rtol=0, atol=1e-6)
        assert np.all(np.diff(schedule.times[name]) > 0)


def test_epochs_are_contiguous_and_start_at_zero() -> None:
    epochs = bursts().epochs
    assert [e.name for e in epochs] == ["baseline", "induction", "follow_up"]
    assert [(e.start, e.end) for e in epochs] == [(0, 120e3), (120e3, 150e3), (150e3, 210e3)]
    assert bursts().end == 210e3


def test_repeats_fill_the_induction() -> None:
    schedule = bursts()
    np.testing.assert_array_equal(schedule.repeat_starts, [120e3, 130e3, 140e3])
    np.testing.assert_array_equal(schedule.repeat_ends, [130e3, 140e3, 150e3])
    assert schedule.every == 10e3


def test_tested_inputs_take_turns_and_none_is_tested_during_induction() -> None:
    tests = bursts().test_times
    np.testing.assert_array_equal(tests["far"], [15e3, 75e3, 165e3])
    np.testing.assert_array_equal(tests["near"], [45e3, 105e3, 195e3])


def test_test_pulses_are_events_of_their_input() -> None:
    schedule = bursts()
    for name, pulses in schedule.test_times.items():
        assert np.isin(pulses, schedule.times[name]).all()
    assert len(schedule.times["far"]) == 3 + 3


def test_set_lags_run_from_the_first_event_to_each_partner_event_in_words() -> None:
    rows = bursts().set_lags
    assert [row["set_lag_ms"] for row in rows] == [10, 20, 30]
    assert {row["reference"] for row in rows} == {"presynaptic spike to presynaptic spike of near"}


def test_a_lag_is_negative_when_the_partner_comes_first() -> None:
    rows = bursts(pattern={"far": ["15 ms"], "injected": ["5 ms"]}).set_lags
    assert [row["set_lag_ms"] for row in rows] == [-10]
    assert rows[0]["reference"] == "presynaptic spike to injected spike"


def test_injected_spikes_are_no_input() -> None:
    schedule = bursts(pattern={"far": ["0 ms"], "injected": ["10 ms"]})
    assert "injected" not in schedule.times
    np.testing.assert_array_equal(schedule.injected, [120010, 130010, 140010])


def test_the_table_has_every_event_once_in_order() -> None:
    schedule = bursts()
    rows = schedule.table()
    assert [r["time_ms"] for r in rows] == sorted(r["time_ms"] for r in rows)
    for name, times in schedule.times.items():
        assert [r["time_ms"] for r in rows if r["input"] == name] == list(times)
    pair = [r for r in rows if r["input"] == "far" and r["repeat"] == 2]
    assert len(pair) == 1
    assert pair[0]["set_lags_ms"] == {"near": [10, 20, 30]}
    assert pair[0]["epoch"] == "induction"
    assert pair[0]["reference"] == "presynaptic spike to presynaptic spike of near"
    pulses = [r for r in rows if r["kind"] == "test pulse"]
    assert {r["epoch"] for r in pulses} == {"baseline", "follow_up"}
    assert all(r["repeat"] is None for r in pulses)


def test_the_table_tells_realised_lags_from_the_spikes_of_the_cell() -> None:
    rows = bursts().table(spikes=[130012.5, 130021.0, 75002.0])
    second = [r for r in rows if r["input"] == "far" and r["repeat"] == 2]
    assert second[0]["realised_lags_ms"] == [12.5, 21.0]
    assert second[0]["realised_reference"] == (
        "presynaptic spike to threshold crossing at the soma"
    )
    first = [r for r in rows if r["input"] == "far" and r["repeat"] == 1]
    assert first[0]["realised_lags_ms"] == []


def test_a_long_recording_tells_the_lags_to_the_neighbours_only() -> None:
    near = np.arange(MANY + 1) * 10.0
    schedule = build(
        "long", {"far": [34.0], "near": near}, times=1, every=1000.0, baseline=0.0,
        follow_up=0.0, test_times={}, partner=("near",),
    )  # fmt: skip
    row = next(r for r in schedule.table() if r["input"] == "far")
    assert row["set_lags_ms"] == {"near": [-4.0, 6.0]}


@given(patterns(), st.integers(0, 3))
def test_an_event_twice_in_the_same_place_is_refused(
    pattern: dict[str, list[float]], which: int
) -> None:
    far = pattern["far"]
    twice = sorted([*far, far[which % len(far)] + 0.05])
    kept = {"baseline": 0.0, "follow_up": 0.0, "test_times": {}}
    fine = build("p", pattern, times=2, every=1000.0, **kept)
    assert len(fine.times["far"]) == 2 * len(far)
    with pytest.raises(Misfit, match=r"far at .* at least 0\.1 ms apart"):
        build("p", {**pattern, "far": twice}, times=2, every=1000.0, **kept)


def test_a_test_pulse_on_an_event_of_the_induction_is_refused() -> None:
    with pytest.raises(Misfit, match="events of far at 119999 and 119999 ms"):
        build(
            "p", {"far": [0.0]}, times=1, every=1000.0, baseline=119_999.0, follow_up=0.0,
            test_times={"far": np.array([119_999.05])},
        )  # fmt: skip


def test_events_outside_their_repeat_are_refused() -> None:
    with pytest.raises(Misfit, match="within one repeat, 0 to 1000 ms"):
        build(
            "p", {"far": [1000.0]}, times=1, every=1000.0, baseline=0.0, follow_up=0.0,
            test_times={},
        )  # fmt: skip
