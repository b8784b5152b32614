"""Print the table of ratios: ``python -m tests.speed.report``.

Every ratio is the median of interleaved runs in this process; the machine's absolute speed and its
other users do not matter much. The last rows are whole runs of the shipped study.
"""

from __future__ import annotations

import argparse
import statistics
import tempfile
import time
from collections.abc import Callable, Iterator
from functools import partial
from pathlib import Path

import numpy as np
from rich.console import Console
from rich.table import Table

import plastic
from plastic import rules
from plastic.study.block import Bench, run_block, simulate
from plastic.study.file import load_study
from plastic.study.grid import grid_of
from plastic.study.population import populate
from tests.speed import workloads, yardsticks

Row = tuple[str, str, str]
STUDY = Path(__file__).parents[2] / "experiments" / "two_roads" / "study.toml"


def seconds(work: Callable[[], object]) -> float:
    """Return how long one call takes."""
    start = time.perf_counter()
    work()
    return time.perf_counter() - start


def interleaved(works: list[Callable[[], object]], repeats: int) -> list[float]:
    """Return the median time of each, called in turn, after one call each to warm up."""
    for work in works:
        work()
    taken = [[seconds(work) for work in works] for _ in range(repeats)]
    return [statistics.median(column) for column in zip(*taken, strict=True)]


def w1_rows(length: float, repeats: int) -> Iterator[Row]:
    """Compare W1 with naive C and with a NumPy script."""
    rule = rules.find("pair_timing").from_set("near_balanced", w_max=2.0)
    prepared = workloads.w1(rule, length)
    if yardsticks.COMPILER is None:
        yield "W1, pair rule", "no C compiler here", ""
    else:
        with tempfile.TemporaryDirectory() as folder:
            naive = yardsticks.naive_c(Path(folder), prepared)
            ours, theirs = interleaved([prepared.run, naive], repeats)
        flags = " ".join(yardsticks.FLAGS[:2])
        yield f"W1, pair rule, over naive C ({flags})", f"{ours / theirs:.2f}", "<= 1.0"
    short = workloads.w1(rule, length / 50)
    setup = yardsticks.setup_of(short)
    ours, theirs = interleaved(
        [short.run, lambda: yardsticks.numpy_script(short.wiring, setup)], max(2, repeats // 3)
    )
    yield "W1, NumPy script over ours", f"{theirs / ours:.0f}", ">= 100"


def w2_rows(cells: int, repeats: int) -> Iterator[Row]:
    """Compare jumping over silence with stepping through it."""
    prepared = workloads.w2(rules.find("pair_timing")(), cells)
    jumped, stepped = interleaved([prepared.run, prepared.clocked().run], repeats)
    yield "W2, stepping over jumping", f"{stepped / jumped:.0f}", ">= 30"


def study_rows(cells: int) -> Iterator[Row]:
    """Time the shipped study: readings over simulation, and the whole run."""
    study = load_study(STUDY, cells=min(cells, 20))
    population = populate(study)
    bench, stop = Bench(study, population, slice(0, study.cells)), np.zeros(1, np.int64)
    arms = grid_of(study, population).arms
    for arm in arms:  # tables, compiled rules
        run_block(bench, arm, stop)
    simulation, whole = 0.0, 0.0
    for arm in arms:
        simulation += seconds(partial(simulate, study, population, arm, bench.chosen, stop))
        whole += seconds(partial(run_block, bench, arm, stop))
    yield "two_roads, readings over simulation", f"{whole / simulation - 1:.2f}", "< 1"
    taken = seconds(lambda: plastic.run(STUDY, cells=cells))
    yield f"two_roads, {cells} cells, warm, in seconds here", f"{taken:.0f}", "< 60 (100 cells)"


def main() -> None:
    """Measure and print."""
    parser = argparse.ArgumentParser(description="Print the table of ratios.")
    parser.add_argument("--seconds", type=float, default=100.0, help="length of W1")
    parser.add_argument("--repeats", type=int, default=9)
    parser.add_argument("--cells", type=int, default=100, help="cells of two_roads")
    given = parser.parse_args()
    table = Table("workload", "measured", "goal")
    for row in (
        *w1_rows(given.seconds, given.repeats),
        *w2_rows(50, given.repeats),
        *study_rows(given.cells),
    ):
        table.add_row(*row)
    Console().print(table)


if __name__ == "__main__":
    main()
