"""The law of monotone routes."""

from __future__ import annotations

from typing import Any

import pytest

from plastic import routes
from plastic.laws import Case
from tests.laws.faulty_routes import Plain, constant, route, turning
from tests.laws.trying import assert_caught, assert_kept, told


@pytest.mark.parametrize("part", [Plain, *map(routes.find, routes.names())])
def test_routes_keep_it(part: type) -> None:
    assert_kept(part, "monotone_route")


@pytest.mark.parametrize("multiple", [turning, constant])
def test_a_route_that_turns_or_stays_is_caught(multiple: Any) -> None:
    assert_caught(route("Wrong", multiple), "monotone_route")


def test_the_way_back_is_told() -> None:
    """By hand: x (2 - x) is 1 at 1 and 3/4 at 3/2."""
    numbers = {"thousandths": 1000, "more": 500, "permille": 1000}
    (row,) = told("monotone_route", Case(route("Turning", turning)(), numbers=numbers)).rows
    assert (row.one, row.other) == (1.0, 0.75)
