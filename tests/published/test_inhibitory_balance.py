"""Inhibitory balance against Vogels et al. 2011: one pair, drift, the target rate in a cell."""

from __future__ import annotations

import numpy as np
import pytest

from plastic import impose
from plastic.rules.inhibitory_balance import InhibitoryBalance
from tests.published.balanced import outcome
from tests.published.poisson import changes, mean_and_error

RULE = InhibitoryBalance(eta=1e-3)  # rho_0 = 5 Hz, tau = 20 ms


def test_one_pair_at_every_lag_traces_the_symmetric_window() -> None:
    """eta (e^(-|D|/tau) - alpha), exact (derived from equations from memory, high). Compiled; one
    input per lag; eta large, so that the rounding of w = 1 + dw stays below the tolerance."""
    rule, lags = InhibitoryBalance(eta=0.9), np.array([k for k in range(-100, 101, 5) if k])
    found = impose(rule, {f"{lag}": [200.0 - lag] for lag in lags}, [200.0]).w[:, -1].values - 1
    np.testing.assert_allclose(found, 0.9 * (np.exp(-np.abs(lags) / 20) - 0.2), rtol=1e-12)


def drift(pre: float, post: float, seed: int) -> tuple[float, float]:
    """Return the drift per second and its standard error, from 400 stretches of 50 s."""
    found = changes(RULE, pre, post, runs=400, seconds=50.0, burn_in=1.0, seed=seed)
    mean, error = mean_and_error(found / 50.0)
    return mean, error


@pytest.mark.parametrize(("post", "printed"), [(2.0, -1.2e-3), (5.0, 0.0), (9.0, 1.6e-3)])
def test_the_drift_is_the_departure_from_the_target_rate(post: float, printed: float) -> None:
    """2 eta tau r_pre (r_post - rho_0), independent Poisson trains (derived, checked): -1.2e-3, 0
    and 1.6e-3 per second at 10 Hz. Standard error over 400 stretches, 4 of them allowed.

    Control: a target 1 Hz away is more than 4 errors away.
    """
    mean, error = drift(10.0, post, seed=int(post))
    expected = 2 * 1e-3 * 0.020 * 10.0 * (post - 5.0)
    assert expected == pytest.approx(printed, abs=1e-12)
    assert abs(mean - expected) < 4 * error
    assert abs(mean - expected - 2 * 1e-3 * 0.020 * 10.0) > 4 * error


@pytest.mark.parametrize("pre", [3.0, 30.0])
def test_the_target_rate_is_the_same_for_every_presynaptic_rate(pre: float) -> None:
    """Derived: the drift at rho_0 is zero for any r_pre; 4 standard errors. Control: at 8 Hz it is
    not."""
    mean, error = drift(pre, 5.0, seed=20)
    assert abs(mean) < 4 * error
    mean, error = drift(pre, 8.0, seed=21)
    assert mean > 4 * error


def rate(rule: InhibitoryBalance, kind: str = "i", **settings: int) -> float:
    """Return the rate (Hz) of a leaky cell in the last half of 400 s."""
    spikes, _ = outcome(rule, kind, seconds=400.0, **settings)
    return float((spikes > 200).sum() / 200)


@pytest.mark.parametrize("rho_0", [5.0, 10.0, 20.0])
def test_a_cell_ends_at_the_target_rate(rho_0: float) -> None:
    """Vogels et al. 2011: within 10 %, from below and from above. Control: a cell that learns
    nothing fires at neither of the three."""
    assert rate(InhibitoryBalance(eta=0.02, rho_0=rho_0)) == pytest.approx(rho_0, rel=0.10)
    assert rate(InhibitoryBalance(eta=0.0, rho_0=rho_0)) != pytest.approx(rho_0, rel=0.20)


def test_what_misses_the_target_is_the_effect_of_one_input_on_the_spikes() -> None:
    """A spike is less likely after an inhibitory one, so the cell ends above rho_0, by an amount
    that falls with the number of inputs that share the conductance (derived): five times as many,
    a fifth. Found: 1.0 and 0.3 Hz; a rate over 200 s varies by 0.1 Hz from seed to seed."""
    few, many = (rate(InhibitoryBalance(eta=0.02), inhibitory=n) - 5.0 for n in (20, 100))
    assert few > 0.7
    assert many == pytest.approx(few / 5, abs=0.2)
    assert many < 0.5 * few


def test_on_excitatory_inputs_the_target_rate_is_where_it_runs_away_from() -> None:
    """What the rule says of itself: from 15 Hz, a target below runs up and one above runs down."""
    up, down = (
        outcome(InhibitoryBalance(eta=1e-3, rho_0=rho_0), "e", seconds=150.0)[1].mean()
        for rho_0 in (5.0, 25.0)
    )
    assert down < 0.1 < 3.0 < up
