"""The triplet rule against Pfister & Gerstner 2006: tables, error, drift and threshold rate."""

from __future__ import annotations

import math

import numpy as np
import pytest

from plastic.rules.pair_timing import PairTiming
from plastic.rules.triplet_timing import TripletTiming
from tests.published.pairings import SJOSTROM, WANG, Point, change, misfit, pairs, repeated
from tests.published.poisson import changes, mean_and_error

MINIMAL = TripletTiming.from_set("visual_minimal")
FULL = TripletTiming.from_set("visual_full")

#: derived and checked: loop and closed form agreed to 7e-16. Order of points: that of `SJOSTROM`
MINIMAL_COLUMN = [
    0.00000000,
    0.11864130,
    0.22779517,
    0.53211193,
    0.76273057,
    -0.31662036,
    -0.33221317,
    -0.34173458,
    0.17371479,
    0.74917658,
]
FULL_COLUMN = [
    0.00000,
    0.13205,
    0.24696,
    0.53372,
    0.74091,
    -0.31216,
    -0.33362,
    -0.35162,
    0.15479,
    0.72725,
]
#: derived and checked; order of points: that of `WANG`
HIPPOCAMPAL_FULL = [
    0.20182,
    -0.10375,
    0.04261,
    0.00523,
    -0.07816,
    0.10230,
    0.35757,
    0.20376,
    0.10801,
    0.32467,
]
HIPPOCAMPAL_MINIMAL = [
    0.17536,
    -0.15608,
    0.05510,
    0.01927,
    -0.05083,
    0.10158,
    0.33269,
    0.17982,
    0.06839,
    0.31777,
]
POINTS = [f"{p.lag:+g} ms, {p.rate:g} Hz" for p in SJOSTROM]


def column(rule: TripletTiming | PairTiming) -> np.ndarray:
    return np.array([change(rule, *pairs(p.lag, p.rate)) for p in SJOSTROM])


def closed(rule: TripletTiming, lag: float, rate: float, n: int = 60) -> float:
    """Closed form of n continuous pairs for a3_minus = 0, by geometric sums (derived)."""
    period, d = 1000 / rate, abs(lag)
    q, m, y = (math.exp(-period / tau) for tau in (rule.tau_plus, rule.tau_minus, rule.tau_y))
    fast, slow = (1 - q**n) / (1 - q), (1 - y**n) / (1 - y)
    both = (1 - (q * y) ** n) / (1 - q * y)
    if lag > 0:
        single = n - q * fast
        triple = single - slow + both * q
        up = math.exp(-d / rule.tau_plus) / (1 - q)
        down = math.exp(d / rule.tau_minus) * m / (1 - m) * (n - (1 - m**n) / (1 - m))
    else:
        single = n - fast
        triple = single - slow + both
        up = math.exp(d / rule.tau_plus) * q / (1 - q)
        down = math.exp(-d / rule.tau_minus) / (1 - m) * (n - m * (1 - m**n) / (1 - m))
    return up * (rule.a2_plus * single + rule.a3_plus * y / (1 - y) * triple) - rule.a2_minus * down


@pytest.mark.parametrize(
    ("point", "printed"), list(zip(SJOSTROM, MINIMAL_COLUMN, strict=True)), ids=POINTS
)
def test_the_minimal_model_gives_the_printed_change(point: Point, printed: float) -> None:
    """Parameters from memory (high, corroborated); values derived and checked; eight digits."""
    assert change(MINIMAL, *pairs(point.lag, point.rate)) == pytest.approx(printed, abs=5.1e-9)


@pytest.mark.parametrize("name", ["visual_minimal", "hippocampal_minimal"])
@pytest.mark.parametrize("lag", [10.0, -10.0, 3.0])
@pytest.mark.parametrize("rate", [0.1, 10.0, 20.0, 40.0, 50.0])
def test_continuous_pairs_follow_the_closed_form(name: str, lag: float, rate: float) -> None:
    rule = TripletTiming.from_set(name)
    assert change(rule, *pairs(lag, rate)) == pytest.approx(
        closed(rule, lag, rate), rel=1e-10, abs=1e-13
    )


@pytest.mark.parametrize(
    ("point", "printed"), list(zip(SJOSTROM, FULL_COLUMN, strict=True)), ids=POINTS
)
def test_the_full_model_gives_the_printed_change(point: Point, printed: float) -> None:
    """Parameters from memory (high, corroborated); values derived and checked; five digits."""
    assert change(FULL, *pairs(point.lag, point.rate)) == pytest.approx(printed, abs=5.1e-6)


def test_the_minimal_model_has_the_published_error() -> None:
    """E = 0.34 in the paper (from memory, high), 0.356 recomputed from the rounded table."""
    error = misfit(column(MINIMAL))
    assert error == pytest.approx(0.356, abs=0.001)
    assert abs(error - 0.34) < 0.03


def test_the_full_model_has_the_published_error() -> None:
    """E = 0.33 in the paper (from memory, high), 0.342 recomputed from the rounded table."""
    error = misfit(column(FULL))
    assert error == pytest.approx(0.342, abs=0.001)
    assert abs(error - 0.33) < 0.03


def test_the_pair_rule_cannot_fit_the_rate_dependence_at_any_amplitude() -> None:
    """Derived and checked: the best pair rule, time constants 16.8 and 33.7 ms, has E = 7.58.

    It is linear in its amplitudes, so least squares finds the best of all.
    """
    unit = 1e-6
    basis = (
        np.array(
            [column(PairTiming(a_plus=unit, a_minus=0)), column(PairTiming(a_plus=0, a_minus=unit))]
        ).T
        / unit
    )
    mean, sem = (np.array([getattr(p, name) for p in SJOSTROM]) for name in ("mean", "sem"))
    best, *_ = np.linalg.lstsq(basis / sem[:, None], mean / sem, rcond=None)
    error = misfit(basis @ best)
    assert error > 5
    assert error == pytest.approx(7.58, abs=0.005)


