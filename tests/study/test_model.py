"""What a study holds after reading: defaults, kinds, schedules with their controls."""

from __future__ import annotations

import pickle
from pathlib import Path

import pytest
from pydantic import ValidationError

from plastic.study.file import load_study, parse_study
from plastic.study.starter import STARTER

EXPERIMENT = Path(__file__).parents[2] / "experiments" / "two_roads"


def test_everything_is_in_internal_units() -> None:
    study = parse_study(STARTER)
    assert (study.dt, study.cell.rest, study.cell.threshold.mean) == (0.1, -68.0, -55.0)
    assert study.cell.dendrite["apical"].length == 350.0
    assert study.cell.membrane.tau == pytest.approx(15.0)
    assert study.inputs["weak"].places == (("apical", 250.0, 1.0),)
    assert study.protocols["bursts"].baseline == 600_000.0


def test_an_input_inhibits_when_its_reversal_is_at_or_below_threshold_unless_said() -> None:
    assert parse_study(STARTER).inhibitory == ["brake"]
    at = STARTER.replace('reversal = "-75 mV"', 'reversal = "-55 mV"')
    assert parse_study(at).inhibitory == ["brake"]
    above = STARTER.replace('reversal = "-75 mV"', 'reversal = "-54 mV"')
    assert parse_study(above).inhibitory == []
    named = above.replace("driven_by = [", 'kind = "inhibitory"\ndriven_by = [')
    assert parse_study(named).inhibitory == ["brake"]


def test_with_one_learner_the_criterion_is_about_it() -> None:
    text = STARTER.replace("criterion =", "# criterion =")
    criterion = parse_study(text).compare.criterion
    assert (criterion.input, criterion.alone_fires) == ("weak", 0.5)
    two = text.replace('learns = ["weak"]', 'learns = ["weak", "strong"]')
    with pytest.raises(Exception, match=r"compare\.criterion: missing; a table such as"):
        parse_study(two)


def test_controls_run_on_the_first_route_unless_said() -> None:
    assert parse_study(STARTER).compare.control_route.name == "release_probability"
    said = STARTER.replace("[compare]", '[compare]\ncontrols_on = "quantal_size"')
    assert parse_study(said).compare.control_route.name == "quantal_size"


def test_a_control_that_one_protocol_has_no_room_for_is_said_and_left_out() -> None:
    alone = (
        '[protocol.alone]\npattern = { weak = ["0 ms"] }\nrepeat = { times = 9, every = "9 s" }\n'
    )
    study = parse_study(STARTER.replace("[compare]", alone + "\n[compare]"))
    assert list(study.schedules()) == [
        "bursts", "bursts, unpaired", "bursts, test pulses only",
        "alone", "alone, test pulses only",
    ]  # fmt: skip
    left_out = study.controls_left_out()
    assert list(left_out) == ["alone, unpaired"]
    assert "a learning input and a partner" in left_out["alone, unpaired"]


def test_a_study_is_frozen_and_survives_pickling() -> None:
    study = parse_study(STARTER)
    with pytest.raises(ValidationError, match="frozen"):
        study.cells = 3  # type: ignore[misc]
    again = pickle.loads(pickle.dumps(study))
    assert again == study
    assert again.text == STARTER


@pytest.mark.parametrize("name", ["study", "low_release"])
def test_the_experiment_is_a_good_study_and_says_that_it_is_invented(name: str) -> None:
    study = load_study(EXPERIMENT / f"{name}.toml")
    assert "invented" in study.text
    assert (len(study.compare.rules), len(study.compare.routes)) == (3, 7)
    assert len(study.schedules()) == 2 * (1 + 4)
    assert study.controls_left_out() == {}
    assert study.compare.routes[-1].shares == {"dendrite_width": 0.5, "release_probability": 0.5}


def test_the_two_experiments_differ_in_the_far_release_only() -> None:
    plain, low = (load_study(EXPERIMENT / f"{n}.toml") for n in ("study", "low_release"))
    assert (plain.cell, plain.compare) == (low.cell, low.compare)
    far, other = plain.inputs["far"], low.inputs["far"]
    assert far != other
    assert far == other.model_copy(update={"release": far.release})
    means = [r.sites * r.probability.mean * r.quantum for r in (far.release, other.release)]
    assert means[0] == pytest.approx(means[1], rel=0.01)
