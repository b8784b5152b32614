"""The door `plastic.impose`: what it refuses, what it returns, and when it reads."""

from __future__ import annotations

import math
from typing import Any

import numpy as np
import pytest
import xarray as xr
from numpy.typing import ArrayLike

from plastic import impose
from plastic.engine.imposed import impose as engine_impose
from plastic.errors import Misfit, RuleError
from plastic.parameters import parameter
from plastic.rules._interface import Changes, Rule, weight
from plastic.rules.pair_timing import PairTiming
from tests.engine.samples import Everything, OnlyPre, Rated

RULE = PairTiming(a_plus=0.5, a_minus=0.25, tau_plus=20, tau_minus=40)
both_loops = pytest.mark.parametrize("compiled", [True, False], ids=["compiled", "plain"])


def pair(gap: float, size: float, tau: float) -> float:
    """Return what one pair adds."""
    return size * math.exp(-gap / tau)


def test_the_door_leads_here() -> None:
    assert impose is engine_impose


# ---- refusals


@both_loops
@pytest.mark.parametrize(
    ("times", "said"),
    [
        ([-1.0], r"got \[-1\.0\] but expected finite times in ms, 0 or later"),
        ([math.nan], "expected finite times in ms"),
        ([math.inf], "expected finite times in ms"),
        ([[1.0], [2.0]], "expected finite times in ms"),
        ([3.0, 2.0], "got 3 ms followed by 2 ms but expected rising times"),
        ([1.0, 5.0, 5.0], "got 5 ms followed by 5 ms but expected rising times"),
    ],
    ids=["negative", "nan", "infinite", "a table", "falling", "twice"],
)
@pytest.mark.parametrize("where", ["pre", "pre['a']", "post", "readings"])
def test_times_that_cannot_be_are_refused_by_name(
    compiled: bool, times: ArrayLike, said: str, where: str
) -> None:
    given: dict[str, object] = {"pre": [1.0], "post": [2.0]}
    given |= {"pre": {"b": [1.0], "a": times}} if where == "pre['a']" else {where: times}
    with pytest.raises(Misfit) as caught:
        impose(RULE, **given, compiled=compiled)  # type: ignore[arg-type]
    assert str(caught.value).startswith(f"{where}: ")
    caught.match(said)


@both_loops
@pytest.mark.parametrize("end", [-1.0, math.nan, math.inf])
def test_an_end_that_cannot_be_is_refused(compiled: bool, end: float) -> None:
    with pytest.raises(Misfit, match=r"end: got .* but expected finite times in ms, 0 or later"):
        impose(RULE, [1.0], [2.0], end=end, compiled=compiled)


@both_loops
@pytest.mark.parametrize(
    ("rule", "said"),
    [
        (PairTiming, r"got the class PairTiming but expected an instance, such as PairTiming\(\)"),
        ("pair_timing", r"got 'pair_timing' but .* such as plastic\.rules\.find\(name\)\(\)"),
        (None, "got None but expected an instance"),
    ],
    ids=["class", "name", "nothing"],
)
def test_a_rule_that_is_no_instance_is_refused_by_name(
    compiled: bool, rule: Any, said: str
) -> None:
    with pytest.raises(Misfit, match=f"^rule: {said}"):
        impose(rule, [1.0], [2.0], compiled=compiled)


class Endless(Rule):
    """Grows beyond all numbers, then subtracts them."""

    size: float = parameter(1e200, "1", source="invented")

    w = weight(1.0, low=-math.inf, high=math.inf)

    def at_pre(self, w: float) -> Changes:
        return {"w": w * self.size * self.size * 0.0 + self.size * 1e200 - self.size * 1e200}


def test_a_change_that_is_no_number_is_an_error_in_both_loops() -> None:
    with pytest.raises(RuleError, match=r"Endless\.at_pre changed w by nan at 1 ms"):
        impose(Endless(), [1.0], [], compiled=False)
    with pytest.raises(RuleError, match="Endless: a change is no number; compiled=False says"):
        impose(Endless(), [1.0], [])
    assert float(impose(Endless(size=1.0), [1.0], []).w[0, -1]) == 1.0  # the control


# ---- what it returns


def test_everything_is_labelled_and_has_a_unit() -> None:
    data = impose(Everything(), {"a": [1.0], "b": [2.0]}, [3.0], readings=[0.0, 2.5, 9.0])
    assert isinstance(data, xr.Dataset)
    assert dict(data.sizes) == {"input": 2, "reading": 3}
    assert data.input.values.tolist() == ["a", "b"]
    assert data.time.values.tolist() == [0.0, 2.5, 9.0]
    assert data.time.attrs["units"] == "ms"
    names = {name: data[name].attrs["long_name"] for name in data.data_vars}
    assert names == {
        "factor": "factor",
        "w": "weight w",
        "u": "weight u",
        "seen": "state seen",
        "theta": "state theta",
    }
    assert all(data[name].attrs["units"] == "1" for name in data.data_vars)
    assert data.theta.dims == ("reading",)
    assert data.w.dims == data.factor.dims == ("input", "reading")
    assert data.attrs["rule"].startswith("Everything(up=0.02, ")


