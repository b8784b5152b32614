"""Print the tables of results that are there already."""

from __future__ import annotations

import argparse
from pathlib import Path


def add_arguments(parser: argparse.ArgumentParser) -> None:
    """Declare the arguments of the command."""
    parser.add_argument(
        "folder", metavar="DIR", type=Path, help="a folder that `plastic run` wrote"
    )
    parser.add_argument("--csv", type=Path, metavar="FILE", help="also write one line per arm")
    parser.add_argument("--figures", type=Path, metavar="DIR", help="also draw the figures again")


def run(args: argparse.Namespace) -> int:
    """Print every table, and write what is asked for."""
    import plastic
    from plastic.cli._output import refuse_existing, write_new
    from plastic.report.tables import printed

    refuse_existing(args.csv, "--csv")
    file = args.folder / "results.nc" if args.folder.is_dir() else args.folder
    dataset = plastic.load(file)
    comparison = plastic.compare(dataset)
    if args.csv is not None:
        write_new(args.csv, comparison.to_csv(), "--csv")
    if args.figures is not None:
        from plastic.report.figures import write_figures

        write_figures(dataset, args.figures)
    print(comparison.head)
    print()
    printed(comparison.grids())
    for note in comparison.notes:
        print(note)
    return 0
