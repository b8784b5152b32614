"""W2: pairings with long silences, which are jumped over. The ratios are printed by the report."""

from __future__ import annotations

from typing import Any

from plastic import rules
from tests.speed import workloads

PAIR = rules.find("pair_timing")()


def test_a_jumped_run_is_the_stepped_run_with_thirty_times_fewer_steps(benchmark: Any) -> None:
    prepared = workloads.w2(PAIR, 3, pairings=6)
    jumped, stepped = benchmark(prepared.run), prepared.clocked().run()
    assert jumped.variables.tobytes() == stepped.variables.tobytes()
    assert jumped.spike_step.tobytes() == stepped.spike_step.tobytes()
    assert (jumped.ended["spikes"] >= 6).all()
    assert (stepped.ended["steps"] > 30 * jumped.ended["steps"]).all()
