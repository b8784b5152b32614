"""The rules' portraits against closed forms and published tables."""

import numpy as np
import pytest

from plastic.report.figures.portrait import LAGS, change, lag_window, rate_dependence
from plastic.rules.pair_timing import PairTiming
from plastic.rules.sliding_threshold import SlidingThreshold
from plastic.rules.triplet_timing import TripletTiming


@pytest.mark.parametrize("lag", [-60.0, -10.0, 10.0, 60.0])
def test_sixty_slow_pairs_are_sixty_times_one_pair(lag):
    # closed form; pairs 1 s apart see each other by less than exp(-900/33.7) = 3e-12
    rule = PairTiming()
    one = (
        rule.a_plus * np.exp(-lag / rule.tau_plus)
        if lag > 0
        else -rule.a_minus * np.exp(lag / rule.tau_minus)
    )
    assert change(rule, lag, 1000.0) == pytest.approx(60 * one, rel=1e-9)


@pytest.mark.parametrize(
    ("lag", "rate", "published"),
    [(10.0, 20.0, 0.23), (-10.0, 40.0, 0.17), (10.0, 50.0, 0.76), (-10.0, 50.0, 0.75)],
)
def test_continuous_pairs_give_the_known_rate_dependence(lag, rate, published):
    # minimal triplet model on 60 continuous pairs (Pfister & Gerstner 2006, parameters from
    # memory); values recomputed apart from this code, to two digits
    assert change(TripletTiming(), lag, 1000.0 / rate) == pytest.approx(published, abs=0.006)


def test_at_half_the_period_both_lags_are_the_same_phase():
    # 50 Hz and 10 ms: only the edges of the train differ; at 20 Hz the two lags must differ
    fast = [change(TripletTiming(), lag, 20.0) for lag in (10.0, -10.0)]
    slow = [change(TripletTiming(), lag, 50.0) for lag in (10.0, -10.0)]
    assert abs(fast[0] - fast[1]) < 0.03
    assert abs(slow[0] - slow[1]) > 0.3


def test_a_rule_blind_to_order_has_a_window_that_is_even():
    picture = lag_window({"sliding": SlidingThreshold()})
    by_lag = {float(row["lag_ms"]): float(row["change_percent"]) for row in picture.rows}
    assert sorted(by_lag) == sorted(LAGS)
    for lag in (4.0, 40.0):
        assert by_lag[lag] == pytest.approx(by_lag[-lag], abs=1e-9)


@pytest.mark.parametrize("portrait", [lag_window, rate_dependence])
def test_an_illustrative_rule_has_its_sign_and_an_axis_of_its_own(portrait):
    """Whatever its place: the others share theirs."""
    rules = {"sliding": SlidingThreshold(), "pair": PairTiming(), "triplet": TripletTiming()}
    figure = portrait(rules).figure(85)
    sliding, pair, triplet = figure.axes
    assert [axes.get_title() for axes in figure.axes] == ["sliding ‡", "pair", "triplet"]
    assert "‡\u00a0illustrative" in figure.texts[0].get_text()
    assert pair.get_ylim() == triplet.get_ylim() != sliding.get_ylim()


def test_illustrative_rules_alone_share_their_axis():
    rules = {"one": SlidingThreshold(), "two": SlidingThreshold(tau_theta=2000.0)}
    one, two = rate_dependence(rules).figure(85).axes
    assert one.get_ylim() == two.get_ylim()


def test_schedule_and_lag_are_told_beside_every_number():
    row = rate_dependence({"pair": PairTiming()}).rows[0]
    assert set(row) == {"rule", "lag_ms", "pairs", "rate_hz", "change_percent"}
