"""Print the cell sheet of a study: what its nominal cell does with its inputs, before any learning.

EPSPs here and there, charge, ceilings, what a wider dendrite does and why, which inputs reach
threshold together, what kind of inhibition there is, and how exact the simulation is.
"""

from __future__ import annotations

import argparse
from pathlib import Path


def add_arguments(parser: argparse.ArgumentParser) -> None:
    """Declare the arguments of the command."""
    parser.add_argument("study", metavar="STUDY.toml", type=Path, help="the study file")
    parser.add_argument(
        "--out", type=Path, metavar="DIR", help="folder of the figures (default: by name)"
    )
    parser.add_argument("--no-figures", action="store_true", help="write no figures")


def run(args: argparse.Namespace) -> int:
    """Print every table of the sheet and write its figures."""
    import plastic
    from plastic.report.cell import cell_grids
    from plastic.report.tables import printed

    sheet = plastic.cell_sheet(args.study)
    printed(cell_grids(sheet))
    for note in sheet.notes:
        print(note)
    if not args.no_figures:
        from plastic.report.figures.cell import write_cell_figures

        out: Path = args.out or default_out(args.study)
        paths = write_cell_figures(sheet, out)
        print(f"{out}: {len(paths)} files, figures as SVG and PNG with their numbers as CSV")
    return 0


def default_out(study: Path) -> Path:
    """Return the folder of a study's figures when none is given, in the current folder."""
    name = study.resolve().parent.name if study.name == "study.toml" else study.stem
    return Path(f"{name or 'study'}-cell")
