import pytest

from plastic.cli import main
from plastic.report.parts import ROOMS


def test_list_shows_every_member_of_every_catalogue(capsys):
    assert main(["list"]) == 0
    first = [line.split(" ")[0] for line in capsys.readouterr().out.splitlines()]
    for room, catalogue in ROOMS.items():
        assert room in first
        assert set(catalogue.names()) <= set(first)


@pytest.mark.parametrize("room", ROOMS)
def test_list_of_one_room_shows_no_other(room, capsys):
    assert main(["list", room]) == 0
    first = {line.split(" ")[0] for line in capsys.readouterr().out.splitlines()}
    assert set(ROOMS[room].names()) <= first
    others = {name for other in ROOMS if other != room for name in ROOMS[other].names()}
    assert not first & (others - set(ROOMS[room].names()))


def test_show_finds_a_name_in_any_catalogue(capsys):
    for catalogue in ROOMS.values():
        name = catalogue.names()[0]
        assert main(["show", name]) == 0
        assert capsys.readouterr().out.startswith(f"{name}\n")


def test_show_of_an_unknown_name_offers_the_nearest(capsys):
    assert main(["show", "quantal_sise"]) == 2
    said = capsys.readouterr()
    assert "did you mean 'quantal_size'?" in said.err
    assert said.out == ""
