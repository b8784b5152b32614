"""The compiled readings: shapes, thresholds and chances against scipy's integrator and its laws."""

from __future__ import annotations

import math
from collections.abc import Sequence

import numpy as np
import pytest

from plastic.engine.assembly import Receptor
from plastic.engine.kernel import probes
from plastic.engine.readings import Reader
from tests.engine.readers import (
    BRAKE,
    FAST,
    SLOW,
    Floats,
    Opening,
    integrated,
    lands,
    least,
    network,
    reader_of,
    scene_of,
    shape_of,
)

JUMPY = Receptor(0.0, 0.0, 4.0)  # a single exponential
LARGEST = 2000.0


def shapes(reader: Reader, step: Sequence[int], amounts: Floats, length: float = 150.0) -> Floats:
    """Return (cell, probe, 4) of contacts 0, 1, ... that open at these steps; amounts in nS."""
    w, each = reader.wiring, np.atleast_2d(amounts)
    out = np.zeros((len(reader.loads), 1, len(each), 4))
    cells = np.repeat(each[None], len(reader.loads), axis=0)
    at = np.array(step, dtype=np.int64)
    group, widths = w.contacts["group"][: len(at)].copy(), np.ones((1, len(w.stretches)))
    probes().run_shapes(
        w.plan, w.stretches, w.groups, w.slots, reader.loads, widths, at, group, cells,
        round(length / reader.scene.dt), out,
    )  # fmt: skip
    return out[:, 0]


def thresholds(
    reader: Reader, step: Sequence[int], fixed: Sequence[float], added: Sequence[float] = (0.0,)
) -> Floats:
    """Return (cell, added) of the conductance of contact 0 that just fires, beside the others.

    `fixed` (nS) opens at every contact; the last contact opens `added` nS in turn.
    """
    w, n = reader.wiring, len(step)
    own = np.eye(n)[0]
    last = np.tile(np.eye(n)[-1] * (len(added) > 1), (len(reader.loads), 1))
    amounts = np.repeat(np.array([fixed], dtype=float), len(reader.loads), axis=0)
    out = np.zeros((len(reader.loads), 1, len(added)))
    probes().run_thresholds(
        w.plan, w.stretches, w.groups, w.slots, reader.loads, reader.thresholds,
        np.ones((1, len(w.stretches))), np.array(step, dtype=np.int64),
        w.contacts["group"][:n].copy(), amounts, own, last, np.array(added, dtype=float),
        LARGEST, round(80.0 / reader.scene.dt), out,
    )  # fmt: skip
    return out[:, 0]


# ---- the shape of an EPSP

CELLS = {
    "a point": ((), 0),
    "two compartments": ((300.0,), 1),
    "a far contact": ((100.0, 300.0), 2),
}


@pytest.mark.parametrize("receptor", [FAST, JUMPY, SLOW], ids=["fast", "jumpy", "slow"])
@pytest.mark.parametrize("cell", CELLS)
def test_peak_rise_and_half_width_are_those_of_the_equation(cell: str, receptor: Receptor) -> None:
    """Against scipy. At 0.1 ms the peak was within 0.08 %, the times within 0.03 ms."""
    places, node = CELLS[cell]
    landing = [lands("weak", ([0.0, *places])[node], receptor)]
    landing += [lands("other", x) for x in places[: node - 1]]
    reader = reader_of(scene_of(*landing))
    found = shapes(reader, [0], np.array([[0.3], [4.0]]), 400.0)[0]
    for k, g in enumerate((0.3, 4.0)):
        exact = shape_of(*integrated(network(8.0, places), [Opening(g, node, receptor)], 400.0))
        assert found[k, 0] == pytest.approx(exact[0], rel=1e-3)
        assert found[k, 2:] == pytest.approx(exact[1:], abs=0.03, rel=2e-4)


def test_half_the_step_has_less_than_a_third_of_the_error() -> None:
    """Second order gives a quarter; the peak is seen on the grid only, which blurs it.

    At fixed times the order is 2 (`test_plain`).
    """
    exact = shape_of(*integrated(network(8.0, [300.0]), [Opening(30.0, 1)]))[0]
    errors = []
    for dt in (0.2, 0.1, 0.05):
        reader = reader_of(scene_of(lands("weak", 300.0), dt=dt))
        errors.append(abs(shapes(reader, [0], np.array([[30.0]]))[0, 0, 0] - exact))
    assert errors[1] < errors[0] / 3
    assert errors[2] < errors[1] / 3
    assert 1e-4 * exact < errors[0] < 1e-3 * exact  # there is an error to shrink


def test_two_contacts_and_an_inhibition_open_when_they_are_due() -> None:
    scene = scene_of(lands("weak", 300.0), lands("strong", 100.0), lands("brake", 0.0, BRAKE))
    found = shapes(reader_of(scene), [0, 20, 35], np.array([[3.0, 2.0, 6.0]]))[0, 0]
    exact = shape_of(
        *integrated(
            network(8.0, [100.0, 300.0]),
            [Opening(3.0, 2), Opening(2.0, 1, time=2.0), Opening(6.0, 0, BRAKE, 3.5)],
        )
    )
    assert found[[0, 2, 3]] == pytest.approx(exact, rel=5e-3)
    late = shapes(reader_of(scene), [0, 20, 70], np.array([[3.0, 2.0, 6.0]]))[0, 0]
    assert late[0] > 1.1 * found[0]  # control: the brake's moment matters


def test_nothing_has_no_rise_and_no_half_width() -> None:
    found = shapes(reader_of(scene_of(lands("weak"))), [0], np.array([[0.0]]))[0, 0]
    assert (found[0], found[1]) == (0.0, 0.0)
    assert np.isnan(found[2:]).all()


