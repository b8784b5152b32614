"""Random numbers as functions: published vectors of the hash, and the statistics of what it draws.

Every statistic is a z-score under its null hypothesis; the seeds are fixed, |z| < 4 is accepted and
a generator that is wrong in a way one could really get wrong must fail the same statistic.
"""

from __future__ import annotations

import itertools
import math
from collections.abc import Callable

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from numpy.typing import NDArray
from scipy import stats

from plastic import draws
from plastic.draws import GOLDEN, MASK, PARTS, binomial, key, lognormal, mix, named, normal, uniform

Floats = NDArray[np.float64]
WORDS = st.integers(0, MASK)

#: first outputs of the generator whose finaliser `mix` is (SplitMix64), by seed: from memory,
#: as printed beside its reference implementation and in collections of worked examples
SEQUENCES = {
    0: (0xE220A8397B1DCDAF, 0x6E789E6AA1B965F4, 0x06C45D188009454F, 0xF88BB8A8724C81EC),
    1234567: (6457827717110365317, 3203168211198807973, 9817491932198370423, 4593380528125082431),
}


@pytest.mark.parametrize("seed", SEQUENCES)
def test_the_hash_is_the_published_finaliser(seed: int) -> None:
    """Output n of the generator is the finaliser of seed + n times the golden ratio of 2^64."""
    found = tuple(mix(seed + GOLDEN * n) for n in (1, 2, 3, 4))
    assert found == SEQUENCES[seed]


def test_the_golden_ratio_is_that_of_two_to_the_sixty_four() -> None:
    """Steele, Lea & Flood 2014: the odd number nearest to 2^64 / phi; integers, no rounding."""
    phi_part = (math.isqrt(5 << 128) - (1 << 64)) // 2
    assert phi_part | 1 == GOLDEN


def test_a_stream_walks_the_published_sequence_by_ordinal_and_part() -> None:
    for part, word in enumerate(SEQUENCES[0]):
        assert uniform(0, 0, part) == (word >> 11) / 2**53
    assert uniform(0, 1, 0) == uniform(0, 0, PARTS)


def output(seed: int, n: int) -> int:
    """Return output n of the published generator, stepped from its seed."""
    state = seed
    for _ in range(n):
        state = (state + GOLDEN) & MASK
    return mix(state)


@given(seed=st.integers(0, 2**53), cell=st.integers(0, 50), channel=st.integers(0, 50))
def test_a_key_is_three_outputs_each_seeded_by_the_one_before(
    seed: int, cell: int, channel: int
) -> None:
    """The same bits in every version: a results file can be made again."""
    assert key(seed, cell, channel) == output(output(output(seed, 1), cell + 1), channel + 1)


@given(stream=WORDS, ordinal=st.integers(0, 2**40))
def test_a_normal_draw_is_that_of_box_and_muller(stream: int, ordinal: int) -> None:
    one, other = (uniform(stream, ordinal, part) for part in (draws.NORMAL_A, draws.NORMAL_B))
    polar = np.sqrt(-2 * np.log1p(-one)) * np.exp(2j * np.pi * other)
    assert normal(stream, ordinal) == pytest.approx(polar.real, rel=1e-12, abs=1e-12)