def test_the_sign_of_the_change_depends_on_rate_as_measured() -> None:
    """Sjostrom et al. 2001 (abstract looked up): potentiation wins at high rates whatever the lag;
    pre before post at 0.1 Hz does nothing."""
    found = column(MINIMAL)
    assert (np.diff(found[:5]) > 0).all()
    assert abs(found[0]) < 1e-8
    assert (found[5:8] < 0).all()
    assert (found[8:] > 0).all()


def test_the_bursts_of_the_slice_experiment_are_not_the_schedule_of_the_fit() -> None:
    """15 bursts of 5 pairs every 10 s (from memory, mid to high) give +0.045 and -0.296 at 40 Hz,
    +0.031 and -0.162 at 50 Hz (derived and checked): the slow trace never builds up."""
    printed = {
        (10.0, 40.0): 0.045,
        (-10.0, 40.0): -0.296,
        (10.0, 50.0): 0.031,
        (-10.0, 50.0): -0.162,
    }
    for (lag, rate), value in printed.items():
        pre, post = pairs(lag, rate, 5)
        starts = 10_000.0 * np.arange(15)[:, None]
        found = change(MINIMAL, (starts + pre).ravel(), (starts + post).ravel())
        assert found == pytest.approx(value, abs=5.1e-4)


@pytest.mark.parametrize(
    ("name", "protocol", "printed"),
    [
        (name, protocol, value)
        for name, values in [
            ("hippocampal_full", HIPPOCAMPAL_FULL),
            ("hippocampal_minimal", HIPPOCAMPAL_MINIMAL),
        ]
        for protocol, value in zip(WANG, values, strict=True)
    ],
)
def test_triplets_give_the_printed_change(name: str, protocol: str, printed: float) -> None:
    """Wang et al. 2005 at 60 repetitions, 1 Hz; parameters from memory (high), values derived and
    checked; five digits."""
    found = change(TripletTiming.from_set(name), *repeated(*WANG[protocol]))
    assert found == pytest.approx(printed, abs=5.1e-6)


def drift(rule: TripletTiming, pre: float, post: float) -> float:
    """Pfister & Gerstner 2006, all-to-all, independent Poisson trains (from memory, high; derived
    and checked), 1/s with rates in Hz."""
    tau_plus, tau_minus, tau_x, tau_y = (
        t / 1000 for t in (rule.tau_plus, rule.tau_minus, rule.tau_x, rule.tau_y)
    )
    return (
        pre
        * post
        * (
            rule.a2_plus * tau_plus
            - rule.a2_minus * tau_minus
            + rule.a3_plus * tau_plus * tau_y * post
            - rule.a3_minus * tau_minus * tau_x * pre
        )
    )


def threshold(rule: TripletTiming) -> float:
    """The postsynaptic rate (Hz) at which a minimal model neither gains nor loses (derived)."""
    pairs_only = rule.a2_minus * rule.tau_minus - rule.a2_plus * rule.tau_plus
    return 1000 * pairs_only / (rule.a3_plus * rule.tau_plus * rule.tau_y)


def measured(rule: TripletTiming, pre: float, post: float, seed: int) -> tuple[float, float]:
    """Return drift and its standard error (1/s) over 300 stretches of 50 s, ten tau_x discarded."""
    found = changes(rule, pre, post, runs=300, seconds=50, burn_in=10, seed=seed)
    mean, error = mean_and_error(found)
    return mean / 50, error / 50


@pytest.mark.parametrize("name", TripletTiming.sets)
def test_the_drift_under_poisson_trains_is_the_closed_form(name: str) -> None:
    """12 and 20 Hz, four standard errors. Control: the drift without its triplet terms is out."""
    rule = TripletTiming.from_set(name)
    mean, error = measured(rule, 12, 20, seed=3)
    assert abs(mean - drift(rule, 12, 20)) < 4 * error
    pairs_only = TripletTiming(**{**rule.values, "a3_plus": 0, "a3_minus": 0})
    assert abs(mean - drift(pairs_only, 12, 20)) > 4 * error


@pytest.mark.parametrize(
    ("name", "printed"), [("visual_minimal", 19.2203), ("hippocampal_minimal", 5.3776)]
)
def test_the_sign_changes_at_the_threshold_rate(name: str, printed: float) -> None:
    """Thresholds derived from parameters from memory (high). Below (0.7) and above (1.3) the drift
    has its sign by more than four standard errors, at the threshold it is within four of zero."""
    rule = TripletTiming.from_set(name)
    theta = threshold(rule)
    assert theta == pytest.approx(printed, abs=5e-5)
    below, at, above = (measured(rule, 10, k * theta, seed=7) for k in (0.7, 1.0, 1.3))
    assert below[0] < -4 * below[1]
    assert abs(at[0]) < 4 * at[1]
    assert above[0] > 4 * above[1]


def test_the_drift_at_ten_and_forty_hertz_is_the_printed_one() -> None:
    """Visual minimal, presynaptic 10 Hz: -0.011478/s and +0.103472/s (derived; the second was
    printed cut off, not rounded, hence one unit of its last digit)."""
    for post, printed in ((10.0, -0.011478), (40.0, 0.103472)):
        assert drift(MINIMAL, 10, post) == pytest.approx(printed, abs=1e-6)
        mean, error = measured(MINIMAL, 10, post, seed=5)
        assert abs(mean - printed) < 4 * error
