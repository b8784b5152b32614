"""The paired-pulse ratio: the published recursion, draws of single sites, and what moves it."""

from __future__ import annotations

import math

import numpy as np
import pytest

from plastic.measures.paired_pulse_ratio import INTERVAL, PairedPulseRatio
from tests.measures.readouts import Floats, Readout, paired, single

#: p, depletion, facilitation (ms): depressing, facilitating, both, neither
SYNAPSES = [(0.5, 800.0, 0.0), (0.1, 0.0, 300.0), (0.3, 200.0, 60.0), (0.4, 0.0, 0.0)]


def of(readout: Readout) -> float:
    return float(PairedPulseRatio.value(readout)[0, 0, 0])


def synapse(p: float, depletion: float, facilitation: float, **more: float) -> Readout:
    return single(probability=p, depletion=depletion, facilitation=facilitation, **more)


def left(tau: float) -> float:
    """Return what is left of a process after the interval; nothing where there is none."""
    return math.exp(-INTERVAL / tau) if tau > 0 else 0.0


def second_over_first(p: float, depletion: float, facilitation: float) -> float:
    """Return u2 R2 / (u1 R1) of the recursion of Tsodyks & Markram 1997 (from memory)."""
    u, R = p, 1.0
    after = R - u * R
    R2 = 1 - (1 - after) * left(depletion)
    u2 = p + u * (1 - p) * left(facilitation)
    return u2 * R2 / (u * R)


@pytest.mark.parametrize(("p", "depletion", "facilitation"), SYNAPSES)
def test_it_is_that_of_the_published_recursion(
    p: float, depletion: float, facilitation: float
) -> None:
    expected = second_over_first(p, depletion, facilitation)
    assert of(synapse(p, depletion, facilitation)) == pytest.approx(expected, rel=1e-12)


def pairs(p: float, depletion: float, facilitation: float, trials: int) -> tuple[Floats, Floats]:
    """Return the numbers of quanta of two stimuli: ten sites that empty and refill one by one."""
    rng = np.random.default_rng(8)
    first = rng.random((trials, 10)) < p
    refilled = ~first | (rng.random((trials, 10)) < 1 - left(depletion))
    use = p + p * (1 - p) * left(facilitation)
    second = refilled & (rng.random((trials, 10)) < use)
    return first.sum(axis=1).astype(float), second.sum(axis=1).astype(float)


@pytest.mark.parametrize(("p", "depletion", "facilitation"), SYNAPSES)
def test_sites_that_empty_and_refill_by_chance_have_it_on_average(
    p: float, depletion: float, facilitation: float
) -> None:
    """Mean second minus ratio times first over 40 000 trials, |z| < 4; control: ratio + 0.05."""
    first, second = pairs(p, depletion, facilitation, 40_000)
    ratio = of(synapse(p, depletion, facilitation))
    z = []
    for claimed in (ratio, ratio + 0.05):
        rest = second - claimed * first
        z.append(rest.mean() / (rest.std(ddof=1) / 200))
    assert abs(z[0]) < 4 < abs(z[1])


@pytest.mark.parametrize(("depletion", "facilitation"), [(800.0, 0.0), (0.0, 300.0), (200.0, 60.0)])
def test_it_falls_with_the_probability_and_with_nothing_else(
    depletion: float, facilitation: float
) -> None:
    before = of(synapse(0.3, depletion, facilitation))
    assert of(synapse(0.45, depletion, facilitation)) < before - 0.01
    for more in ({"quantum": 2.0}, {"sites": 77.0}, {"effect": 0.2}, {"quantal_cv": 0.9}):
        same = of(synapse(0.3, depletion, facilitation, **more))
        assert same == pytest.approx(before, rel=1e-12)


def test_a_synapse_without_dynamics_gives_the_same_twice() -> None:
    assert of(synapse(0.2, 0.0, 0.0)) == of(synapse(0.9, 0.0, 0.0)) == 1.0


def test_contacts_weigh_by_their_first_responses() -> None:
    """The ratio of the means, not the mean of the ratios (Kim & Alger 2001, from memory)."""
    strong = synapse(0.5, 800.0, 0.0, sites=40.0, effect=2.0)
    weak = synapse(0.1, 0.0, 300.0, sites=10.0, effect=0.5)
    ratios = [second_over_first(*SYNAPSES[0]), second_over_first(*SYNAPSES[1])]
    sizes = [40 * 0.5 * 0.5 * 2.0, 10 * 0.1 * 0.5 * 0.5]
    expected = float(np.average(ratios, weights=sizes))
    assert of(paired(strong, weak)) == pytest.approx(expected, rel=1e-12)
    assert abs(expected - np.mean(ratios)) > 0.1


def test_without_a_first_response_there_is_no_ratio() -> None:
    assert math.isnan(of(single(sites=0.0)))
    assert math.isnan(of(single(probability=0.0)))