def test_one_train_is_one_input() -> None:
    data = impose(RULE, 3.0, 5)
    assert data.input.values.tolist() == ["input"]
    assert float(data.w[0, -1]) == pytest.approx(1 + pair(2, 0.5, 20), rel=1e-14)


@both_loops
def test_inputs_learn_apart_and_share_the_spikes_of_the_cell(compiled: bool) -> None:
    data = impose(RULE, {"a": [0.0], "b": [4.0, 15.0], "c": []}, [10.0], compiled=compiled)
    assert data.w[:, -1].values.tolist() == [
        pytest.approx(1 + pair(10, 0.5, 20), rel=1e-14),
        pytest.approx(1 + pair(6, 0.5, 20) - pair(5, 0.25, 40), rel=1e-14),
        1.0,
    ]


@both_loops
def test_without_spikes_nothing_happens(compiled: bool) -> None:
    data = impose(RULE, [], [], readings=[0.0, 5.0], compiled=compiled)
    assert data.w.values.tolist() == data.factor.values.tolist() == [[1.0, 1.0]]
    assert impose(RULE, {}, [5.0], compiled=compiled).factor.shape == (0, 2)


@both_loops
@pytest.mark.parametrize("pre", [[], {"a": [], "b": []}], ids=["one", "two inputs"])
def test_without_spikes_the_end_is_the_start(compiled: bool, pre: Any) -> None:
    data = impose(RULE, pre, [], compiled=compiled)
    assert data.time.values.tolist() == [0.0, 0.0]
    assert (data.factor == 1.0).all()


@both_loops
@pytest.mark.parametrize("pre_first", [True, False])
def test_spikes_of_one_instant_do_not_see_each_other(compiled: bool, pre_first: bool) -> None:
    """The control: a nanosecond apart they do."""
    late = 10.0 + 1e-6
    pre, post = (10.0, late) if pre_first else (late, 10.0)
    change = 0.5 if pre_first else -0.25
    assert float(impose(RULE, [10.0], [10.0], compiled=compiled).w[0, -1]) == 1.0
    near = float(impose(RULE, [pre], [post], compiled=compiled).w[0, -1])
    assert near == pytest.approx(1 + change, abs=1e-6)


# ---- readings and the end


@both_loops
def test_a_reading_sees_the_state_just_before_its_instant(compiled: bool) -> None:
    at = [0.0, 10.0, math.nextafter(10.0, 11.0), 12.0]
    data = impose(RULE, [0.0], [10.0], readings=at, compiled=compiled)
    after = 1 + pair(10, 0.5, 20)
    assert data.w[0].values.tolist() == [1.0, 1.0, pytest.approx(after), pytest.approx(after)]


@both_loops
def test_it_reads_at_the_start_and_just_after_the_last_spike(compiled: bool) -> None:
    data = impose(RULE, [0.0], [10.0, 30.0], compiled=compiled)
    assert data.time.values.tolist() == [0.0, math.nextafter(30.0, 31.0)]
    assert data.w[0].values.tolist() == [
        1.0,
        pytest.approx(1 + pair(10, 0.5, 20) + pair(30, 0.5, 20), rel=1e-14),
    ]


@both_loops
def test_the_end_leaves_out_what_comes_after_it(compiled: bool) -> None:
    data = impose(RULE, [0.0], [10.0, 30.0], end=20.0, compiled=compiled)
    assert data.time.values.tolist() == [0.0, 20.0]
    assert float(data.w[0, -1]) == pytest.approx(1 + pair(10, 0.5, 20), rel=1e-14)
    late = impose(RULE, [0.0], [10.0, 30.0], end=20.0, readings=[50.0], compiled=compiled)
    assert float(late.w[0, 0]) == float(data.w[0, -1])


@both_loops
def test_the_last_window_of_a_rate_rule_is_closed(compiled: bool) -> None:
    """One spike of each in 40 ms is 25 Hz; theta 10 Hz: eta 25 (25 - 10)."""
    data = impose(Rated(tau=1e9), [5.0], [6.0], compiled=compiled)
    assert float(data.time[-1]) == pytest.approx(46.0)
    assert float(data.w[0, -1]) == pytest.approx(1 + 1e-4 * 25 * 15, rel=1e-6)
    open_still = impose(Rated(tau=1e9), [5.0], [6.0], end=44.0, compiled=compiled)
    assert float(open_still.w[0, -1]) == pytest.approx(1.0, abs=1e-6)


@both_loops
def test_readings_change_nothing(compiled: bool) -> None:
    times = {"pre": [3.0, 50.0, 51.0, 200.0], "post": [7.0, 49.0, 51.0, 210.0]}
    few = impose(Everything(), **times, readings=[300.0], compiled=compiled)
    many = impose(Everything(), **times, readings=np.arange(0.0, 300.5, 0.5), compiled=compiled)
    for name in few.data_vars:
        np.testing.assert_allclose(many[name][..., -1], few[name][..., -1], rtol=1e-12)


def test_what_is_given_is_not_changed() -> None:
    pre, post, at = np.array([1.0, 5.0]), np.array([3.0]), np.array([0.0, 9.0])
    kept = pre.copy(), post.copy(), at.copy()
    data = impose(OnlyPre(), pre, post, readings=at)
    data.time.values[:] = -1.0
    assert all((a == b).all() for a, b in zip((pre, post, at), kept, strict=True))
