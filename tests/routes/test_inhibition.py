"""Less inhibition: what the input recruits gets weaker, and its own release stays as it is."""

from __future__ import annotations

import numpy as np
import pytest

from plastic.engine.readings import Reader
from plastic.routes import Mixture
from plastic.routes.inhibition import Inhibition
from tests.engine.readers import (
    BRAKE,
    Opening,
    integrated,
    lands,
    least,
    network,
    reader_of,
    scene_of,
    state_at,
)

DELAY = 2.0  # ms
OVER = 12.0  # mV
EASY = Inhibition(lowest=0.1)
ROUTE = Mixture.pure("inhibition", EASY)
FACTORS = [0.5, 1.0, 1.7, 3.0, 1e9]
LEFT = [2.0, 1.0, 1 / 1.7, 1 / 3.0, 0.1]


def braked(*, driven: bool = True) -> Reader:
    """Return a reader: "weak", at 300 um, recruits 8 nS of inhibition at the soma if `driven`."""
    landing = (lands("brake", 0.0, BRAKE), lands("weak", 300.0))
    scene = scene_of(*landing, drives=[("weak", "brake", DELAY)] if driven else [])
    return reader_of(scene, probability=[1.0, 0.5], sites=20.0, quantum=0.4, threshold=OVER)


def openings(g: float, left: float) -> list[Opening]:
    return [Opening(g, 1), Opening(8.0 * left, 0, BRAKE, DELAY)]


def test_inhibition_is_divided_by_the_factor_between_its_limits() -> None:
    assert Inhibition().multiple([0.5, 1.0, 2.0]).tolist() == [2.0, 1.0, 0.5]
    assert Inhibition().multiple([0.0, 1e9]).tolist() == [Inhibition().highest, Inhibition().lowest]
    assert Inhibition().multiple(4.0, share=0.5) == pytest.approx(0.5)


def test_only_the_quantum_of_what_the_input_recruits_moves() -> None:
    state = state_at(braked(), ROUTE, FACTORS)
    brake, weak = 0, 1
    np.testing.assert_allclose(state.quantum[0, brake], 0.4 * np.array(LEFT))
    assert (state.quantum[0, weak] == 0.4).all()
    assert (state.probability == state.probability[..., :1]).all()
    assert (state.sites == 20.0).all()


def test_inhibition_of_somebody_else_does_not_move() -> None:
    state = state_at(braked(driven=False), ROUTE, FACTORS)
    assert (state.quantum == 0.4).all()


@pytest.mark.parametrize("k", range(len(FACTORS)))
def test_the_epsp_is_cut_less_by_what_the_equation_says(k: int) -> None:
    """Against scipy: 4 nS at 300 um with what is left of 8 nS at the soma, 2 ms later.

    At twice the inhibition the highest point is another one, the one before it arrives; the table
    has a kink there, which costs 0.37 %. Elsewhere 0.002 %.
    """
    reader = braked()
    found = reader.shape("weak", ROUTE, state_at(reader, ROUTE, FACTORS)).peak[0, k]
    exact = integrated(network(8.0, [300.0]), openings(4.0, LEFT[k]))[1].max()
    assert found == pytest.approx(exact, rel=5e-3 if LEFT[k] > 1 else 2e-4)


@pytest.mark.parametrize("k", range(len(FACTORS)))
def test_the_threshold_falls_by_what_the_equation_says(k: int) -> None:
    """g* by root finding with scipy, to half a per cent as for every other table."""
    reader = braked()
    found = reader.threshold("weak", ROUTE, state_at(reader, ROUTE, FACTORS))[0, k]
    exact = least(network(8.0, [300.0]), OVER, lambda g: openings(g, LEFT[k]))
    assert found == pytest.approx(exact, rel=5e-3)


def test_blocked_inhibition_leaves_nothing_to_ease() -> None:
    reader = braked()
    state = state_at(reader, ROUTE, FACTORS)
    blocked = reader.shape("weak", ROUTE, state, inhibition=False).peak[0]
    np.testing.assert_allclose(blocked, blocked[0], rtol=1e-9)
    assert blocked[0] > reader.shape("weak", ROUTE, state).peak[0, 1]
