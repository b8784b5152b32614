"""Contact by contact: closed forms of the cable, an independent fine cable, and plain integrals."""

from __future__ import annotations

import math

import numpy as np
import pytest

from plastic.analysis.contacts import CHARGES, LOCAL_LIMIT, ContactSheet, contact_sheets
from plastic.analysis.subject import Subject
from plastic.engine.layout import Floats
from plastic.engine.traces import Opening, shape
from plastic.membrane.receptors import conductance
from tests.analysis.cells import BELOW, SHUNT, bundle, full_sheet, subject
from tests.analysis.test_subject import cable_numbers
from tests.membrane.fine_cable import FineCable

LENGTH, DIAMETER, LOAD, E = 500.0, 2.0, 10.0, 65.0
#: name, place and conductance
INPUTS = {"tip": (500.0, 0.5), "half": (250.0, 3.0), "near": (40.0, 12.0), "soma": (0.0, 2.0)}


@pytest.fixture(scope="module")
def sheets() -> dict[str, ContactSheet]:
    made = [bundle(name, at, g) for name, (at, g) in INPUTS.items()]
    return {c.input: c for c in contact_sheets(subject(*made, learns="tip"))}


@pytest.mark.parametrize("name", INPUTS)
def test_steady_attenuation_is_that_of_the_continuous_cable(
    sheets: dict[str, ContactSheet], name: str
) -> None:
    """R_xx / R_x0 = cosh X + (G_soma/G_inf) sinh X."""
    L, G = cable_numbers(LENGTH, DIAMETER)
    X = INPUTS[name][0] / LENGTH * L
    expected = math.cosh(X) + LOAD / G * math.sinh(X)
    assert sheets[name].attenuation_dc == pytest.approx(expected, rel=1e-9)
    assert sheets[name].distance_lambda == pytest.approx(X, rel=1e-9)


@pytest.mark.parametrize("name", INPUTS)
def test_the_ceiling_is_the_driving_force_through_the_attenuation(
    sheets: dict[str, ContactSheet], name: str
) -> None:
    L, G = cable_numbers(LENGTH, DIAMETER)
    X = INPUTS[name][0] / LENGTH * L
    expected = E / (math.cosh(X) + LOAD / G * math.sinh(X))
    assert sheets[name].ceiling == pytest.approx(expected, rel=1e-9)


@pytest.mark.parametrize("name", INPUTS)
def test_the_charge_at_the_hillock_is_the_charge_transfer_of_the_cable(
    sheets: dict[str, ContactSheet], name: str
) -> None:
    """Into a soma held at rest: cosh(L - X)/cosh L of what enters."""
    L, _ = cable_numbers(LENGTH, DIAMETER)
    X = INPUTS[name][0] / LENGTH * L
    one = sheets[name]
    assert one.arriving / one.charge == pytest.approx(math.cosh(L - X) / math.cosh(L), rel=1e-6)


def test_the_charge_at_the_hillock_is_what_the_voltage_there_says() -> None:
    """Its integral over the input resistance: Mohm pC = mV ms; and e^-t/tau is left at the end."""
    one = subject(bundle("a", 500.0, 3.0))
    (found,) = contact_sheets(one)
    L, G = cable_numbers(LENGTH, DIAMETER)
    from_rest = LOAD + G * math.tanh(L)  # nS
    v = whole_trace(one)
    area = one.scene.dt * (v.sum() - v[-1] / 2) + 20.0 * v[-1]
    assert found.arriving == pytest.approx(area * from_rest / 1000, rel=1e-4)


def whole_trace(one: Subject) -> Floats:
    seen = one.run([[Opening(0, 0.0, 3.0)]], [0], length=one.whole)
    return seen.voltage[0, 0]


def test_epsps_are_those_of_an_independent_fine_cable(sheets: dict[str, ContactSheet]) -> None:
    for name, (at, g) in INPUTS.items():
        _, v = FineCable(LENGTH, DIAMETER, LOAD, pieces=250).run(
            round(at / 2), lambda t, g=g: g * conductance(t, 0.2, 2.0), E, dt=0.01, duration=60.0
        )  # type: ignore[misc]
        soma, there, one = shape(v[0], 0.01), shape(v[1], 0.01), sheets[name]
        assert one.soma.peak == pytest.approx(soma.peak, rel=2e-3)
        assert one.local.peak == pytest.approx(there.peak, rel=3e-3)
        assert one.attenuation == pytest.approx(there.peak / soma.peak, rel=3e-3)
        assert one.delay == pytest.approx(soma.time - there.time, abs=0.03)
        assert one.soma.rise == pytest.approx(soma.rise, rel=5e-3)
        assert one.soma.half_width == pytest.approx(soma.half_width, rel=5e-3)


def test_the_printed_cell_has_its_printed_epsp() -> None:
    """Own fine-cable table, 2 um x 500, 10 nS, 1 nS of 0.2/2 ms at the tip: 0.4063 mV, 9.55 ms."""
    (found,) = contact_sheets(subject(bundle("a", 500.0, 1.0)))
    assert found.soma.peak == pytest.approx(0.4063, rel=2e-3)
    assert found.soma.time == pytest.approx(9.55, abs=0.05)
    assert found.attenuation_dc == pytest.approx(1 / 0.2679, rel=1e-3)


