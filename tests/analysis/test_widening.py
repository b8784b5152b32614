"""What a wider dendrite does: the signs and sizes of our own table, made before the package.

Steady values for a weak synapse were computed on a fine cable of 100 compartments; the slopes of
the peak on one of 60 with Crank-Nicolson. None of them is a published measurement.
"""

from __future__ import annotations

import math

import numpy as np
import pytest

from plastic.analysis.subject import Cable
from plastic.analysis.widening import WIDER, Widening, multiples, reason_for, widenings
from tests.analysis.cells import LONE, SHUNT, bundle, subject

#: (length, diameter), load, steady change of a weak tip input with +20 % diameter, percent
STEADY = [
    ((500.0, 2.0), 0.63, -10.79),
    ((500.0, 2.0), 10.0, 0.12),
    ((500.0, 4.0), 10.0, -3.19),
    ((200.0, 0.5), 10.0, 1.57),
]
#: (length, diameter), load, conductance of a 0.2/2 ms synapse at the tip, d log peak / d log d
PEAKS = [
    ((500.0, 2.0), 0.63, 0.3, -0.489),
    ((500.0, 2.0), 0.63, 5.0, -0.116),
    ((500.0, 2.0), 10.0, 1.0, 0.270),
    ((500.0, 2.0), 10.0, 5.0, 0.577),
    ((500.0, 4.0), 10.0, 1.0, -0.058),
    ((500.0, 4.0), 10.0, 5.0, 0.076),
    ((150.0, 0.8), 10.0, 1.0, 0.359),
    ((200.0, 0.5), 10.0, 1.0, 0.756),
    ((600.0, 1.0), 10.0, 0.3, 0.627),
]


def tip(shaft: tuple[float, float], load: float, g: float) -> Widening:
    return widenings(subject(bundle("a", shaft[0], g), load=load, shafts={"shaft": shaft}))[0]


@pytest.mark.parametrize(("shaft", "load", "percent"), STEADY)
def test_a_weak_steady_tip_input_changes_as_the_table_says(
    shaft: tuple[float, float], load: float, percent: float
) -> None:
    found = tip(shaft, load, 1e-3)
    assert found.steady == pytest.approx(percent, abs=0.02)
    assert (found.criterion > 3) == (percent > 0)


@pytest.mark.parametrize(("shaft", "load", "g", "slope"), PEAKS)
def test_the_peak_changes_with_the_sign_and_size_of_the_table(
    shaft: tuple[float, float], load: float, g: float, slope: float
) -> None:
    """The slope is that of 5 %, this of 20 %: the effect is concave, so a little less."""
    found = math.log1p(tip(shaft, load, g).whole / 100) / math.log(WIDER)
    assert math.copysign(1, found) == math.copysign(1, slope)
    assert slope - 0.09 < found < slope + 0.02


def test_saturation_favours_widening() -> None:
    changes = [tip((500.0, 2.0), 10.0, g).whole for g in (0.01, 1.0, 5.0, 20.0)]
    assert changes == sorted(changes)
    assert changes[-1] > changes[0] + 5
    assert tip((500.0, 2.0), 10.0, 20.0).weak == pytest.approx(changes[0], abs=0.1)


@pytest.mark.parametrize("g", [0.01, 1.0, 10.0])
def test_widening_beyond_the_contact_only_weakens(g: float) -> None:
    """On a loaded 2 um dendrite the path gains and the rest loses (own table: +1.63, -2.64)."""
    found = widenings(subject(bundle("a", 250.0, g)))[0]
    assert found.beyond < 0 < found.on_path
    assert found.beyond < found.whole < found.on_path
    at_the_tip = widenings(subject(bundle("a", 500.0, g)))[0]
    assert at_the_tip.beyond == 0.0
    assert at_the_tip.on_path == pytest.approx(at_the_tip.whole, rel=1e-9)


def test_path_and_rest_are_the_whole_dendrite_and_nothing_of_another() -> None:
    one = subject(
        bundle("a", 200.0, 1.0),
        bundle("b", 400.0, 1.0),
        shafts={"shaft": (500.0, 2.0), "other": (100.0, 1.0)},
    )
    tree = one.scene.tree
    whole, path, beyond = multiples(one, 0)
    np.testing.assert_allclose(path * beyond, whole)
    on = np.array(tree.stretch_dendrite)
    assert np.all(whole[on == "other"] == 1.0)
    assert np.all(whole[on == "shaft"] == WIDER)
    assert tree.stretch_length[path > 1].sum() == pytest.approx(200.0)
    assert tree.stretch_length[beyond > 1].sum() == pytest.approx(300.0)


# ---- in words


def test_a_lone_small_soma_loses_and_is_told_why() -> None:
    far, near = widenings(subject(*LONE, load=0.63)).values()
    assert far.whole < -5
    assert far.reason.startswith("weakens: shaft itself is 69 % of the cell's conductance")
    assert "(G_soma R_axial + L coth L = 1.27 < 3)" in far.reason
    assert near.reason.startswith("weakens: the membrane added beyond the contact only draws")


def test_a_far_thin_dendrite_gains_and_is_told_why() -> None:
    found = tip((200.0, 0.5), 10.0, 0.3)
    assert found.whole > 0
    assert found.reason.startswith("strengthens: shaft is thin or long against what it must charge")
    assert "= 16.4 > 3" in found.reason


@pytest.mark.parametrize(("g", "said"), [(0.01, False), (10.0, True)])
def test_a_gain_that_is_mostly_saturation_is_told_as_one(g: float, said: bool) -> None:
    found = tip((200.0, 0.5), 10.0, g)
    assert found.reason.startswith("strengthens: shaft is thin or long")
    assert (found.whole > 2 * found.weak) == said
    assert ("most of it because the synapse saturates its place" in found.reason) == said


def test_a_gain_by_saturation_alone_is_told_as_one() -> None:
    found = tip((500.0, 4.0), 10.0, 20.0)
    assert found.weak < 0 < found.whole
    assert found.reason.startswith("strengthens only because the synapse saturates its place")


CABLE = Cable("shaft", 500.0, 2.0, 800.0, 0.4, 2.5)


@pytest.mark.parametrize(
    ("numbers", "start"),
    [
        ((0.01, 0.02, -0.01, 0.0, 0.0), "changes nothing"),
        ((2.0, 2.0, 0.0, 1.0, -0.5), "strengthens because the EPSP is brief: a steady weak input"),
        ((2.0, 3.0, -1.0, -1.0, -0.5), "strengthens only because the synapse saturates"),
        ((-1.0, 2.0, -3.0, -1.0, -1.0), "weakens: the membrane added beyond the contact"),
        ((-1.0, -1.0, 0.0, -1.0, -1.0), "weakens: shaft itself is 40 %"),
    ],
)
def test_every_sign_has_its_reason(numbers: tuple[float, ...], start: str) -> None:
    told = reason_for(*numbers, CABLE)  # type: ignore[arg-type, misc]
    assert told.startswith(start)
    assert "2.5" in told


def test_on_the_soma_and_at_rest_there_is_nothing_to_widen() -> None:
    found = widenings(
        subject(
            bundle("a", 500.0, 1.0),
            bundle("soma", 0.0, 1.0),
            bundle("shunt", 250.0, 5.0, receptor=SHUNT),
        )
    )
    assert [math.isnan(w.whole) for w in found.values()] == [False, True, True]
    assert found[1].reason == "does not apply: it lands on the soma"
    assert found[2].reason == "moves nothing: it reverses at rest"
