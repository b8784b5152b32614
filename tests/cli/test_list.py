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
