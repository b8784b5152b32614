"""The law of shares."""

from __future__ import annotations

import pytest

from plastic import routes
from plastic.laws import Case
from tests.laws.faulty_routes import Plain, linear, route
from tests.laws.trying import assert_caught, assert_kept, holds, told

LINEAR = route("Linear", linear)


@pytest.mark.parametrize("part", [Plain, *map(routes.find, routes.names())])
def test_routes_keep_it(part: type) -> None:
    assert_kept(part, "shares_make_a_whole")


def test_a_share_that_is_no_exponent_is_caught_and_told() -> None:
    """By hand: half of the way to 2, twice, is 1.5 squared."""
    assert_caught(LINEAR, "shares_make_a_whole")
    case = Case(LINEAR(), numbers={"thousandths": 2000, "permille": 500})
    (row,) = told("shares_make_a_whole", case).rows
    assert (row.one, row.other) == (2.0, 2.25)


def test_at_a_limit_it_says_nothing() -> None:
    case = Case(Plain(highest=1.2), numbers={"thousandths": 2000, "permille": 500})
    assert holds("shares_make_a_whole", case)
