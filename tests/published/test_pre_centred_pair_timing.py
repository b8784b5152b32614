"""The presynaptic-centred pair rule: drift under Poisson trains and the threshold rate."""

from __future__ import annotations

import pytest

from plastic.rules.pair_timing import PairTiming
from plastic.rules.pre_centred_pair_timing import PreCentredPairTiming
from tests.published.schemes import (
    A_MINUS,
    A_PLUS,
    TAU_MINUS,
    TAU_PLUS,
    assert_drifts_as,
    measured,
    pre_centred,
)

#: Izhikevich & Desai 2003 (formula from memory, high; derived), Hz
THETA = 1000 * (A_MINUS / TAU_PLUS - A_PLUS / TAU_MINUS) / (A_PLUS - A_MINUS)


def test_the_drift_is_that_of_presynaptic_centred_pairing_and_of_no_other() -> None:
    """Izhikevich & Desai 2003 (abstract looked up, form from memory, high; derived and checked):
    r_pre x (A+/(1/tau+ + x) - A-/(1/tau- + x)). Control: the other schemes are out."""
    assert_drifts_as(PreCentredPairTiming, "pre_centred", seed=22)


def test_the_sign_changes_at_the_threshold_rate() -> None:
    """A+ 1.03, A- 0.51, 14 and 34 ms (from memory), presynaptic 12 Hz: theta = 11.797 Hz; drift
    -0.0806/s at 5 Hz, 0 at theta, 0.5655/s at 30 Hz (derived and checked), four standard errors.
    Control: the all-to-all rule has the other sign at 5 Hz or at 30 Hz."""
    assert pytest.approx(11.797, abs=5e-4) == THETA
    for seed, (post, printed) in enumerate([(5.0, -0.0806), (THETA, 0.0), (30.0, 0.5655)]):
        assert pre_centred(12, post) == pytest.approx(printed, abs=5e-5)
        mean, error = measured(PreCentredPairTiming, 12, post, seed=seed)
        assert abs(mean - printed) < 4 * error
        assert (abs(mean) > 4 * error) == (post != THETA)
    low, high = (measured(PairTiming, 12, post, seed=5)[0] for post in (5.0, 30.0))
    assert low * high > 0
