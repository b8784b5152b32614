"""CV^-2: what moves it, what does not, and that draws have it."""

from __future__ import annotations

import math
from dataclasses import replace

import numpy as np
import pytest

from plastic.measures.inverse_cv2 import InverseCv2
from tests.measures.readouts import Readout, drawn, paired, single


def of(readout: Readout) -> float:
    return float(InverseCv2.value(readout)[0, 0, 0])


@pytest.mark.parametrize("p", [0.1, 0.4, 0.9])
@pytest.mark.parametrize("cv", [0.0, 0.3])
def test_one_contact_has_the_binomial_value(p: float, cv: float) -> None:
    """N p / (1 - p + cv^2), textbook; Malinow & Tsien 1990 plot it."""
    expected = 30 * p / (1 - p + cv**2)
    assert of(single(probability=p, quantal_cv=cv)) == pytest.approx(expected, rel=1e-12)


@pytest.mark.parametrize("multiple", [0.5, 1.4, 2.0])
def test_a_change_of_the_quantum_leaves_it(multiple: float) -> None:
    assert of(single(quantum=0.5 * multiple)) == pytest.approx(of(single()), rel=1e-12)
    assert of(single(effect=1.5 * multiple)) == pytest.approx(of(single()), rel=1e-12)


@pytest.mark.parametrize("multiple", [0.5, 1.4, 2.0])
def test_a_change_of_the_sites_moves_it_with_the_mean(multiple: float) -> None:
    assert of(single(sites=30 * multiple)) == pytest.approx(multiple * of(single()), rel=1e-12)


@pytest.mark.parametrize("multiple", [0.5, 1.4, 2.0])
def test_a_change_of_the_probability_moves_it_by_more_than_the_mean(multiple: float) -> None:
    """On a locus plot p lies steeper than the diagonal, on either side of 1."""
    ratio = of(single(probability=0.4 * multiple)) / of(single())
    assert math.log(ratio) / math.log(multiple) > 1.05


def test_variances_of_contacts_add_in_millivolts() -> None:
    """A near contact of 2 mV/nS and a far one of 0.5: by hand from N p q e and its variance."""
    near, far = single(effect=2.0, sites=10.0), single(effect=0.5, sites=40.0, probability=0.6)
    unit = (0.5 * 2.0, 0.5 * 0.5)
    mean = 10 * 0.4 * unit[0] + 40 * 0.6 * unit[1]
    spread = 10 * 0.4 * (0.6 + 0.09) * unit[0] ** 2 + 40 * 0.6 * (0.4 + 0.09) * unit[1] ** 2
    assert of(paired(near, far)) == pytest.approx(mean**2 / spread, rel=1e-12)


def test_equal_halves_are_the_whole() -> None:
    assert of(paired(single(sites=15.0), single(sites=15.0))) == pytest.approx(of(single()))
    assert of(paired(single(), single(sites=0.0))) == of(single())


def test_a_contact_of_no_read_input_is_left_out() -> None:
    both = paired(single(), single(sites=50.0))
    assert of(replace(both, input_of=np.array([0, -1]))) == of(single())


def test_release_that_never_varies_is_infinite_and_none_is_no_number() -> None:
    assert math.isinf(of(single(probability=1.0, quantal_cv=0.0)))
    assert math.isnan(of(single(sites=0.0)))


@pytest.mark.parametrize("sites", [6.0, 6.5])
def test_draws_have_it(sites: float) -> None:
    """200 000 draws, the error from 200 batches, |z| < 4. Control: without quantal variance."""
    readout = paired(single(sites=sites), single(sites=3.0, effect=0.7, probability=0.7))
    draws = drawn(readout, 200_000)
    batches = draws.reshape(200, 1000)
    spread = (batches.mean(axis=1) ** 2 / batches.var(axis=1, ddof=1)).std(ddof=1)
    found, error = draws.mean() ** 2 / draws.var(), spread / math.sqrt(200)
    control = replace(readout, quantal_cv=np.zeros(2))
    assert abs(found - of(readout)) < 4 * error < abs(found - of(control))
