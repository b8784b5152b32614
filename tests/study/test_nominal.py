"""The nominal cell: what the study states, without any spread."""

from __future__ import annotations

import numpy as np
import pytest

from plastic.engine.readings import State
from plastic.study.nominal import mean_conductance, nominal
from plastic.study.population import bare_reader, populate
from tests.study.small import UNIFORM, study


def test_nothing_is_spread_and_the_means_are_those_of_the_study() -> None:
    one = nominal(study())
    assert len(one.load) == 1
    assert one.load[0] == pytest.approx(5.0)
    assert one.threshold[0] == pytest.approx(68.0 - 57.0)
    upper, lower, damper, _added = one.probability[0]
    assert (upper, lower, damper) == pytest.approx((0.5, 0.4, 1.0))
    assert one.amplitude[0] == 1.0
    assert np.ptp(populate(study(cells=20)).load) > 0.5  # control: the study's own cells differ


def test_it_is_the_cell_of_a_study_that_spreads_nothing() -> None:
    """By the words of a study instead."""
    plain = populate(study(*UNIFORM))
    one = nominal(study())
    for name in ("load", "threshold", "sites", "probability", "quantum"):
        np.testing.assert_allclose(getattr(one, name), getattr(plain, name), rtol=1e-12)


@pytest.mark.parametrize(("seed", "cells"), [(1, 4), (3, 1), (77, 50)])
def test_it_knows_nothing_of_seed_and_number_of_cells(seed: int, cells: int) -> None:
    one, other = nominal(study()), nominal(study(seed=seed, cells=cells))
    np.testing.assert_array_equal(one.sites, other.sites)
    np.testing.assert_array_equal(one.load, other.load)


def test_a_study_is_not_changed_by_asking() -> None:
    asked = study()
    nominal(asked)
    assert (asked.cells, asked.cell.threshold.sd, asked.cell.input_resistance_cv) == (4, 1.5, 0.3)
    assert asked.inputs["upper"].release.probability.cv == 0.1


@pytest.mark.parametrize(("name", "target"), [("upper", 8.0), ("lower", 18.0)])
def test_its_sites_meet_the_baseline_epsp_as_nearly_as_whole_sites_can(
    name: str, target: float
) -> None:
    one = nominal(study())
    reader = bare_reader(one)
    parts = (one.sites[:, :, None], one.probability[:, :, None], reader.quantum[:, :, None])
    state = State(*parts, np.ones((1, 1, len(reader.wiring.stretches))))
    peak = reader.shape(name, None, state).peak[0, 0]
    assert peak == pytest.approx(target, abs=target / one.sites[0, one.scene.primary(name)])


def test_the_mean_conductance_is_n_p_q_behind_the_neck() -> None:
    """By hand: 0.3 nS behind 100 Mohm is 0.3/1.03 nS; the added contact has the same neck."""
    one = nominal(study())
    upper, lower, damper, added = one.sites[0]
    expected = [
        upper * 0.5 * 0.3 / 1.03,
        lower * 0.4 * 0.8,
        damper * 10.0,
        added * 0.5 * 0.3 / 1.03,
    ]
    np.testing.assert_allclose(mean_conductance(one), expected, rtol=1e-12)
