"""The law of definition."""

from __future__ import annotations

from typing import Any

import pytest

from plastic import routes
from plastic.laws import Case
from tests.laws.faulty_routes import Plain, dividing, route, unlimited
from tests.laws.trying import assert_caught, assert_kept, told


@pytest.mark.parametrize("part", [Plain, *map(routes.find, routes.names())])
def test_routes_keep_it(part: type) -> None:
    assert_kept(part, "route_defined")


@pytest.mark.parametrize("multiple", [unlimited, dividing])
def test_a_route_without_a_limit_or_without_a_value_is_caught(multiple: Any) -> None:
    assert_caught(route("Wrong", multiple), "route_defined")


def test_the_limit_is_told() -> None:
    numbers = {"thousandths": 5000, "permille": 1000}
    (row,) = told("route_defined", Case(route("Unlimited", unlimited)(), numbers=numbers)).rows
    assert (row.one, row.other) == (4.0, 5.0)
