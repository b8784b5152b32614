"""What is possible and unusual is told in one line; what is usual is not told."""

from __future__ import annotations

import warnings
from pathlib import Path

import pytest

from plastic.errors import UnusualValue
from plastic.study.file import load_study, parse_study
from plastic.study.starter import STARTER
from plastic.study.unusual import unusual
from tests.study.edits import edited

BRAKE = 'receptor = { reversal = "-75 mV"'


def lines(*changes: tuple[str, str]) -> list[str]:
    return unusual(parse_study(edited(*changes)))


def chloride(inside: float = 7, outside: float = 130, temperature: float = 32) -> tuple[str, str]:
    ions = f'chloride = {{ inside = "{inside} mM", outside = "{outside} mM" }}'
    return BRAKE, f'receptor = {{ {ions}, temperature = "{temperature} degC"'


def potassium(inside: float, outside: float) -> tuple[str, str]:
    ions = f'potassium = {{ inside = "{inside} mM", outside = "{outside} mM" }}'
    return BRAKE, f'receptor = {{ {ions}, temperature = "32 degC"'


#: edit -> key and value of the line, and the usual range (common practice)
UNUSUAL = {
    "leaky": (('"15 kohm cm^2"', '"1 kohm cm^2"'), "cell.membrane.resistance = 1000 ohm cm^2",
              "5000 to 100000 ohm cm^2"),
    "spiny": (('"1 uF/cm^2"', '"3 uF/cm^2"'), "cell.membrane.capacitance = 3 uF/cm^2",
              "0.7 to 2 uF/cm^2"),
    "poorly conducting": (('"150 ohm cm"', '"400 ohm cm"'), "cell.membrane.axial = 400 ohm cm",
                          "70 to 300 ohm cm"),
    "thick": (('"2 um"', '"12 um"'), "cell.dendrite.apical.diameter = 12 um", "0.2 to 10 um"),
    "thin": (('"2 um"', '"0.1 um"'), "cell.dendrite.apical.diameter = 0.1 um", "0.2 to 10 um"),
    "long": (('"350 um"', '"3 mm"'), "cell.dendrite.apical.length = 3000 um", "10 to 2000 um"),
    "swapped chloride": (chloride(inside=110), "input.brake.receptor.chloride.inside = 110 mM",
                         "3 to 40 mM"),
    "low chloride outside": (chloride(outside=20),
                             "input.brake.receptor.chloride.outside = 20 mM", "100 to 160 mM"),
    "little potassium": (potassium(60, 3), "input.brake.receptor.potassium.inside = 60 mM",
                         "100 to 160 mM"),
    "much potassium": (potassium(140, 20), "input.brake.receptor.potassium.outside = 20 mM",
                       "1 to 10 mM"),
    "cold": (chloride(temperature=5), "input.brake.receptor.temperature = 5 degC",
             "18 to 40 degC"),
}  # fmt: skip


@pytest.mark.parametrize(("change", "what", "usual"), UNUSUAL.values(), ids=UNUSUAL)
def test_what_is_unusual_is_told_with_key_value_and_usual_range(
    change: tuple[str, str], what: str, usual: str
) -> None:
    assert lines(change) == [f"{what}: possible but unusual; {usual} is usual (common practice)"]


@pytest.mark.parametrize(
    "changes",
    [
        (),
        (('"15 kohm cm^2"', '"100 kohm cm^2"'), ('"1 uF/cm^2"', '"0.7 uF/cm^2"')),
        (('"150 ohm cm"', '"70 ohm cm"'), ('"2 um"', '"0.2 um"')),
        (('"150 ohm cm"', '"3 ohm m"'), ('"2 um"', '"0.01 mm"')),
        (chloride(inside=40, temperature=18),),
    ],
    ids=["starter", "high", "low", "other units", "depolarising chloride"],
)
def test_what_is_usual_up_to_its_edge_is_not_told(changes: tuple[tuple[str, str], ...]) -> None:
    assert lines(*changes) == []


def test_every_unusual_value_has_a_line_of_its_own() -> None:
    found = lines(('"15 kohm cm^2"', '"1 kohm cm^2"'), ('"2 um"', '"12 um"'), chloride(inside=99))
    assert [line.split(" =")[0] for line in found] == [
        "cell.membrane.resistance",
        "cell.dendrite.apical.diameter",
        "input.brake.receptor.chloride.inside",
    ]


def test_an_excitatory_input_that_cannot_fire_the_cell_is_told_and_inhibition_is_not() -> None:
    """Rest -68 mV, threshold -55 mV: what depolarises below threshold is inhibitory by default."""
    below = 'receptor = { reversal = "-60 mV"'
    assert lines((BRAKE, below)) == []
    assert lines((BRAKE, f'kind = "excitatory"\n{below}')) == [
        "input.brake.receptor: called excitatory, reverses at -60 mV, not above the threshold "
        "(-55 mV): it cannot fire the cell by itself"
    ]


def test_loading_a_file_warns_once_for_each_with_the_name_of_the_file(tmp_path: Path) -> None:
    path = tmp_path / "odd.toml"
    path.write_text(edited(('"2 um"', '"12 um"'), ('"150 ohm cm"', '"400 ohm cm"')))
    with pytest.warns(UnusualValue) as told:
        load_study(path)
    assert [str(one.message).split(" =")[0] for one in told] == [
        f"{path}: cell.membrane.axial",
        f"{path}: cell.dendrite.apical.diameter",
    ]


def test_loading_the_starter_warns_of_nothing(tmp_path: Path) -> None:
    path = tmp_path / "plain.toml"
    path.write_text(STARTER)
    with warnings.catch_warnings(record=True) as told:
        warnings.simplefilter("always")
        load_study(path)
    assert told == []
