"""Run a study: every rule, route and protocol, in every simulated cell.

Prints the protocols, the rule x route matrices and the controls, and writes results, tables and
figures. A run that was stopped goes on where it was when the same command is given again.
"""

from __future__ import annotations

import argparse
import sys
from pathlib import Path
from typing import Any

CAUTION = (
    "Caution: models guide experiments and do not replace them; this is a passive, reduced cell, "
    "and slice protocols are no stimulation prescriptions for people."
)


def add_arguments(parser: argparse.ArgumentParser) -> None:
    """Declare the arguments of the command."""
    parser.add_argument("study", metavar="STUDY.toml", type=Path, help="the study file")
    parser.add_argument("--out", type=Path, metavar="DIR", help="output folder (default: by name)")
    parser.add_argument("--cells", type=_at_least_1, metavar="N", help="simulated cells per arm")
    parser.add_argument("--seed", type=_at_least_0, metavar="N", help="seed of all random numbers")
    parser.add_argument("--workers", type=_at_least_1, metavar="N", help="threads (default: all)")
    parser.add_argument("--no-figures", action="store_true", help="write no figures")
    parser.add_argument(
        "--check-dt", action="store_true", help="run a few cells again at half the time step"
    )


def default_out(study: Path) -> Path:
    """Return the output folder of a study when none is given, in the current folder."""
    name = study.resolve().parent.name if study.name == "study.toml" else study.stem
    return Path(f"{name or 'study'}-results")


def run(args: argparse.Namespace) -> int:
    """Run the study, print its tables and write its files."""
    import plastic
    from plastic.report.comparison import compare
    from plastic.report.tables import printed
    from plastic.report.times import write_times
    from plastic.study.file import load_study

    study = load_study(args.study, seed=args.seed, cells=args.cells)
    out: Path = args.out or default_out(args.study)
    with _bar() as bar:
        dataset = plastic.run(
            study, out=out, cells=args.cells, seed=args.seed, workers=args.workers,
            progress=bar.task("simulating"),
        )  # fmt: skip
        comparison = compare(dataset)
        comparison.to_csv(out / "comparison.csv")
        write_times(study.schedules(), out / "protocols")
        if not args.no_figures:
            from plastic.report.figures import write_figures

            write_figures(dataset, out / "figures", progress=bar.task("drawing"))
        checked = _checked(study, args, bar) if args.check_dt else []
    print(f"{comparison.head}\n")
    printed([*_protocols(study), *comparison.grids(verdicts=False), *checked])
    _tell(out, figures=not args.no_figures, notes=comparison.notes)
    return 0


def _checked(study: Any, args: argparse.Namespace, bar: _bar) -> list[Any]:
    """Return the table of what half the time step changes."""
    import plastic
    from plastic.report.half_step import step_grid

    task = bar.task("at half the time step")
    return [step_grid(plastic.check_dt(study, workers=args.workers, progress=task))]


def _protocols(study: Any) -> list[Any]:
    """Return the table of each protocol, with its controls and those that it has no room for."""
    from plastic.report.times import protocol_grid

    schedules, left_out = study.schedules(), study.controls_left_out()
    grids = []
    for name, schedule in schedules.items():
        if schedule.control:
            continue
        mine = [n for n, s in schedules.items() if s.control and n.startswith(f"{name}, ")]
        notes = (
            [f"controls: {', '.join(n.removeprefix(f'{name}, ') for n in mine)}"] if mine else []
        )
        notes += [f"left out: {k}: {why}" for k, why in left_out.items() if k.startswith(name)]
        grids.append(protocol_grid(schedule, notes))
    return grids


def _tell(out: Path, *, figures: bool, notes: tuple[str, ...]) -> None:
    told = {
        out / "results.nc": "every number, with units",
        out / "comparison.csv": "one line per arm, with the shares of every verdict",
        out / "protocols": "the exact time of every event",
    }
    if figures:
        told[out / "figures"] = "85 and 180 mm, SVG and PNG, with their numbers as CSV"
    width = max(len(str(path)) for path in told)
    for path, what in told.items():
        print(f"{str(path).ljust(width)}  {what}")
    for note in notes:
        print(note)
    print(CAUTION)


class _bar:  # noqa: N801 - used as a verb: `with _bar() as bar`
    """A progress bar with the time left, on a terminal; nothing elsewhere."""

    def __enter__(self) -> _bar:
        from rich.console import Console
        from rich.progress import BarColumn, Progress, TextColumn, TimeRemainingColumn

        console = Console(stderr=True)
        self._progress = Progress(
            TextColumn("{task.description}"), BarColumn(), TextColumn("{task.percentage:3.0f} %"),
            TimeRemainingColumn(), TextColumn("left"), console=console, transient=True,
            disable=not sys.stderr.isatty(),
        )  # fmt: skip
        self._progress.start()
        return self

    def __exit__(self, *_: object) -> None:
        self._progress.stop()

    def task(self, told: str) -> Any:
        """Return a function of (done, total) that moves the bar."""
        task = self._progress.add_task(told, total=None)

        def moved(done: int, total: int) -> None:
            self._progress.update(task, completed=done, total=total)

        return moved


def _at_least_1(text: str) -> int:
    return _whole(text, 1)


def _at_least_0(text: str) -> int:
    return _whole(text, 0)


def _whole(text: str, low: int) -> int:
    try:
        value = int(text)
    except ValueError:
        value = low - 1
    if value < low:
        raise argparse.ArgumentTypeError(f"{text!r} is no whole number of {low} or more")
    return value
