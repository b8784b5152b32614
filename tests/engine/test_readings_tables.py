"""Tables of EPSP shapes and thresholds, read between their nodes, against scipy."""

from __future__ import annotations

import math

import numpy as np
import pytest

from plastic import routes
from plastic.engine.readings import OWN_NODES, Reader, Shape, axis
from plastic.routes import Mixture
from tests.engine.readers import (
    BRAKE,
    FAST,
    SLOW,
    Opening,
    integrated,
    lands,
    least,
    network,
    reader_of,
    scene_of,
    shape_of,
    state_at,
)

PLACES = [100.0, 300.0]
WIDE = Mixture.pure("dendrite_width", routes.find("dendrite_width")())
ADDED = Mixture.pure("added_contact", routes.find("added_contact")())
QUANTUM = Mixture.pure("quantal_size", routes.find("quantal_size")(highest=40.0))
BOTH = Mixture(
    "both", {"dendrite_width": 0.5, "added_contact": 0.5}, {**WIDE.channels, **ADDED.channels}
)


def far(load: float = 8.0, threshold: float = 12.0) -> Reader:
    """Return a cell whose weak input lands at 300 um, with another contact at 100 um."""
    scene = scene_of(lands("weak", 300.0), lands("other", 100.0))
    return reader_of(scene, load=[load], threshold=threshold)


def twofold() -> Reader:
    """Return a cell whose weak input at 320 um may get a contact at 80 um, 1 ms later."""
    scene = scene_of(lands("weak", 320.0), lands("weak", 80.0, added=True, delay=1.0))
    return reader_of(scene, sites=40.0, probability=0.6, quantum=0.275)


def at_reading(shape: Shape, reading: int) -> tuple[float, float, float]:
    return tuple(float(values[0, reading]) for values in (shape.peak, shape.rise, shape.half_width))  # type: ignore[return-value]


# ---- own conductance


def test_shapes_between_nodes_are_those_of_the_equation() -> None:
    """Against scipy, half-way between nodes from 0.09 to 40 nS.

    The largest errors were 0.12 % of the peak, 0.04 % of the rise and of the half-width.
    """
    reader = far()
    nodes = axis(reader.top, OWN_NODES)
    between = ((nodes[1:] + nodes[:-1]) / 2)[[0, 3, 7, 11, 15, 19, 22]]
    shape = reader.shape("weak", None, state_at(reader, QUANTUM, list(between / 4.0)))
    for k, g in enumerate(between):
        exact = shape_of(*integrated(network(8.0, PLACES), [Opening(g, 2)]))
        assert at_reading(shape, k) == pytest.approx(exact, rel=2e-3)


def test_a_table_costs_less_accuracy_than_the_step_of_time() -> None:
    """Against probes of the same conductances: within 0.003 % of the peak, 0.03 % of the times."""
    reader = far()
    gs = np.geomspace(0.1, reader.top * 0.99, 40)
    state = state_at(reader, QUANTUM, list(gs / 4.0))
    shape = reader.shape("weak", None, state)
    direct = reader._direct_shape("weak", state, True)
    assert shape.peak == pytest.approx(direct.peak, rel=1e-4)
    assert shape.rise == pytest.approx(direct.rise, rel=1e-3)
    assert shape.half_width == pytest.approx(direct.half_width, rel=1e-3)


def test_the_peaks_of_a_table_rise_with_conductance_towards_the_reversal() -> None:
    reader = far()
    peaks = reader.peaks("weak")[0]
    assert len(peaks) == OWN_NODES
    assert peaks[0] == 0.0
    assert (np.diff(peaks) > 0).all()
    assert peaks[-1] < 70.0


def test_an_epsp_longer_than_the_table_has_no_half_width() -> None:
    scene = scene_of(lands("weak", 0.0, type(SLOW)(0.0, 3.0, 400.0)))
    reader = reader_of(scene)
    shape = reader.shape("weak", None, state_at(reader, QUANTUM, [1.0]))
    assert shape.peak[0, 0] > 1.0
    assert math.isnan(shape.half_width[0, 0])
    assert math.isfinite(shape.rise[0, 0])


# ---- a widened dendrite


@pytest.mark.parametrize("factor", [0.2, 0.83, 1.0, 1.13, 1.27, 1.45, 4.0])
def test_a_widened_dendrite_is_read_between_widths(factor: float) -> None:
    """Against scipy; the other contact halves the change of the nearer stretch.

    The largest errors were 0.07 % of the peak and 2 % of a threshold of 242 nS, where the cell is
    next to saturated; 0.5 % below 60 nS.
    """
    reader = far()
    state = state_at(reader, WIDE, [factor])
    clipped = np.clip([(factor + 1) / 2, factor], 0.7, 1.3)
    cell = network(8.0, PLACES, [*clipped, 1.0])
    exact = shape_of(*integrated(cell, [Opening(4.0, 2)]))
    assert at_reading(reader.shape("weak", WIDE, state), 0) == pytest.approx(exact, rel=1.5e-3)
    wanted = least(cell, 12.0, lambda g: [Opening(g, 2)])
    slack = 6e-3 if wanted < 60 else 2.5e-2
    assert reader.threshold("weak", WIDE, state)[0, 0] == pytest.approx(wanted, rel=slack)


