"""Back-propagated spikes: delay, decrement with distance and within a train."""

from __future__ import annotations

from dataclasses import replace
from typing import Any

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from plastic.membrane.spikes import BackPropagation

BAP = BackPropagation(length_constant=500, train_loss=0.2, recovery=100, floor=0.3)
trains = st.lists(st.floats(0.5, 300), min_size=1, max_size=10).map(np.cumsum)


def test_a_spike_needs_one_millisecond_for_half_a_millimetre() -> None:
    """0.5 m/s in the apical trunk of layer 5: Stuart, Schiller & Sakmann 1997 (looked up)."""
    assert BackPropagation().delay([0.0, 250.0, 500.0]).tolist() == [0, 0.5, 1]


def test_about_half_the_amplitude_is_left_at_half_a_millimetre() -> None:
    """Layer 5, from memory (unsure): a check of the default, not of the tissue."""
    assert BackPropagation().amplitudes(500.0, [0.0])[0] == pytest.approx(0.5, abs=0.001)


def test_the_first_spike_falls_exponentially_with_distance() -> None:
    x = np.array([0.0, 100, 500, 1000])
    assert BAP.amplitudes(x, [3.0])[:, 0] == pytest.approx(np.exp(-x / 500), rel=1e-14)


def test_each_spike_shortens_the_reach_which_recovers_exponentially() -> None:
    """r: 1, then 0.8 recovering for 50 ms, then 0.8 of that recovering for 100 ms."""
    second = 1 - 0.2 * np.exp(-0.5)
    third = 1 - (1 - 0.8 * second) * np.exp(-1.0)
    assert BAP.reach([10.0, 60.0, 160.0]) == pytest.approx([1, second, third], rel=1e-14)
    assert BAP.amplitudes(200.0, [10.0, 60.0, 160.0]) == pytest.approx(
        np.exp(-200 / (500 * np.array([1, second, third]))), rel=1e-14
    )


def test_a_long_train_settles_where_loss_and_recovery_balance() -> None:
    """r = (1 - e)/(1 - (1 - loss) e), e = exp(-interval/recovery)."""
    e = np.exp(-20 / 100)
    settled = BAP.reach(20.0 * np.arange(200))[-1]
    assert settled == pytest.approx((1 - e) / (1 - 0.8 * e), rel=1e-12)


@given(trains, st.floats(0, 0.9), st.floats(0, 1000))
@settings(max_examples=80, deadline=None)
def test_the_reach_stays_above_zero_and_never_exceeds_the_rested_one(
    times: Any, loss: float, recovery: float
) -> None:
    reach = replace(BAP, train_loss=loss, recovery=recovery).reach(times)
    assert np.all((reach > 0) & (reach <= 1))
    assert reach[0] == 1


@given(trains, st.floats(0, 800), st.floats(0, 400))
@settings(max_examples=80, deadline=None)
def test_the_amplitude_falls_with_distance(times: Any, near: float, further: float) -> None:
    amplitudes = BAP.amplitudes([near, near + further], times)
    assert np.all(amplitudes[1] <= amplitudes[0])
    assert np.all(amplitudes <= 1)


def test_a_faster_train_reaches_less_far() -> None:
    """The decrement depends on frequency: Stuart et al. 1997 (looked up, sign only)."""
    slow, fast = (BAP.amplitudes(300.0, interval * np.arange(5.0)) for interval in (100, 10))
    assert np.all(fast[1:] < slow[1:])


def test_without_loss_or_with_recovery_at_once_every_spike_is_like_the_first() -> None:
    times = [0.0, 5.0, 10.0]
    for bap in (replace(BAP, train_loss=0.0), replace(BAP, recovery=0.0)):
        assert bap.reach(times).tolist() == [1, 1, 1]


def test_a_spike_below_the_floor_is_no_postsynaptic_event() -> None:
    """At 500 um: first spike e^-1 = 0.37, second e^-1.25 = 0.29 without recovery; floor 0.3."""
    counted = replace(BAP, recovery=1e12).counts([0.0, 500.0], [0.0, 10.0])
    assert counted.tolist() == [[True, True], [True, False]]
    exact = BackPropagation(length_constant=100, floor=1.0)
    assert exact.counts(0.0, [0.0]).tolist() == [True]


@pytest.mark.parametrize(
    ("field", "value"),
    [
        ("velocity", 0),
        ("length_constant", -1),
        ("train_loss", 1),
        ("train_loss", float("nan")),
        ("recovery", -1),
        ("recovery", float("inf")),
        ("floor", 1.5),
    ],
)
def test_a_value_outside_its_range_is_refused_with_its_name(field: str, value: float) -> None:
    with pytest.raises(ValueError, match=rf"^{field} = {value}: must be"):
        replace(BAP, **{field: value})


def test_spike_times_that_do_not_increase_are_refused() -> None:
    with pytest.raises(ValueError, match="increasing"):
        BAP.reach([5.0, 5.0])
