"""The law of the unit of time."""

from __future__ import annotations

import math

import pytest

from plastic import rules
from plastic.laws import Case
from plastic.laws.time_units import stretched
from tests.laws.faulty import FAULTS, Sound, variant
from tests.laws.trying import assert_caught, assert_kept, told


@pytest.mark.parametrize(
    "rule", [Sound, *map(rules.find, ("inhibitory_balance", "synaptic_scaling"))]
)
def test_rules_that_declare_every_time_keep_it(rule: type) -> None:
    assert_kept(rule, "time_units")


@pytest.mark.parametrize("name", ["sliding_threshold", "covariance", "principal_component"])
def test_a_power_of_a_rate_is_declared_and_needed(name: str) -> None:
    rule = rules.find(name)
    assert_kept(rule, "time_units")
    with pytest.MonkeyPatch.context() as patched:
        patched.setattr(rule, "rate_powers", {})
        assert_caught(rule, "time_units")


@pytest.mark.parametrize("fault", ["HardCodedMilliseconds", "HardCodedTrace", "UnitSlip"])
def test_a_hidden_millisecond_is_caught(fault: str) -> None:
    assert assert_caught(FAULTS[fault][0], "time_units").spikes == 2


def test_both_worlds_are_told() -> None:
    """By hand: a fixed trace of 20 ms sees a pair of 20 ms, and of 60 ms where all is threefold."""
    case = Case(FAULTS["HardCodedTrace"][0](), ((0.0,),), (20.0,), 20.0, {"times": 3})
    (row,) = told("time_units", case).rows
    assert row.one == pytest.approx(1 + 0.02 * math.exp(-1), rel=1e-14)
    assert row.other == pytest.approx(1 + 0.02 * math.exp(-3), rel=1e-14)


def test_times_are_multiplied_rates_divided_and_powers_of_rates_too() -> None:
    """eta of dw = eta x y (y - theta) is per Hz cubed."""
    slow = stretched(rules.find("sliding_threshold")(), 2.0).values
    assert (slow["window"], slow["y_0"], slow["w_max"]) == (200.0, 5.0, 10.0)
    assert slow["eta"] == pytest.approx(8 * 2.7e-6, rel=1e-14)


def test_what_has_another_unit_stays() -> None:
    rule = variant("Plain")(up=0.5)
    assert stretched(rule, 4.0).values == {"up": 0.5, "down": 0.01, "tau": 80.0}
