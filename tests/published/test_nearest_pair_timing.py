"""The nearest-spike pair rule: its drift under Poisson trains, and what it cannot fit."""

from __future__ import annotations

import numpy as np
import pytest

from plastic.rules.nearest_pair_timing import NearestPairTiming
from tests.published.pairings import SJOSTROM, change, misfit, pairs
from tests.published.schemes import assert_drifts_as, nearest


def test_the_drift_is_that_of_symmetric_pairing_and_of_no_other() -> None:
    """Morrison, Diesmann & Gerstner 2008 name the schemes (from memory, high); the drift
    r_pre r_post (A+/(r_pre + 1/tau+) - A-/(r_post + 1/tau-)) is derived. Control: the drifts of
    the other schemes are more than four standard errors away."""
    assert nearest(12, 20) == pytest.approx(0.4859, abs=5e-5)  # as printed in the derivation
    assert_drifts_as(NearestPairTiming, "nearest", seed=21)


def column(**amplitudes: float) -> np.ndarray:
    rule = NearestPairTiming(**amplitudes)
    return np.array([change(rule, *pairs(p.lag, p.rate)) for p in SJOSTROM])


def test_it_cannot_fit_the_rate_dependence_at_any_amplitude() -> None:
    """Derived and checked: the best nearest-spike pair rule, time constants 16.8 and 33.7 ms, has
    E = 7.47 on the data of Sjostrom et al. 2001, where the triplet rule has 0.35. It is linear in
    its amplitudes, so least squares finds the best of all."""
    unit = 1e-6
    basis = np.array([column(a_plus=unit, a_minus=0), column(a_plus=0, a_minus=unit)]).T / unit
    mean, sem = (np.array([getattr(p, name) for p in SJOSTROM]) for name in ("mean", "sem"))
    best, *_ = np.linalg.lstsq(basis / sem[:, None], mean / sem, rcond=None)
    assert misfit(basis @ best) == pytest.approx(7.47, abs=0.005)
