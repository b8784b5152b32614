"""Compiled draws and quanta: the bits of the plain originals, the moments of binomial release."""

from __future__ import annotations

import math

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from plastic import draws
from plastic.engine import steps
from plastic.membrane.release import count_probabilities, mean_conductance, variance

quick = settings(deadline=None, max_examples=50)
COUNTS = st.integers(0, 2**40)


@quick
@given(z=st.integers(0, draws.MASK))
def test_the_hash_is_the_plain_one(z: int) -> None:
    assert int(steps.mix(np.uint64(z))) == draws.mix(z)


@quick
@given(seed=st.integers(0, 2**53), cell=st.integers(0, 10**6), channel=st.integers(0, 10**4))
def test_keys_are_the_plain_ones(seed: int, cell: int, channel: int) -> None:
    assert int(steps.stream_of(seed, cell, channel)) == draws.key(seed, cell, channel)


@quick
@given(
    stream=st.integers(0, draws.MASK),
    ordinal=COUNTS,
    part=st.integers(0, 4095),
    trials=st.integers(0, 60),
    p=st.floats(0, 1),
)
def test_draws_are_the_plain_ones_bit_for_bit(
    stream: int, ordinal: int, part: int, trials: int, p: float
) -> None:
    key = np.uint64(stream)
    assert steps.uniform(key, ordinal, part) == draws.uniform(stream, ordinal, part)
    expected = draws.binomial(stream, ordinal, trials, p, part)
    assert steps.binomial(key, ordinal, trials, p, part) == expected
    assert steps.normal(key, ordinal) == pytest.approx(
        draws.normal(stream, ordinal), rel=1e-15, abs=1e-15
    )


def test_the_parts_of_an_event_are_the_plain_ones() -> None:
    for name in ("FRACTION", "NORMAL_A", "NORMAL_B", "REFILL", "PARTS", "GOLDEN"):
        assert int(getattr(steps, name)) == getattr(draws, name)


@pytest.mark.parametrize(("sites", "p", "cv"), [(12, 0.4, 0.3), (5, 0.9, 0.0), (30, 1.0, 0.2)])
def test_quanta_have_the_mean_and_the_variance_of_binomial_release(
    sites: int, p: float, cv: float
) -> None:
    """Standard errors: sd/sqrt(n), and sqrt((m4 - var^2)/n) from the sample's fourth moment.
    Control: the law of one site more."""
    n, q, key = 20_000, 0.5, np.uint64(draws.key(1, 2, 3))
    drawn = [steps.quanta(key, i, sites, p, q, cv) for i in range(n)]
    values = np.array([amount for _, amount in drawn])
    fourth = float(((values - values.mean()) ** 4).mean())

    def scores(sites: int) -> list[float]:
        var = float(variance(sites, p, q, cv))
        mean_score = (values.mean() - float(mean_conductance(sites, p, q))) / math.sqrt(var / n)
        spread_score = (values.var() - var) / math.sqrt((fourth - var**2) / n)
        return [float(abs(mean_score)), float(abs(spread_score))]

    assert max(scores(sites)) < 4
    assert max(scores(sites + 1)) > 10
    assert min(values) >= 0
    counts = np.bincount([count for count, _ in drawn], minlength=sites + 1) / n
    law = count_probabilities(sites, p)
    z = (counts - law) / np.sqrt(np.maximum(law * (1 - law), 1 / n) / n)
    assert np.abs(z).max() < 4.5  # the largest of up to 31 scores


def test_a_fractional_site_exists_with_a_fractional_chance() -> None:
    n, key = 20_000, np.uint64(draws.key(4, 5, 6))
    found = np.array([steps.trials_of(key, i, 3.3) for i in range(n)])
    assert set(found) == {3, 4}
    assert abs((found.mean() - 3.3) / math.sqrt(0.3 * 0.7 / n)) < 4
    assert abs((found.mean() - 3.25) / math.sqrt(0.3 * 0.7 / n)) > 4  # the control
    assert {steps.trials_of(key, i, 3.0) for i in range(50)} == {3}
