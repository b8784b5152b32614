"""The cell that a sheet is about: closed forms of the cable."""

from __future__ import annotations

import math

import numpy as np
import pytest

from plastic.analysis.subject import Subject
from plastic.engine.traces import Opening
from tests.analysis.cells import RI, RM, bundle, subject

LENGTH, DIAMETER, LOAD, AT = 500.0, 2.0, 10.0, 320.0


@pytest.fixture(scope="module")
def one() -> Subject:
    return subject(bundle("a", AT, 1.0), bundle("b", 0.0, 1.0))


def cable_numbers(length: float, diameter: float) -> tuple[float, float]:
    """L and G_inf (nS) in SI units."""
    d, rm, ri = diameter * 1e-6, RM * 1e-4, RI * 1e-2
    lam = math.sqrt(d / 4 * rm / ri)
    return length * 1e-6 / lam, 1e9 * math.pi * d**1.5 / (2 * math.sqrt(rm * ri))


def test_steady_voltages_are_those_of_the_continuous_cable(one: Subject) -> None:
    """R_xy of a lumped soma and a sealed cylinder (Rall), to 1e-9."""
    L, G = cable_numbers(LENGTH, DIAMETER)
    X, B = AT / LENGTH * L, LOAD / G
    R, node = one.resistances(), one.scene.contacts[0].node
    whole = LOAD * math.cosh(L) + G * math.sinh(L)
    transfer = 1000 * math.cosh(L - X) / whole
    assert R[0, 0] == pytest.approx(1000 / (LOAD + G * math.tanh(L)), rel=1e-9)
    assert R[node, 0] == pytest.approx(transfer, rel=1e-9)
    assert R[node, node] == pytest.approx(transfer * (math.cosh(X) + B * math.sinh(X)), rel=1e-9)


def test_a_dendrite_is_described_by_its_closed_forms() -> None:
    """Two dendrites: the conductance of each is load for the other."""
    both = subject(bundle("a", AT, 1.0), shafts={"shaft": (LENGTH, DIAMETER), "thin": (160.0, 0.4)})
    shaft, thin = both.cables()
    (L, G), (M, g) = cable_numbers(LENGTH, DIAMETER), cable_numbers(160.0, 0.4)
    own, other = G * math.tanh(L), g * math.tanh(M)
    assert shaft.length / shaft.lambda_um == pytest.approx(L)
    assert shaft.share == pytest.approx(own / (LOAD + own + other))
    axial = 1e-9 * 4 * RI * 1e-2 * LENGTH * 1e-6 / (math.pi * (DIAMETER * 1e-6) ** 2)  # per nS
    assert shaft.criterion == pytest.approx((LOAD + other) * axial + L / math.tanh(L))
    assert thin.share == pytest.approx(other / (LOAD + own + other))


@pytest.mark.parametrize(
    ("shaft", "load", "printed"),
    [
        ((500.0, 2.0), 0.63, 1.27),
        ((500.0, 2.0), 10.0, 3.51),
        ((500.0, 4.0), 10.0, 1.66),
        ((200.0, 0.5), 10.0, 16.4),
        ((600.0, 1.0), 10.0, 12.8),
    ],
)
def test_the_criterion_has_its_printed_values(
    shaft: tuple[float, float], load: float, printed: float
) -> None:
    """Own table of G_soma R_axial + L coth L, made before the package."""
    one = subject(bundle("a", shaft[0], 0.1), load=load, shafts={"shaft": shaft})
    assert one.cables()[0].criterion == pytest.approx(printed, rel=4e-3)


def test_contacts_know_their_places(one: Subject) -> None:
    assert [one.place(k) for k in one.contacts] == [("shaft", AT), ("soma", 0.0)]
    cable = one.cable(0)
    assert cable is not None
    assert cable.name == "shaft"
    assert one.cable(1) is None
    assert (one.load, one.threshold) == (10.0, 15.0)
    np.testing.assert_allclose(one.conductance, [1.0, 1.0])


def test_what_a_route_would_add_is_no_contact_yet() -> None:
    more = 'added_contact = { on = "shaft", at = "40 um" }'
    added = subject(bundle("a", AT, 1.0, more=more))
    assert len(added.scene.contacts) == 2
    assert added.contacts == [0]


def test_everything_is_over_after_a_while() -> None:
    """A slow receptor, and what is left of its EPSP as a share of the peak."""
    slow = subject(
        bundle("a", AT, 2.0, receptor='reversal = "0 mV", rise = "2 ms", decay = "50 ms"')
    )
    seen = slow.run([[Opening(0, 0.0, 2.0)]], [0], length=slow.whole).voltage[0, 0]
    assert slow.whole > 150
    assert seen[-1] < 1e-4 * seen.max()
    assert seen[round(150 / slow.scene.dt)] > 1e-2 * seen.max()  # control: not earlier