def unmix(z: int) -> int:
    """Undo the finaliser, step by step from its end."""

    def unshift(z: int, by: int) -> int:
        found = z
        for _ in range(64 // by + 1):
            found = z ^ (found >> by)
        return found

    z = unshift(z, 31) * pow(0x94D049BB133111EB, -1, 1 << 64) & MASK
    z = unshift(z, 27) * pow(0xBF58476D1CE4E5B9, -1, 1 << 64) & MASK
    return unshift(z, 30)


@given(z=WORDS)
def test_the_hash_loses_nothing_and_sees_sixty_four_bits(z: int) -> None:
    assert unmix(mix(z)) == z
    assert mix(z + (1 << 64)) == mix(z)
    assert 0 <= mix(z) <= MASK


def test_one_changed_bit_changes_half_of_the_bits() -> None:
    """Binomial(64, 1/2) per pair of words; the standard error is that of 64 000 fair coins.
    The control is the hash without its last two steps."""

    def first_step(z: int) -> int:
        return ((z ^ (z >> 30)) * 0xBF58476D1CE4E5B9) & MASK

    def score(hashed: Callable[[int], int]) -> float:
        words = [GOLDEN * k & MASK for k in range(1, 17)]
        flips = [
            (hashed(z) ^ hashed(z ^ (1 << bit))).bit_count() for z in words for bit in range(64)
        ]
        return (sum(flips) - 32 * len(flips)) / math.sqrt(16 * len(flips))

    assert abs(score(mix)) < 4
    assert abs(score(first_step)) > 20


def weak_key(seed: int, cell: int, channel: int) -> int:
    """What the schedule of keys avoids: raw indices that add up."""
    return mix(seed + cell + channel)


N = 4000
#: the axes along which two draws must have nothing to do with each other
NEIGHBOURS: dict[str, Callable[[Callable[[int, int, int], int]], tuple[Floats, Floats]]] = {
    "ordinals": lambda k: pair(
        lambda i: uniform(k(1, 2, 3), i), lambda i: uniform(k(1, 2, 3), i + 1)
    ),
    "parts": lambda k: pair(
        lambda i: uniform(k(1, 2, 3), i, 0), lambda i: uniform(k(1, 2, 3), i, 1)
    ),
    "cells": lambda k: pair(lambda i: uniform(k(1, i, 3), 0), lambda i: uniform(k(1, i + 1, 3), 0)),
    "channels": lambda k: pair(
        lambda i: uniform(k(1, 2, i), 0), lambda i: uniform(k(1, 2, i + 1), 0)
    ),
    "seeds": lambda k: pair(lambda i: uniform(k(i, 2, 3), 0), lambda i: uniform(k(i + 1, 2, 3), 0)),
    "a cell and the next cell's channel before": lambda k: pair(
        lambda i: uniform(k(1, i, 3), 0), lambda i: uniform(k(1, i + 1, 2), 0)
    ),
    "a seed and the cell after": lambda k: pair(
        lambda i: uniform(k(i, 2, 3), 0), lambda i: uniform(k(i + 1, 1, 3), 0)
    ),
}


def pair(one: Callable[[int], float], other: Callable[[int], float]) -> tuple[Floats, Floats]:
    """Return two series of draws."""
    return np.array([one(i) for i in range(N)]), np.array([other(i) for i in range(N)])


def correlation_score(one: Floats, other: Floats) -> float:
    """Return the correlation over its standard error 1 / sqrt(n) under independence."""
    return float(np.corrcoef(one, other)[0, 1] * math.sqrt(len(one)))


@pytest.mark.parametrize("axis", NEIGHBOURS)
def test_neighbouring_draws_are_independent(axis: str) -> None:
    one, other = NEIGHBOURS[axis](key)
    assert abs(correlation_score(one, other)) < 4
    assert abs(correlation_score((one - 0.5) ** 2, (other - 0.5) ** 2)) < 4


def test_raw_indices_as_keys_would_not_be_independent() -> None:
    """The control of the test above, and the reason for the schedule of keys."""
    one, other = NEIGHBOURS["a cell and the next cell's channel before"](weak_key)
    assert correlation_score(one, other) > 50


def uniform_score(values: Floats, cells: int = 50) -> float:
    """Return the chi-square of equal bins as a z-score: (X - k) / sqrt(2 k), k = bins - 1."""
    counts = np.bincount((values * cells).astype(int), minlength=cells)
    expected = len(values) / cells
    chi = float(((counts - expected) ** 2 / expected).sum())
    return (chi - (cells - 1)) / math.sqrt(2 * (cells - 1))


@pytest.mark.parametrize("axis", ["ordinals", "cells", "channels", "seeds"])
def test_draws_fill_the_unit_interval_evenly(axis: str) -> None:
    values, _ = NEIGHBOURS[axis](key)
    assert values.min() >= 0
    assert values.max() < 1
    assert abs(uniform_score(values)) < 4
    assert abs((values.mean() - 0.5) / math.sqrt(1 / 12 / N)) < 4
    assert uniform_score(values**1.2) > 4  # the control: a little too many small numbers


def test_pairs_of_draws_fill_the_square_evenly() -> None:
    one, other = NEIGHBOURS["ordinals"](key)
    square = (np.floor(one * 7) * 7 + np.floor(other * 7)) / 49
    assert abs(uniform_score(square + 1e-9, 49)) < 4
    diagonal = (np.floor(one * 7) * 8) / 49  # the control: the same number twice
    assert uniform_score(diagonal + 1e-9, 49) > 50


def test_normal_draws_are_standard_normal() -> None:
    """Mean, variance (standard error sqrt(2/n)), fourth moment (sqrt(96/n)) and the whole shape."""
    values = np.array([normal(key(5, 6, 7), i) for i in range(N)])
    assert abs(values.mean() * math.sqrt(N)) < 4
    assert abs((values.var() - 1) / math.sqrt(2 / N)) < 4
    assert abs(((values**4).mean() - 3) / math.sqrt(96 / N)) < 4
    assert abs(uniform_score(stats.norm.cdf(values))) < 4
    assert uniform_score(stats.norm.cdf(1.2 * values)) > 4  # the control: a fifth too wide


@pytest.mark.parametrize(("trials", "p"), [(1, 0.3), (8, 0.6), (40, 0.05)])
def test_counts_are_binomial(trials: int, p: float) -> None:
    """Chi-square against the binomial law (scipy), as a z-score; control: p off by a tenth."""
    found = np.array([binomial(key(8, 9, 10), i, trials, p) for i in range(N)])

    def score(p: float) -> float:
        expected = N * stats.binom.pmf(np.arange(trials + 1), trials, p)
        counts = np.bincount(found, minlength=trials + 1)
        kept = expected > 5
        rest = max(expected[~kept].sum(), 1e-9)
        chi = float(((counts - expected)[kept] ** 2 / expected[kept]).sum())
        chi += float((counts[~kept].sum() - expected[~kept].sum()) ** 2 / rest) * (rest > 5)
        degrees = int(kept.sum()) - 1 + (rest > 5)
        return (chi - degrees) / math.sqrt(2 * degrees)

    assert abs(score(p)) < 4
    assert score(1.1 * p) > 4


def test_certain_and_impossible_successes_are_exact() -> None:
    assert binomial(1, 0, 20, 1.0) == 20
    assert binomial(1, 0, 20, 0.0) == 0
    assert binomial(1, 0, 0, 0.5) == 0


def test_the_draws_of_one_event_do_not_share_a_part() -> None:
    """Release, refilling, the fractional site and the quantal noise use different numbers."""
    used = [
        range(draws.MOST_SITES),
        range(draws.REFILL, draws.REFILL + draws.MOST_SITES),
        *([part] for part in (draws.FRACTION, draws.NORMAL_A, draws.NORMAL_B)),
    ]
    assert all(not set(one) & set(other) for one, other in itertools.combinations(used, 2))
    assert max(map(max, used)) < PARTS


@given(cells=st.integers(1, 60), more=st.integers(0, 60), seed=st.integers(0, 2**53))
def test_a_cell_has_the_same_number_whatever_the_number_of_cells(
    cells: int, more: int, seed: int
) -> None:
    few, many = named(seed, cells, "threshold"), named(seed, cells + more, "threshold")
    assert few.tolist() == many[:cells].tolist()


def test_named_numbers_are_normal_and_every_name_has_its_own() -> None:
    one, other, again = (named(3, N, name) for name in ("load", "loads", "load"))
    assert one.tolist() == again.tolist()
    assert abs(correlation_score(one, other)) < 4
    assert correlation_score(one, again) > 50  # the control
    assert abs(uniform_score(stats.norm.cdf(one))) < 4
    assert np.isfinite(one).all()


@pytest.mark.parametrize(("mean", "cv"), [(5.0, 0.3), (0.275, 0.05), (60.0, 1.5)])
def test_lognormal_values_have_the_mean_and_the_cv_asked_for(mean: float, cv: float) -> None:
    """Moments over normal scores by Gauss-Hermite quadrature (numpy): no sampling error."""
    scores, weights = np.polynomial.hermite_e.hermegauss(80)
    weights = weights / weights.sum()
    values = lognormal(mean, cv, scores)
    found = float(weights @ values)
    assert found == pytest.approx(mean, rel=1e-10)
    assert float(weights @ (values - found) ** 2) ** 0.5 / found == pytest.approx(cv, rel=1e-8)


def test_a_lognormal_value_is_positive_rises_with_its_score_and_needs_no_spread() -> None:
    scores = np.linspace(-6, 6, 25)
    values = lognormal(2.0, 0.4, scores)
    assert (values > 0).all()
    assert (np.diff(values) > 0).all()
    assert lognormal(2.0, 0.4, np.zeros(1))[0] == pytest.approx(2 / math.sqrt(1.16), rel=1e-14)
    assert lognormal(2.0, 0.0, scores).tolist() == [2.0] * 25
