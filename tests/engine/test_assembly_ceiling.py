"""The factor at which a route is at its limit, by its closed form and by the route's own map."""

from __future__ import annotations

import math
from collections.abc import Sequence

import pytest
from scipy.optimize import brentq

from plastic import routes
from plastic.engine.assembly import ceiling
from plastic.routes import Mixture
from tests.engine.scenes import pure


def reaches(name: str, share: float, learned: Sequence[tuple[int, int]]) -> float:
    """Return the factor at which a route's own map stops, by bisection on `Route.multiple`."""
    kind = routes.find(name)()
    goal = kind.lowest if kind.sign < 0 else kind.highest

    def missing(log_factor: float) -> float:
        factor = math.exp(log_factor)
        if kind.target == "diameter":
            own, every = learned[0]
            return (own * factor**share + every - own) / every - goal
        if kind.form == "excess":
            return factor**share - 1.0 - goal
        return factor ** (kind.sign * share) - goal

    return math.exp(brentq(missing, 0.0, 60.0, xtol=1e-14))


LIMITED = [name for name in routes.names() if routes.find(name).target != "probability"]


@pytest.mark.parametrize("name", LIMITED)
@pytest.mark.parametrize("share", [1.0, 0.4])
def test_a_ceiling_is_the_factor_at_which_the_route_stops(name: str, share: float) -> None:
    learned = [(2, 5)]
    route = Mixture("m", {name: share}, {name: routes.find(name)()}, matched=True)
    assert ceiling(route, 1.5, learned) == pytest.approx(reaches(name, share, learned), rel=1e-9)
    top = ceiling(route, 1.5, [(1, 1)])
    kind = routes.find(name)()
    assert kind.multiple(1.01 * top, share) == kind.multiple(2 * top, share)
    assert kind.multiple(0.99 * top, share) != kind.multiple(top, share)


@pytest.mark.parametrize("share", [1.0, 0.5])
def test_release_stops_at_its_highest_probability(share: float) -> None:
    channels = {"p": routes.find("release_probability")()}
    route = Mixture("m", {"p": share}, channels, matched=True)
    assert ceiling(route, 0.9 / 0.6, []) == pytest.approx(1.5 ** (1 / share))


def test_a_mixture_stops_with_its_last_channel_and_a_share_of_none_is_no_channel() -> None:
    names = ("release_probability", "quantal_size")
    channels = {n: routes.find(n)() for n in names}
    both = Mixture("m", dict(zip(names, (0.5, 0.5), strict=True)), channels)
    assert ceiling(both, 1.5, []) == pytest.approx(4.0**2)
    assert ceiling(both, 5.0, []) == pytest.approx(5.0**2)
    one = Mixture("m", dict(zip(names, (1.0, 0.0), strict=True)), channels)
    assert ceiling(one, 1.5, []) == pytest.approx(1.5)


def test_the_widest_needed_stretch_decides() -> None:
    """(3 * 1.3 - 2) / 1 = 1.9 where one contact of three learns, 1.3 where all do."""
    route = pure("dendrite_width")
    assert ceiling(route, 1.0, [(1, 3), (2, 2)]) == pytest.approx(1.9)
    assert ceiling(route, 1.0, [(2, 2)]) == pytest.approx(1.3)
    assert ceiling(route, 1.0, []) == math.inf  # nothing widens, so nothing stops


def test_a_route_without_a_limit_has_no_ceiling() -> None:
    halves = {"spine_neck": 0.5, "quantal_size": 0.5}
    channels = {
        "spine_neck": routes.find("spine_neck")(lowest=0),
        "quantal_size": routes.find("quantal_size")(),
    }
    assert ceiling(Mixture("m", halves, channels), 1.5, []) == math.inf
