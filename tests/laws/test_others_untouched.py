"""The law of other inputs."""

from __future__ import annotations

import pytest

from plastic import routes
from plastic.laws import Case
from tests.laws.faulty_routes import Plain, route
from tests.laws.trying import assert_caught, assert_kept, told


@pytest.mark.parametrize("part", [Plain, *map(routes.find, routes.names())])
def test_routes_keep_it(part: type) -> None:
    assert_kept(part, "others_untouched")


@pytest.mark.parametrize(
    ("target", "says"),
    [
        ("diameter", "touches_others = False, but the diameter is shared, and the route"),
        ("inhibition", "touches_others = False, but the inhibition is shared, and the route"),
        ("quantum", "touches_others = True, but the quantum is not"),
    ],
)
def test_a_route_that_says_otherwise_is_caught(target: str, says: str) -> None:
    part = route("Wrong", target=target, touches_others=target == "quantum")
    assert_caught(part, "others_untouched")
    assert told("others_untouched", Case(part())).says.startswith(says)
