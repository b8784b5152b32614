"""The sheet as a whole, its door, and inhibition in words."""

from __future__ import annotations

from pathlib import Path

import pytest

import plastic
from plastic.analysis.cell_sheet import DOES, Inhibition, cell_sheet, inhibition_of
from plastic.errors import StudyError
from tests.analysis.cells import BELOW, SHUNT, bundle, full_sheet, lone_sheet, study
from tests.study.small import SMALL


def test_the_door_takes_a_study_or_its_file(tmp_path: Path) -> None:
    made = study(bundle("a", 320.0, 2.0))
    (tmp_path / "mine.toml").write_text(made.text)
    by_study, by_path, by_name = (
        plastic.cell_sheet(it) for it in (made, tmp_path / "mine.toml", str(tmp_path / "mine.toml"))
    )
    assert by_study.title == by_path.title == by_name.title == "An invented cell"
    peaks = [one.contacts[0].soma.peak for one in (by_study, by_path, by_name)]
    assert peaks[0] == peaks[1] == peaks[2] > 0


def test_a_study_that_is_wrong_is_refused(tmp_path: Path) -> None:
    with pytest.raises(StudyError, match="there is no such file"):
        plastic.cell_sheet(tmp_path / "none.toml")


def test_the_cell_is_described_by_its_numbers() -> None:
    """Input resistance of a soma with a sealed dendrite, by hand: 10 nS and G_inf tanh L."""
    one = cell_sheet(study(bundle("a", 320.0, 2.0)))
    assert (one.rest, one.threshold, one.tau, one.load) == (-65.0, -50.0, 20.0, 10.0)
    assert one.input_resistance == pytest.approx(87.72, abs=0.01)  # own table, to its digits
    assert (one.dt, one.refine) == (0.04, 1)
    assert [c.name for c in one.cables] == ["shaft"]


def test_everything_of_a_study_is_on_its_sheet() -> None:
    full = full_sheet()
    assert [c.input for c in full.contacts] == ["a", "b_near", "c", "c", "brake", "shunt"]
    assert [c.inputs for c in full.combinations][-1] == ("a", "b_near", "c")
    assert [one.input for one in full.inhibition] == ["brake", "shunt"]
    assert full.accuracy.inputs == ("a", "b_near", "c", "brake", "shunt")
    assert full.accuracy.converged
    assert full.notes == ()


def test_a_point_neuron_has_a_sheet() -> None:
    point = cell_sheet(study(bundle("a", 0.0, 2.0), shafts={}))
    assert point.cables == []
    assert point.contacts[0].attenuation == pytest.approx(1.0, abs=1e-12)
    assert point.contacts[0].ceiling == pytest.approx(65.0)
    assert point.combinations[0].excited == pytest.approx(point.contacts[0].soma.peak)


def test_a_baseline_epsp_out_of_reach_is_said(tmp_path: Path) -> None:
    (tmp_path / "far.toml").write_text(SMALL.replace('target = "8 mV"', 'target = "60 mV"'))
    assert plastic.cell_sheet(tmp_path / "far.toml").notes == (
        "upper: its baseline EPSP could not be recruited in the nominal cell",
    )


def test_the_sheet_of_a_lone_small_soma_says_that_widening_weakens_and_why() -> None:
    tip = lone_sheet().contacts[0].widening
    assert tip.whole < -5
    assert tip.reason.startswith("weakens")
    assert "1.27 < 3" in tip.reason


# ---- inhibition in words


def words(receptor: str, more: str = "") -> Inhibition:
    made = study(bundle("a", 320.0, 2.0), bundle("b", 0.0, 5.0, receptor=receptor, more=more))
    (found,) = inhibition_of(made)
    return found


KINETICS = 'rise = "0.2 ms", decay = "5 ms"'


@pytest.mark.parametrize(
    ("reversal", "called"),
    [
        (-80.0, "hyperpolarising"),
        (-66.5, "hyperpolarising"),
        (-65.4, "shunting"),
        (-63.0, "depolarising below threshold"),
        (-51.0, "depolarising below threshold"),
    ],
)
def test_a_reversal_has_its_name(reversal: float, called: str) -> None:
    """Rest -65 mV, threshold -50 mV."""
    found = words(f'reversal = "{reversal} mV", {KINETICS}')
    assert found.effect == called
    assert found.does == DOES[called]
    assert found.reversal == reversal


def test_what_is_called_inhibitory_may_excite() -> None:
    found = words(f'reversal = "-40 mV", {KINETICS}', more='kind = "inhibitory"')
    assert found.effect == "depolarising above threshold"
    assert "it excites" in found.does


def test_a_shunt_is_one_and_has_its_chloride() -> None:
    found = words(SHUNT)
    assert (found.reversal, found.effect) == (-65.0, "shunting")
    assert found.assumed
    assert "mM internal chloride" in found.chloride


def test_the_chloride_that_is_given_comes_back() -> None:
    """Nernst and back: 9 mM inside, 120 mM outside at 30 C."""
    ions = 'chloride = { inside = "9 mM", outside = "120 mM" }, temperature = "30 degC"'
    found = words(f"{ions}, {KINETICS}")
    assert "implies 9 mM internal chloride (120 mM outside, 30 C)" in found.chloride
    assert not found.assumed
    assert found.reversal == pytest.approx(-26.1235 * 2.590267, abs=2e-3)  # RT/F ln(120/9)


def test_the_chloride_of_a_bare_reversal_is_by_assumption() -> None:
    """130 mM e^(-75/26.2959) at 32 C = 7.50 mM."""
    found = words(BELOW)
    assert found.assumed
    assert "7.5 mM internal chloride (130 mM outside, 32 C)" in found.chloride


def test_potassium_implies_no_chloride() -> None:
    ions = 'potassium = { inside = "140 mM", outside = "3 mM" }, temperature = "30 degC"'
    found = words(f"{ions}, {KINETICS}")
    assert found.effect == "hyperpolarising"
    assert (found.chloride, found.assumed) == ("", False)


def test_who_drives_it_is_told() -> None:
    driven = words(BELOW, more='driven_by = [ { input = "a", delay = "1 ms" } ]')
    assert driven.driven_by == ("a",)
    assert words(BELOW).driven_by == ()