def test_an_epsp_that_outlasts_the_probe_has_no_half_width() -> None:
    reader = reader_of(scene_of(lands("weak", 0.0, SLOW)))
    whole, cut = (shapes(reader, [0], np.array([[2.0]]), ms)[0, 0] for ms in (200.0, 60.0))
    assert whole[3] > 60.0
    assert cut[:3].tolist() == whole[:3].tolist()
    assert math.isnan(cut[3])


def test_a_crossing_is_interpolated_from_either_side() -> None:
    trace, crossing = np.array([0.0, 2.0, 4.0, 1.0]), probes().crossing
    assert crossing(trace, 3.0, 2, 0) == 1.5
    assert crossing(trace, 3.0, 2, 3) == pytest.approx(2 + 1 / 3)
    assert math.isnan(crossing(trace, 9.0, 0, 3))


def test_an_epsp_may_come_back_after_an_inhibition() -> None:
    """A slow receptor outlasts the brake: its second hump is the higher one, and the one to read.

    Against scipy; the first hump is 8.8 mV, the second 15.8 mV.
    """
    scene = scene_of(lands("weak", 0.0, SLOW), lands("brake", 0.0, BRAKE))
    reader = reader_of(scene, threshold=[12.0])

    def both(g: float) -> list[Opening]:
        return [Opening(g, 0, SLOW), Opening(20.0, 0, BRAKE, 8.0)]

    exact = integrated(network(8.0), both(4.0))
    first_hump = exact[1][exact[0] < 20.0].max()
    assert first_hump < 12.0 < exact[1].max()
    found = shapes(reader, [0, 80], np.array([[4.0, 20.0]]))[0, 0, 0]
    assert found == pytest.approx(exact[1].max(), rel=1e-3)
    wanted = least(network(8.0), 12.0, both)
    assert thresholds(reader, [0, 80], [0.0, 20.0])[0, 0] == pytest.approx(wanted, rel=1e-3)
    assert wanted < 4.0


# ---- the conductance that fires the cell


@pytest.mark.parametrize("cell", CELLS)
def test_the_threshold_is_where_the_peak_meets_it(cell: str) -> None:
    """Root finding on scipy's integrator, two cells each; the errors were 0.05 to 0.3 %."""
    places, node = CELLS[cell]
    landing = [lands("weak", ([0.0, *places])[node])] + [lands("o", x) for x in places[: node - 1]]
    reader = reader_of(scene_of(*landing), load=[8.0, 3.0], threshold=[12.0, 9.0])
    found = thresholds(reader, [0], [0.0])[:, 0]
    wanted = [
        least(network(load, places), over, lambda g: [Opening(g, node)])
        for load, over in ((8.0, 12.0), (3.0, 9.0))
    ]
    assert found == pytest.approx(wanted, rel=4e-3)


def test_the_peak_at_the_threshold_is_the_threshold() -> None:
    reader = reader_of(scene_of(lands("weak", 300.0)), threshold=[12.0])
    g = thresholds(reader, [0], [0.0])[0, 0]
    peaks = shapes(reader, [0], np.array([[g * (1 - 2e-5)], [g * (1 + 2e-5)]]))[0, :, 0]
    assert peaks[0] < 12.0 < peaks[1]


def test_out_of_reach_is_infinite_and_already_there_is_nothing() -> None:
    scene = scene_of(lands("weak", 400.0), lands("strong"))
    reader = reader_of(scene, load=[60.0, 8.0], threshold=[14.0, 14.0])
    top = integrated(network(60.0, [400.0]), [Opening(LARGEST, 1)])[1].max()
    assert top < 14.0  # scipy: no conductance up to the largest does it
    alone = thresholds(reader, [0, 0], [0.0, 0.0])[:, 0]
    assert math.isinf(alone[0])
    assert math.isfinite(alone[1])
    assert thresholds(reader, [0, 0], [0.0, 200.0])[:, 0].tolist() == [0.0, 0.0]


def test_recruited_inhibition_raises_the_threshold_by_what_the_equation_says() -> None:
    scene = scene_of(lands("weak", 300.0), lands("brake", 0.0, BRAKE))
    reader = reader_of(scene)

    def braked(g: float) -> list[Opening]:
        return [Opening(g, 1), Opening(4.0, 0, BRAKE, 2.0)]

    found = [thresholds(reader, [0, 20], [0.0, brake])[0, 0] for brake in (0.0, 4.0)]
    wanted = least(network(8.0, [300.0]), 12.0, braked)
    assert found[1] == pytest.approx(wanted, rel=6e-3)
    assert found[1] > 1.3 * found[0]


def test_the_boundary_over_two_contacts_is_that_of_the_equation() -> None:
    """Beside 0 to 15 nS nearer to the soma, 1 ms later; 0.3 % of the sum was the largest error."""
    scene = scene_of(lands("weak", 320.0), lands("weak", 80.0, added=True))
    reader, beside = reader_of(scene), (0.0, 2.0, 6.0, 11.0, 15.0)
    found = thresholds(reader, [0, 10], [0.0, 0.0], beside)[0]

    def both(added: float, g: float) -> list[Opening]:
        return [Opening(g, 2), Opening(added, 1, time=1.0)]

    cell = network(8.0, [80.0, 320.0])
    wanted = [least(cell, 12.0, lambda g, a=a: both(a, g)) for a in beside[:-1]]  # type: ignore[misc]
    sums = np.array(beside[:-1])
    assert found[:-1] + sums == pytest.approx(wanted + sums, rel=4e-3)
    assert integrated(cell, both(15.0, 0.0))[1].max() > 12.0
    assert found[-1] == 0.0
