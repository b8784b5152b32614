from plastic.cli import main
from plastic.report.parts import ROOMS


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
