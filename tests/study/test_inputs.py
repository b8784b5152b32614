"""The tables of an input."""

from __future__ import annotations

import math
from typing import Any

import pytest

from plastic.study.file import parse_study
from plastic.study.inputs import Input, Receptor
from plastic.study.model import Study
from plastic.study.population import scene_of
from tests.study.edits import edited

TABLE = {
    "release": {"sites": 60, "probability": 0.6, "quantum": "0.275 nS"},
    "receptor": {"reversal": "0 mV", "rise": "0.5 ms", "decay": "3 ms"},
}


def test_the_defaults_are_the_stated_ones() -> None:
    it = Input.model_validate({**TABLE, "baseline_epsp": "8 mV"})
    assert (it.release.probability.mean, it.release.probability.cv) == (0.6, 0.1)
    assert (it.release.highest, it.release.quantum_cv) == (1.0, 0.3)
    assert (it.release.depletion, it.release.facilitation) == (0.0, 0.0)
    assert (it.delay, it.neck, it.driven_by, it.added_contact) == (0.0, 0.0, (), None)
    assert it.baseline_epsp is not None
    assert (it.baseline_epsp.target, it.baseline_epsp.cv) == (8.0, 0.3)


def test_a_location_is_one_place_with_all_sites() -> None:
    it = Input.model_validate({**TABLE, "location": {"on": "apical", "at": "320 um"}})
    assert it.places == (("apical", 320.0, 1.0),)


def test_contacts_share_the_sites_evenly_unless_said() -> None:
    contacts = [{"on": "apical", "at": "300 um"}, {"on": "soma"}]
    even = Input.model_validate({**TABLE, "contacts": contacts})
    assert even.places == (("apical", 300.0, 0.5), ("soma", 0.0, 0.5))
    said = [{**contacts[0], "share": 0.75}, {**contacts[1], "share": 0.25}]
    uneven = Input.model_validate({**TABLE, "contacts": said})
    assert [share for _, _, share in uneven.places] == pytest.approx([0.75, 0.25])


#: mV per e-fold at 32 C: k T/e with k/e = 0.0861733 mV/K (CODATA)
SLOPE = 0.08617333 * (273.15 + 32)
CHLORIDE = {"inside": "7 mM", "outside": "130 mM"}
BICARBONATE = {
    "bicarbonate_inside": "16 mM",
    "bicarbonate_outside": "26 mM",
    "permeability_ratio": 0.25,
}


def receptor(**reversal: Any) -> Receptor:
    return Receptor.model_validate({"rise": "0.5 ms", "decay": "7 ms", **reversal})


def braked(reversal: str) -> Study:
    """Return the starter with another reversal of its inhibition; it rests at -68 mV."""
    return parse_study(edited(('reversal = "-75 mV"', reversal)))


@pytest.mark.parametrize(
    ("given", "expected"),
    [
        ({"reversal": "-75 mV"}, -75.0),
        ({"chloride": CHLORIDE, "temperature": "32 degC"}, SLOPE * math.log(7 / 130)),
        (
            {"chloride": {**CHLORIDE, **BICARBONATE}, "temperature": "32 degC"},
            SLOPE * math.log((7 + 0.25 * 16) / (130 + 0.25 * 26)),
        ),
        (
            {"potassium": {"inside": "140 mM", "outside": "3 mM"}, "temperature": "305.15 K"},
            SLOPE * math.log(3 / 140),
        ),
        ({"shunt": True}, -68.0),
        ({"reversal": "-75 mV", "shunt": False}, -75.0),
    ],
    ids=["voltage", "chloride", "bicarbonate", "potassium", "shunt", "no shunt"],
)
def test_a_reversal_is_a_voltage_or_follows_from_concentrations_or_rest(
    given: dict[str, Any], expected: float
) -> None:
    """The formulas by hand: Nernst, and chloride with bicarbonate by its permeability."""
    assert receptor(**given).reversal_at(-68.0) == pytest.approx(expected, abs=1e-4)


def test_only_a_shunt_moves_with_rest() -> None:
    ions = receptor(chloride=CHLORIDE, temperature="32 degC")
    assert receptor(shunt=True).reversal_at(-80.0) == -80.0
    assert receptor(reversal="-75 mV").reversal_at(-80.0) == -75.0
    assert ions.reversal_at(-80.0) == ions.reversal_at(-60.0)


def test_the_temperature_moves_a_reversal_in_proportion_to_kelvin() -> None:
    warm, cold = (
        receptor(chloride=CHLORIDE, temperature=t).reversal_at(0) for t in ("37 degC", "0 degC")
    )
    assert warm / cold == pytest.approx(310.15 / 273.15, rel=1e-12)


@pytest.mark.parametrize(
    ("reversal", "expected"),
    [
        ("shunt = true", 0.0),
        (
            'chloride = { inside = "7 mM", outside = "130 mM" }, temperature = "32 degC"',
            SLOPE * math.log(7 / 130) + 68,
        ),
    ],
    ids=["shunt", "chloride"],
)
def test_the_cell_is_built_with_the_reversal_that_was_meant(reversal: str, expected: float) -> None:
    """The kernel counts from rest, and so does this."""
    scene = scene_of(braked(reversal))
    (brake,) = [contact for contact in scene.contacts if contact.input == "brake"]
    assert brake.receptor.reversal - scene.rest == pytest.approx(expected, abs=1e-4)


@pytest.mark.parametrize(
    ("reversal", "kind"),
    [
        ("shunt = true", "inhibitory"),
        (
            'chloride = { inside = "10 mM", outside = "130 mM" }, temperature = "32 degC"',
            "inhibitory",
        ),
        (
            'chloride = { inside = "40 mM", outside = "130 mM" }, temperature = "32 degC"',
            "excitatory",
        ),
    ],
    ids=["shunt", "-67 mV", "-31 mV"],
)
def test_depolarising_gaba_is_used_and_excites_above_threshold_only(
    reversal: str, kind: str
) -> None:
    """The threshold is at -55 mV."""
    assert braked(reversal).inputs["brake"].kind == kind


def test_an_input_may_be_called_inhibitory_wherever_it_reverses() -> None:
    chloride = 'chloride = { inside = "40 mM", outside = "130 mM" }, temperature = "32 degC"'
    text = edited(
        ("[input.brake]", '[input.brake]\nkind = "inhibitory"'), ('reversal = "-75 mV"', chloride)
    )
    assert parse_study(text).inhibitory == ["brake"]