def test_a_charge_is_so_many_elementary_charges(sheets: dict[str, ContactSheet]) -> None:
    """e = 1.602176634e-19 C (2019 SI)."""
    assert pytest.approx(6.241509074e6, rel=1e-9) == CHARGES
    one = sheets["tip"]
    assert one.charges == pytest.approx(one.charge * 6.241509074e6)
    assert one.arriving_charges == pytest.approx(one.arriving * 6.241509074e6)
    assert one.arriving_charges < one.charges


def test_the_charge_of_a_weak_input_is_its_conductance_times_the_driving_force() -> None:
    """g E times the area of the time course; 1 nS mV ms = 1 fC."""
    g = 1e-5
    (found,) = contact_sheets(subject(bundle("a", 500.0, g)))
    t = np.linspace(0, 60, 600_001)
    area = float(np.trapezoid(conductance(t, 0.2, 2.0), t))
    assert found.charge == pytest.approx(g * E * area / 1000, rel=2e-5)


# ---- what to be wary of


def flags(*inputs: str, **cell: object) -> list[tuple[str, ...]]:
    return [c.flags for c in contact_sheets(subject(*inputs, **cell))]


def test_a_large_local_epsp_is_flagged_and_one_on_the_soma_is_not() -> None:
    strong, weak, soma = flags(
        bundle("a", 500.0, 5.0), bundle("b", 500.0, 0.5), bundle("c", 0.0, 60.0)
    )
    assert len(strong) == 1
    assert "a real dendrite would recruit NMDA or dendritic spikes" in strong[0]
    assert weak == soma == ()


def test_the_local_epsp_that_counts_is_that_of_all_contacts_of_an_input() -> None:
    """Each of four contacts stays below the limit alone; together they do not."""
    four = ", ".join(f'{{ on = "shaft", at = "{494 + 2 * k} um" }}' for k in range(4))
    spread = (
        f"[input.a]\ncontacts = [ {four} ]\n"
        "release = { sites = 4, probability = { mean = 1, cv = 0 }, "
        'quantum = "1.5 nS", quantum_cv = 0 }\n'
        'receptor = { reversal = "0 mV", rise = "0.2 ms", decay = "2 ms" }\n'
    )
    found = contact_sheets(subject(spread))
    assert len(found) == 4
    assert all(c.conductance == pytest.approx(1.5) for c in found)
    assert all(c.local.peak < LOCAL_LIMIT < c.together for c in found)
    assert all(c.flags for c in found)


def test_a_place_from_which_no_conductance_fires_the_cell_is_flagged() -> None:
    """At the tip of a thin dendrite the ceiling is 65 mV times 0.059 (own table)."""
    thin = {"shaft": (200.0, 0.5)}
    (hopeless,) = flags(bundle("a", 200.0, 0.1), shafts=thin)
    assert [f for f in hopeless if f.startswith("no conductance fires the cell from here")]
    assert "at most 3.8" in hopeless[-1]
    (fine,) = flags(bundle("a", 10.0, 0.1), shafts=thin)
    assert fine == ()


# ---- inhibition


@pytest.fixture(scope="module")
def brakes() -> dict[str, ContactSheet]:
    made = subject(
        bundle("a", 500.0, 1.0),
        bundle("below", 250.0, 4.0, receptor=BELOW),
        bundle("shunt", 250.0, 4.0, receptor=SHUNT),
    )
    return {c.input: c for c in contact_sheets(made)}


def test_inhibition_has_its_sign(brakes: dict[str, ContactSheet]) -> None:
    below = brakes["below"]
    assert below.kind == "inhibitory"
    assert -10 < below.ceiling < below.soma.peak < 0
    assert below.local.peak < below.soma.peak
    assert below.attenuation > 1
    assert below.charge < below.arriving < 0
    assert below.flags == ()


def test_a_shunt_moves_nothing(brakes: dict[str, ContactSheet]) -> None:
    shunt = brakes["shunt"]
    assert (shunt.soma.peak, shunt.local.peak, shunt.charge, shunt.ceiling) == (0, 0, 0, 0)
    assert np.isnan([shunt.attenuation, shunt.delay, shunt.soma.rise]).all()
    assert shunt.attenuation_dc > 1


def test_labels_are_of_their_own_for_every_contact() -> None:
    found = [c.label for c in full_sheet().contacts]
    assert len(set(found)) == len(found)
    assert "a, shaft 500 µm" in found
    assert "brake, soma" in found


def test_time_courses_are_those_of_the_shapes(sheets: dict[str, ContactSheet]) -> None:
    one = sheets["tip"]
    assert one.at_soma.max() == pytest.approx(one.soma.peak, rel=1e-3)
    assert one.there.max() == pytest.approx(one.local.peak, rel=5e-3)
    assert one.time[np.argmax(one.at_soma)] == pytest.approx(one.soma.time, abs=0.1)
    assert one.time[-1] == pytest.approx(60.0, abs=0.2)
