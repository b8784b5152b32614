"""One block of work: what it hands back."""

from __future__ import annotations

import numpy as np
import pytest
from numpy.typing import NDArray

from plastic.study.block import Arrays, Bench, Stopped, read_inputs, run_block
from plastic.study.grid import Arm, grid_of, reading_times
from plastic.study.model import Study
from plastic.study.population import populate
from plastic.study.schema import VARIABLES
from tests.study.small import CONTROLS, UNIFORM, routes, study

GO = np.zeros(1, np.int64)
DT = 0.1
#: spikes forced on the cell, 10 ms after the upper volley, and no lower one
FORCED = ('lower = ["10 ms"] }', 'injected = ["10 ms"] }')
#: the upper bundle far below threshold, so that it fires nothing by itself
QUIET = ('target = "8 mV"', 'target = "2 mV"')


def block(made: Study, control: str = "", chosen: slice = slice(None)) -> tuple[Arm, Arrays]:
    """Return the first arm that is this control, and what its block hands back."""
    population = populate(made)
    arms = grid_of(made, population).arms
    arm = next(a for a in arms if a.schedule.control == control)
    whole = slice(*chosen.indices(made.cells)[:2])
    return arm, run_block(Bench(made, population, whole), arm, GO)


@pytest.fixture(scope="module")
def small() -> tuple[Study, Arm, Arrays]:
    made = study()
    return made, *block(made)


@pytest.mark.parametrize("name", VARIABLES)
def test_a_block_hands_back_every_variable_of_the_schema_in_its_shape(
    small: tuple[Study, Arm, Arrays], name: str
) -> None:
    made, arm, found = small
    scene = populate(made).scene
    sizes = {
        "cell": made.cells,
        "input": 2,
        "contact": len(scene.contacts),
        "stretch": len(scene.tree.stretch_parent),
        "reading": len(reading_times(arm.schedule)[0]),
    }
    assert found[name].shape == tuple(sizes[d] for d in VARIABLES[name].dims[3:])


def test_a_block_hands_back_nothing_else(small: tuple[Study, Arm, Arrays]) -> None:
    assert set(small[2]) == set(VARIABLES)


def test_an_input_that_does_not_learn_keeps_its_factor(small: tuple[Study, Arm, Arrays]) -> None:
    made, _, found = small
    assert read_inputs(made) == ["upper", "lower"]
    for name in ("factor", "factor_expressed"):
        assert np.all(found[name][:, 1] == 1.0)
        assert np.all(found[name][:, 0, -1] > 1.01)  # control: the one that learns does not
    assert np.all(np.isnan(found["weight"][:, 1]))
    assert np.all(found["epsp_percent_of_baseline"][:, 1] == pytest.approx(100))


def test_driven_and_inhibitory_inputs_are_not_read() -> None:
    driven = (
        "[protocol.pairs]",
        '[input.relay]\nlocation = { on = "soma" }\n'
        'driven_by = [ { input = "lower", delay = "1 ms" } ]\n'
        'release = { sites = 1, probability = 0.5, quantum = "0.1 nS" }\n'
        'receptor = { reversal = "0 mV", rise = "0.5 ms", decay = "3 ms" }\n[protocol.pairs]',
    )  # fmt: skip
    assert read_inputs(study(driven)) == ["upper", "lower"]


@pytest.mark.parametrize(("control", "lag"), [("", 10.0), ("reversed", -10.0)])
def test_the_realised_lag_of_a_forced_spike_is_the_lag_that_was_set(
    control: str, lag: float
) -> None:
    arm, found = block(study(FORCED, CONTROLS, QUIET), control)
    assert [row["set_lag_ms"] for row in arm.schedule.set_lags] == [lag]
    np.testing.assert_allclose(found["realised_lag"], lag, atol=DT)
    assert np.all(found["partner_fired"] == 1.0)
    assert np.all(found["spikes"] == 12)


def test_a_lower_volley_fires_the_cell_after_it_and_the_lag_is_as_much_longer() -> None:
    """An EPSP of 18 mV passes 11 mV on its rise, 0.5 to 3 ms after it began."""
    _, found = block(study(*UNIFORM, QUIET))
    assert 10.5 < found["realised_lag"][0] < 13.0


def test_without_a_spike_there_is_no_lag_and_no_partner() -> None:
    """Test pulses of 2 mV alone: no pattern, no spike."""
    _, found = block(study(CONTROLS, QUIET), "test_pulses_only")
    assert np.all(np.isnan(found["realised_lag"]))
    assert np.all(found["partner_fired"] == 0.0)
    assert np.all(found["verdict"] != 5)


def test_a_partner_that_never_fires_the_cell_is_a_partner_that_failed() -> None:
    _, found = block(study(*UNIFORM, ('target = "18 mV"', 'target = "1 mV"')))
    assert np.all(found["verdict"] == 5)
    assert np.all(found["spikes"] == 0)


def test_a_slice_gives_the_rows_of_the_whole(small: tuple[Study, Arm, Arrays]) -> None:
    _, part = block(small[0], chosen=slice(1, 3))
    for name, values in small[2].items():
        np.testing.assert_array_equal(part[name], values[1:3], err_msg=name)


def test_the_induced_factor_is_ahead_of_the_expressed_one() -> None:
    """Quantal size follows with 2 min: after a minute of pairing less than half is there."""
    arm, found = block(study(QUIET))
    last = int(np.searchsorted(reading_times(arm.schedule)[0], arm.schedule.epochs[1].end))
    induced, expressed = (found[n][:, 0, last] - 1 for n in ("factor", "factor_expressed"))
    assert np.all(expressed < 0.5 * induced)
    end = [found[n][:, 0, -1] - 1 for n in ("factor", "factor_expressed")]
    np.testing.assert_allclose(end[1], end[0], rtol=0.06)  # 6 min later: 1 - exp(-3)


def test_an_immediate_expression_is_the_induced_factor() -> None:
    _, found = block(study(("[compare]", '[compare]\nexpression = "immediate"')))
    np.testing.assert_allclose(found["factor_expressed"], found["factor"], rtol=1e-12)


def test_a_count_beyond_the_dose_of_the_rule_is_extrapolated() -> None:
    """Pair rule: measured with 60 pairs; the others have other doses or none."""
    strong = ('rules = ["pair_timing"]', 'rules = [{ use = "pair_timing", a_plus = 0.02 }]')
    longer = ('times = 12, every = "5 s"', 'times = 90, every = "5 s"')
    _, found = block(study(strong, longer, ("cells = 4", "cells = 12")))
    counts = found["repeats_to_criterion_induced"]
    reached = np.isfinite(counts)
    np.testing.assert_array_equal(found["extrapolated"], reached & (counts > 60))
    assert 0 < found["extrapolated"].sum() < reached.sum()


def test_a_block_that_is_stopped_hands_back_nothing() -> None:
    made = study()
    population = populate(made)
    bench = Bench(made, population, slice(0, 4))
    with pytest.raises(Stopped):
        run_block(bench, grid_of(made, population).arms[0], np.ones(1, np.int64))


def test_diameters_are_in_micrometres_and_only_widening_moves_them() -> None:
    _, found = block(study(routes('"dendrite_width"')))
    widths: NDArray[np.float64] = np.asarray(found["diameter"], dtype=float)
    np.testing.assert_allclose(widths[:, :, 0], 2.0)
    assert np.all(widths[:, :, -1].max(axis=1) > 2.0001)
    _, still = block(study())
    np.testing.assert_allclose(np.asarray(still["diameter"], dtype=float), 2.0)
