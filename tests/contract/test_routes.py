"""What holds for every route of expression, whoever wrote it."""

from __future__ import annotations

import math
import typing

import numpy as np
import pytest
from hypothesis import example, given
from hypothesis import strategies as st

from plastic import routes
from plastic.catalogue import class_name
from plastic.errors import Misfit
from plastic.parameters import ParameterError
from plastic.routes._interface import TARGETS, Route
from plastic.units import INTERNAL

NAMES = routes.names()
ROUTES = [routes.find(name) for name in NAMES]
every_route = pytest.mark.parametrize("route", ROUTES, ids=NAMES)
EVIDENCE = typing.get_args(typing.get_args(typing.get_type_hints(Route)["evidence"])[0])
FACTORS = st.floats(0, 1e6, allow_nan=False)
SHARES = st.floats(0, 1, allow_nan=False)


def limits(route: Route) -> tuple[float, float]:
    """Return what the physical variable may be, as multiples of its base."""
    return (0.0 if route.form == "excess" else route.lowest), route.highest


@pytest.mark.parametrize("name", NAMES)
def test_the_file_the_name_and_the_class_agree(name: str) -> None:
    route = routes.find(name)
    assert issubclass(route, Route)
    assert route.__name__ == class_name(name)
    assert route.__module__.split(".")[-1] == name


@every_route
def test_it_says_what_it_is_and_how_good_the_evidence_is(route: type[Route]) -> None:
    assert vars(route).get("__doc__")
    assert 10 < len(route.summary()) <= 100
    assert route.summary().endswith(".")
    assert "factor" in route.equation
    assert route.evidence in EVIDENCE
    assert route.limit_cause
    assert route.references
    assert all(any(c.isdigit() for c in reference) for reference in route.references)


@every_route
def test_it_moves_one_known_variable_in_a_known_way(route: type[Route]) -> None:
    assert route.target in TARGETS
    assert route.form in ("power", "excess")
    assert route.sign in (-1, 1)


def test_no_two_routes_move_the_same_variable() -> None:
    targets = [route.target for route in ROUTES]
    assert len(targets) == len(set(targets))


@every_route
def test_every_parameter_has_a_unit_a_source_and_a_default_within_bounds(
    route: type[Route],
) -> None:
    for name, declared in route.parameters.items():
        assert declared.unit == "1" or declared.unit in INTERNAL.values(), name
        assert declared.source.strip(), name
        assert math.isfinite(declared.default), name
        assert declared.low <= declared.default <= declared.high, name


@every_route
@pytest.mark.parametrize(
    "wrong", [{"delay": -1}, {"tau": -1}, {"highest": 0.5}, {"lowest": 1.5}], ids=str
)
def test_a_limit_on_the_wrong_side_of_one_is_refused(
    route: type[Route], wrong: dict[str, float]
) -> None:
    with pytest.raises(ParameterError, match=next(iter(wrong))):
        route(**wrong)


@every_route
@given(share=SHARES)
def test_a_factor_of_one_is_neutral(route: type[Route], share: float) -> None:
    neutral = 0.0 if route.form == "excess" else 1.0
    assert route().multiple(1.0, share) == neutral


@every_route
@given(factor=FACTORS, share=SHARES)
@example(factor=5e-324, share=1.0)
def test_it_is_defined_everywhere_within_its_limits(
    route: type[Route], factor: float, share: float
) -> None:
    low, high = limits(route())
    value = route().multiple(factor, share)
    assert np.isfinite(value)
    assert low <= value <= high


@every_route
@given(one=FACTORS, other=FACTORS, share=SHARES)
def test_it_is_monotone_up_to_its_ceiling(
    route: type[Route], one: float, other: float, share: float
) -> None:
    few, many = sorted((one, other))
    assert route.sign * (route().multiple(many, share) - route().multiple(few, share)) >= 0


@every_route
def test_it_moves_at_once_above_one_and_stops_at_its_ceiling(route: type[Route]) -> None:
    """The control of the law above: a constant is monotone too."""
    part = route()
    near, far = part.multiple(1.01), part.multiple(1e12)
    assert route.sign * (near - part.multiple(1.0)) > 0
    assert far == limits(part)[route.sign > 0]


@every_route
def test_it_is_defined_at_zero_and_below_one(route: type[Route]) -> None:
    part, (low, high) = route(), limits(route())
    at_zero = part.multiple(0.0)
    assert np.isfinite(at_zero)
    assert at_zero == (low if route.sign > 0 else high)
    half = part.multiple(0.5)
    assert route.sign * (half - part.multiple(1.0)) <= 0


@every_route
def test_a_zero_baseline_stays_zero(route: type[Route]) -> None:
    assert (0.0 * route().multiple(np.array([0.0, 0.5, 1.0, 2.0, 1e9])) == 0).all()


@every_route
@given(factor=st.floats(1.0, 1.2), share=st.floats(0.05, 1))
def test_a_share_is_an_exponent(route: type[Route], factor: float, share: float) -> None:
    """Two shares that sum to one give what the whole gives, away from the limits."""
    part = route()
    offset = 1.0 if route.form == "excess" else 0.0
    whole, first, rest = (part.multiple(factor, s) + offset for s in (1.0, share, 1 - share))
    assert first * rest == pytest.approx(float(whole), rel=1e-12)


@every_route
def test_an_array_is_mapped_number_by_number(route: type[Route]) -> None:
    factors = np.array([[0.0, 0.5, 1.0], [1.1, 2.0, 50.0]])
    mapped = route().multiple(factors)
    assert mapped.shape == factors.shape
    assert mapped.ravel().tolist() == [float(route().multiple(f)) for f in factors.ravel()]


@every_route
def test_a_pure_route_has_one_share_of_one(route: type[Route]) -> None:
    part = route()
    pure = routes.Mixture.pure("alone", part)
    assert (dict(pure.shares), dict(pure.channels)) == ({"alone": 1.0}, {"alone": part})


@every_route
@pytest.mark.parametrize("share", [0.5, 1.5, -1.0])
def test_a_mixture_whose_shares_do_not_sum_to_one_is_refused(
    route: type[Route], share: float
) -> None:
    with pytest.raises(Misfit, match=r"a sum of 1|shares >= 0"):
        routes.Mixture("m", {"it": share}, {"it": route()})


def test_a_mixture_needs_a_share_for_every_channel() -> None:
    channels = {"one": ROUTES[0](), "two": ROUTES[1]()}
    with pytest.raises(
        Misfit, match=r"shares of \['one'\] but expected shares of \['one', 'two'\]"
    ):
        routes.Mixture("m", {"one": 1.0}, channels)
    with pytest.raises(Misfit, match="shares >= 0"):
        routes.Mixture("m", {}, {})


def test_matched_shares_need_not_sum_to_one() -> None:
    matched = routes.Mixture("m", {"it": 2.5}, {"it": ROUTES[0]()}, matched=True)
    assert matched.shares["it"] == 2.5
