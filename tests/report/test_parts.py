import pytest

from plastic.errors import UnknownName
from plastic.parameters import Parametrised
from plastic.protocols import Protocol
from plastic.report.parts import ROOMS, catalogue_grid, show_grids, summary

MEMBERS = [(room, name) for room, catalogue in ROOMS.items() for name in catalogue.names()]


def text_of(name):
    return "\n\n".join(grid.plain() for grid in show_grids(name))


@pytest.mark.parametrize("room", ROOMS)
def test_a_list_has_every_member_with_what_it_is(room):
    grid = catalogue_grid(room)
    assert [row[0] for row in grid.rows] == ROOMS[room].names()
    assert all(row[-1].strip() for row in grid.rows)


@pytest.mark.parametrize(("room", "name"), MEMBERS)
def test_every_member_shows_what_it_is_and_what_to_cite(room, name):
    part, text = ROOMS[room].find(name), text_of(name)
    assert summary(part).replace("``", "") in text
    for reference in getattr(part, "references", ()):
        assert reference in text
    assert getattr(part, "equation", "") in text


PARAMETRISED = [
    (room, name) for room, name in MEMBERS if issubclass(ROOMS[room].find(name), Parametrised)
]


@pytest.mark.parametrize(("room", "name"), PARAMETRISED)
def test_every_parameter_is_shown_with_unit_bounds_and_source(room, name):
    part, lines = ROOMS[room].find(name), text_of(name).splitlines()
    for key, declared in part.parameters.items():
        line = next(li for li in lines if li.startswith(f"{key} ") and declared.allowed in li)
        assert f"{declared.default:g}" in line
        assert declared.source in line
        assert declared.unit == "1" or f" {declared.unit} " in line
    for chosen in part.sets:
        assert any(li.startswith(chosen) for li in lines)


PROTOCOLS = [name for room, name in MEMBERS if issubclass(ROOMS[room].find(name), Protocol)]


@pytest.mark.parametrize("name", PROTOCOLS)
def test_every_key_of_a_protocol_is_shown(name):
    lines = text_of(name).splitlines()
    for key, field in ROOMS["protocols"].find(name).model_fields.items():
        below = lines[next(k for k, li in enumerate(lines) if li.startswith("key  ")) :]
        line = next(li for li in below if li.startswith(f"{key} "))
        assert field.is_required() == ("required" in line)


def test_a_hypothesis_is_called_one():
    assert "hypothesis" in text_of("dendrite_width")


def test_an_illustrative_rule_says_why():
    assert "illustrative" in text_of("sliding_threshold")
    assert "no published spiking constants" in text_of("sliding_threshold")
    assert "illustrative" not in text_of("pair_timing")


def test_a_rule_that_moves_in_silence_says_why():
    assert "activity block" in text_of("synaptic_scaling")
    assert "in silence" not in text_of("pair_timing")


def test_an_unknown_name_is_answered_with_the_nearest():
    with pytest.raises(UnknownName, match="did you mean 'pair_timing'"):
        show_grids("pair_timings")
