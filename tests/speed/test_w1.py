"""W1: as many inputs as a neuron may have, all busy. The ratios are printed by the report."""

from __future__ import annotations

from pathlib import Path
from typing import Any

import numpy as np
import pytest

import plastic
from plastic import rules
from tests.speed import workloads, yardsticks

SECONDS = 3.0
RULES = {
    "pair_timing": rules.find("pair_timing").from_set("near_balanced", w_max=2.0),
    "triplet_timing": rules.find("triplet_timing")(w_max=1.2),
}

needs_c = pytest.mark.skipif(yardsticks.COMPILER is None, reason="no C compiler here")


@pytest.mark.parametrize("rule", RULES)
def test_w1_is_busy(rule: str, benchmark: Any) -> None:
    """What is timed is what it says: many events, tens of spikes a second, moving weights."""
    prepared = workloads.w1(RULES[rule], SECONDS)
    log = benchmark(prepared.run)
    expected = SECONDS * (1000 * workloads.RATE + 200 * workloads.INHIBITORY_RATE)
    assert len(prepared.wiring.events) == pytest.approx(expected, rel=0.02)
    assert 5 < log.ended["spikes"][0] / SECONDS < 100
    assert np.abs(log.variables[0, -1, 0] - 1).mean() > 1e-2


@needs_c
def test_naive_c_does_the_same_work(tmp_path: Path, benchmark: Any) -> None:
    """Its solver of the membrane is another, so its spikes move; for them its rule is exact."""
    prepared = workloads.w1(RULES["pair_timing"], SECONDS)
    spikes, weights = benchmark(yardsticks.naive_c(tmp_path, prepared))
    assert len(spikes) == pytest.approx(prepared.run().ended["spikes"][0], rel=0.05)
    events = prepared.wiring.events
    pre = {str(k): events["step"][events["learner"] == k] * workloads.DT for k in range(1000)}
    imposed = plastic.impose(prepared.rule, pre, spikes).w[:, -1]
    np.testing.assert_allclose(weights, imposed, rtol=1e-9)


def test_a_numpy_script_does_the_same_in_kind(benchmark: Any) -> None:
    """It draws its own spikes, so that only the rate can be compared: within a third."""
    prepared = workloads.w1(RULES["pair_timing"], SECONDS)
    setup = yardsticks.setup_of(prepared)
    spikes, weights = benchmark.pedantic(
        yardsticks.numpy_script, (prepared.wiring, setup), rounds=1, iterations=1
    )
    assert spikes == pytest.approx(prepared.run().ended["spikes"][0], rel=1 / 3)
    assert weights.std() > 1e-3
