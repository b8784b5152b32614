"""How rules, routes and protocols are chosen."""

from __future__ import annotations

import pytest
from pydantic_core import PydanticCustomError

from plastic import routes, rules
from plastic.rules.triplet_timing import TripletTiming
from plastic.study.choices import read_route, read_rule


@pytest.mark.parametrize("name", rules.names())
def test_every_rule_is_chosen_by_its_name(name: str) -> None:
    choice = read_rule(name)
    assert (choice.label, choice.name, choice.rule) == (name, name, rules.find(name)())


@pytest.mark.parametrize("name", routes.names())
def test_every_route_is_chosen_by_its_name(name: str) -> None:
    mixture = read_route(name)
    assert (mixture.name, mixture.shares) == (name, {name: 1.0})
    assert mixture.channels[name] == routes.find(name)()


def test_a_set_may_be_changed_and_labelled() -> None:
    choice = read_rule(
        {
            "use": "triplet_timing", "set": "hippocampal_minimal", "label": "slow",
            "tau_y": "0.1 s", "a3_plus": 0.01,
        }
    )  # fmt: skip
    assert choice.label == "slow"
    assert choice.rule == TripletTiming.from_set("hippocampal_minimal", tau_y=100, a3_plus=0.01)


def test_parameters_of_a_route_may_have_units() -> None:
    mixture = read_route({"use": "dendrite_width", "tau": "5 min", "highest": 3, "label": "wide"})
    channel = mixture.channels["dendrite_width"]
    assert (mixture.name, channel.tau, channel.highest) == ("wide", 300_000.0, 3.0)


def test_a_mixture_is_named_by_its_parts_and_each_part_may_have_parameters() -> None:
    mixture = read_route(
        {"dendrite_width": {"share": 0.25, "highest": 2}, "release_probability": 0.75}
    )
    assert mixture.name == "dendrite_width+release_probability"
    assert mixture.shares == {"dendrite_width": 0.25, "release_probability": 0.75}
    assert mixture.channels["dendrite_width"].highest == 2.0


@pytest.mark.parametrize(
    ("value", "said"),
    [
        (3, "must be a rule such as"),
        ({}, "must be a rule such as"),
        ({"a_plus": 0.01}, "missing; the name of what is used"),
        ({"use": 3}, "must be a name in quotes"),
        ({"use": "pair_timing", "label": ""}, "must be text in quotes"),
        ({"use": "pair_timing", "a_plus": True}, "must be a number"),
        ({"use": "pair_timing", "a_plus": float("nan")}, r"must be in \[0, 1\]"),
    ],
)
def test_what_chooses_no_rule_is_refused(value: object, said: str) -> None:
    with pytest.raises(PydanticCustomError, match=said):
        read_rule(value)


@pytest.mark.parametrize(
    ("value", "said"),
    [
        (["quantal_size"], "must be a route such as"),
        ({"label": "nothing"}, "shares"),
        ({"quantal_size": "half"}, "must be a share from 0 to 1"),
        ({"quantal_size": {"highest": 3}}, "must be a share from 0 to 1"),
        ({"use": "quantal_size", "highest": 0.5}, "must be at least 1"),
    ],
)
def test_what_chooses_no_route_is_refused(value: object, said: str) -> None:
    with pytest.raises(PydanticCustomError, match=said):
        read_route(value)
