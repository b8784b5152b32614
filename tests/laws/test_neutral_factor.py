"""The law of the neutral factor."""

from __future__ import annotations

import pytest

from plastic import routes
from plastic.laws import Case
from tests.laws.faulty_routes import Plain, off_by_a_percent, route
from tests.laws.trying import assert_caught, assert_kept, told

OFF = route("Off", off_by_a_percent)


@pytest.mark.parametrize("part", [Plain, *map(routes.find, routes.names())])
def test_routes_keep_it(part: type) -> None:
    assert_kept(part, "neutral_factor")


def test_a_route_that_moves_at_one_is_caught_and_told() -> None:
    assert_caught(OFF, "neutral_factor")
    (row,) = told("neutral_factor", Case(OFF(), numbers={"permille": 1000})).rows
    assert (row.one, row.other) == (1.0, 1.01)