def test_widening_is_seen_by_an_input_that_did_not_learn() -> None:
    """A contact at 100 um on a dendrite that is widened from 0 to 300 um; against scipy."""
    reader = far()
    state = state_at(reader, WIDE, [1.0, 1.45])
    shape = reader.shape("other", WIDE, state)
    cell = network(8.0, PLACES, [1.225, 1.3, 1.0])
    exact = shape_of(*integrated(cell, [Opening(4.0, 1)]))
    assert at_reading(shape, 1) == pytest.approx(exact, rel=1.5e-3)
    assert shape.peak[0, 1] > 1.005 * shape.peak[0, 0]


def test_a_threshold_between_widths_keeps_to_its_ends() -> None:
    """Out of reach when thin, in reach when wide: finite from some width on, and falling."""
    reader = far(load=20.0)
    factors = list(np.linspace(0.7, 1.6, 91))
    goals = reader.threshold("weak", WIDE, state_at(reader, WIDE, factors))[0]
    assert math.isinf(goals[0])
    assert math.isfinite(goals[-1])
    reached = np.isfinite(goals)
    assert (np.diff(reached.astype(int)) >= 0).all()
    assert (np.diff(goals[reached]) <= 1e-9).all()


# ---- an added contact


@pytest.mark.parametrize("factor", [1.0, 1.17, 1.6, 2.3])
def test_an_added_contact_is_read_between_nodes(factor: float) -> None:
    """Against scipy; the largest errors: 0.1 % of the peak, 0.3 % of the sum at threshold."""
    reader = twofold()
    state, cell = state_at(reader, ADDED, [factor]), network(8.0, [80.0, 320.0])
    extra = 6.6 * (factor - 1)
    exact = shape_of(*integrated(cell, [Opening(6.6, 2), Opening(extra, 1, FAST, 1.0)]))
    found = at_reading(reader.shape("weak", ADDED, state), 0)
    assert found == pytest.approx(exact, rel=3e-3)
    wanted = least(cell, 12.0, lambda g: [Opening(g, 2), Opening(extra, 1, FAST, 1.0)])
    goal = reader.threshold("weak", ADDED, state)[0, 0]
    assert goal + extra == pytest.approx(wanted + extra, rel=5e-3)


def test_where_the_added_contact_is_enough_the_other_is_not_needed() -> None:
    reader = twofold()
    factors = np.linspace(1.0, 5.0, 81)
    goals = reader.threshold("weak", ADDED, state_at(reader, ADDED, list(factors)))[0]
    assert (np.diff(goals) <= 0).all()
    alone = least(network(8.0, [80.0, 320.0]), 12.0, lambda g: [Opening(g, 1, FAST)])
    first = factors[np.argmax(goals == 0)]
    assert 6.6 * (first - 1) == pytest.approx(alone, rel=0.04)  # a step of the factors is 0.33 nS


def test_width_and_contact_together_are_probed_one_by_one() -> None:
    """Half of the change each: 1.69^0.5 is a width and 30 % of the sites; against scipy."""
    reader = twofold()
    state = state_at(reader, BOTH, [1.69])
    cell = network(8.0, [80.0, 320.0], [1.3, 1.3, 1.0])
    exact = shape_of(*integrated(cell, [Opening(6.6, 2), Opening(6.6 * 0.3, 1, FAST, 1.0)]))
    assert at_reading(reader.shape("weak", BOTH, state), 0) == pytest.approx(exact, rel=1.5e-3)


# ---- recruited inhibition


def braked(brake: float = 4.0) -> Reader:
    """Return a cell whose weak input at 300 um recruits a brake at the soma, nS, 2 ms later."""
    scene = scene_of(
        lands("weak", 300.0), lands("brake", 0.0, BRAKE), drives=[("weak", "brake", 2.0)]
    )
    return reader_of(scene, sites=[20.0, 1.0], probability=[0.5, 1.0], quantum=[0.4, brake])


def test_recruited_inhibition_lowers_the_epsp_and_raises_the_threshold() -> None:
    """Against scipy with 4 nS of the brake 2 ms later; lifted, it is the cell without a brake."""
    reader, cell = braked(), network(8.0, [300.0])
    state = state_at(reader, QUANTUM, [1.0])
    peaks, goals = [], []
    for inhibition, brake in ((True, 4.0), (False, 0.0)):
        peaks.append(reader.shape("weak", None, state, inhibition=inhibition).peak[0, 0])
        goals.append(reader.threshold("weak", None, state, inhibition=inhibition)[0, 0])

        def both(g: float, brake: float = brake) -> list[Opening]:
            return [Opening(g, 1), Opening(brake, 0, BRAKE, 2.0)]

        assert peaks[-1] == pytest.approx(integrated(cell, both(4.0))[1].max(), rel=2e-3)
        assert goals[-1] == pytest.approx(least(cell, 12.0, both), rel=6e-3)
    assert peaks[0] < 0.9 * peaks[1]
    assert goals[0] > 1.3 * goals[1]


def test_inhibition_can_put_a_threshold_out_of_reach() -> None:
    strongest = [Opening(2000.0, 1), Opening(60.0, 0, BRAKE, 2.0)]
    assert integrated(network(8.0, [300.0]), strongest)[1].max() < 12.0
    reader = braked(brake=60.0)
    state = state_at(reader, QUANTUM, [1.0])
    assert math.isinf(reader.threshold("weak", None, state)[0, 0])
    assert math.isfinite(reader.threshold("weak", None, state, inhibition=False)[0, 0])
    assert reader.fires_alone("weak", None, state_at(reader, QUANTUM, [40.0]))[0, 0] == 0.0
