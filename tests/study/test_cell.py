"""The tables of the cell."""

from __future__ import annotations

import pytest
from pydantic import ValidationError

from plastic.membrane import spikes, tree
from plastic.study.cell import BackPropagation, Cell

TABLE = {
    "rest": "-68 mV",
    "threshold": "-55 mV",
    "reset": "-65 mV",
    "rest_of_cell": "5 nS",
    "membrane": {
        "resistance": "15 kohm cm^2", "capacitance": "1 uF/cm^2", "axial": "150 ohm cm",
    },
}  # fmt: skip


def test_the_spreads_have_their_stated_defaults() -> None:
    cell = Cell.model_validate(TABLE)
    assert cell.threshold.sd == 3.0
    assert cell.input_resistance_cv == 0.3
    assert (cell.refine, cell.refractory, cell.dendrite) == (1, 2.0, {})


def test_a_spread_may_be_set_to_nothing() -> None:
    still = {**TABLE, "threshold": {"mean": "-55 mV", "sd": "0 mV"}, "input_resistance_cv": 0}
    cell = Cell.model_validate(still)
    assert (cell.threshold.sd, cell.input_resistance_cv) == (0.0, 0.0)


def test_dendrites_and_back_propagation_are_those_of_the_membrane() -> None:
    long = {**TABLE, "dendrite": {"a": {"length": "0.3 mm", "diameter": "2 um"}}}
    cell = Cell.model_validate(long)
    assert isinstance(cell.dendrite["a"], tree.Dendrite)
    assert cell.dendrite["a"].length == pytest.approx(300)
    assert isinstance(cell.back_propagation, spikes.BackPropagation)


def test_back_propagation_has_the_defaults_of_the_membrane() -> None:
    ours, theirs = BackPropagation(), spikes.BackPropagation()
    for name in ("velocity", "length_constant", "train_loss", "recovery", "floor"):
        assert getattr(ours, name) == getattr(theirs, name)


@pytest.mark.parametrize(
    ("table", "said"),
    [
        ({"velocity": "500 ms"}, "not a velocity"),
        ({"train_loss": 1}, "below 1"),
        ({"floor": 2}, "at most 1"),
        ({"length": "3 um"}, "no key is called length"),
    ],
)
def test_back_propagation_is_checked(table: dict[str, object], said: str) -> None:
    with pytest.raises(ValidationError, match=said):
        Cell.model_validate({**TABLE, "back_propagation": table})
