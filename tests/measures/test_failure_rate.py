"""How often nothing is released at any contact."""

from __future__ import annotations

import pytest
from scipy.stats import binom

from plastic.measures.failure_rate import FailureRate
from tests.measures.readouts import drawn, paired, single


def failures(**changes: object) -> list[float]:
    return [float(x) for x in FailureRate.value(single(**changes))[0, 0]]


def test_it_is_the_chance_of_no_release_at_any_site() -> None:
    """(1 - p)^N, by scipy's binomial distribution; del Castillo & Katz 1954."""
    found = failures(sites=[3.0, 30.0, 3.0], probability=[0.4, 0.4, 0.9])
    assert found == pytest.approx(list(binom.pmf(0, [3, 30, 3], [0.4, 0.4, 0.9])), rel=1e-12)


def test_a_fractional_site_fails_when_it_is_absent_too() -> None:
    assert failures(sites=[2.5], probability=[0.4]) == pytest.approx([0.6**2 * (1 - 0.5 * 0.4)])


def test_an_input_fails_when_all_its_contacts_do() -> None:
    both = paired(single(sites=3.0, probability=0.4), single(sites=2.0, probability=0.7))
    assert FailureRate.value(both)[0, 0] == pytest.approx([0.6**3 * 0.3**2])


def test_an_absent_contact_changes_nothing() -> None:
    both = paired(single(sites=3.0), single(sites=0.0))
    assert FailureRate.value(both)[0, 0].tolist() == failures(sites=3.0)


def test_the_quantum_does_not_move_it_and_more_release_does() -> None:
    """What tells a larger quantum from more release at minimal stimulation."""
    small, large = failures(sites=3.0, quantum=[0.1, 5.0])
    assert small == large
    assert failures(sites=[3.0, 4.0, 3.0], probability=[0.4, 0.4, 0.5])[0] == small
    assert failures(sites=4.0)[0] < small
    assert failures(sites=3.0, probability=0.5)[0] < small


def test_certain_release_never_fails_and_no_release_always_does() -> None:
    assert failures(probability=[1.0, 0.0]) == [0.0, 1.0]


def test_it_is_the_share_of_draws_that_are_nothing() -> None:
    """20 000 draws, |z| < 4; control: one site more is told apart."""
    both = paired(single(sites=2.5, probability=0.3), single(sites=3.0, probability=0.2))
    more = paired(single(sites=2.5, probability=0.3), single(sites=4.0, probability=0.2))
    share = (drawn(both, 20_000) == 0).mean()
    z = [
        (share - p) / (p * (1 - p) / 20_000) ** 0.5
        for p in (float(FailureRate.value(r)[0, 0, 0]) for r in (both, more))
    ]
    assert abs(z[0]) < 4 < abs(z[1])
