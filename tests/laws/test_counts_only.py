"""The law of counts."""

from __future__ import annotations

import pytest

from plastic import rules
from plastic.laws import Case
from plastic.laws.counts_only import CountsOnly
from plastic.parameters import parameter
from plastic.rules._interface import Changes, Rule, weight
from tests.laws.faulty import Sound
from tests.laws.trying import assert_caught, assert_kept, told


class Late(Rule):
    """Changes by the clock at the end of the window, and by a global count of calls."""

    eta: float = parameter(1e-3, "1", low=0, high=1, source="invented")
    window: float = parameter(64.0, "ms", low=1, high=1e3, source="invented")
    calls = [0]

    reads = "rates"
    w = weight(1.0, low=0.0, high=1e6)

    def at_presentation(self, pre_rate: float) -> Changes:
        """Change by the number of presentations so far."""
        type(self).calls[0] += 1
        return {"w": self.eta * pre_rate * self.calls[0]}


@pytest.mark.parametrize("name", ["sliding_threshold", "covariance", "principal_component"])
def test_rules_of_rates_keep_it(name: str) -> None:
    assert_kept(rules.find(name), "counts_only")


def test_a_rule_for_which_order_matters_is_caught() -> None:
    assert_caught(Late, "counts_only")


def test_the_spikes_of_the_window_are_told() -> None:
    Late.calls[0] = 0
    case = Case(Late(), ((),), (), 1.0, {"pre": 2, "post": 1, "step": 12})
    broken = told("counts_only", case)
    assert broken.case is not None
    assert broken.case.pre == ((64 * 12 / 64 / 13, 64 * 24 / 64 / 13), (0.0,))
    assert broken.case.post == (64 * (1 - 12 / 64 / 17),)


def test_rules_of_spikes_are_left_alone() -> None:
    assert CountsOnly().idle(Sound) == "reads spikes"
