"""Show one rule, route, protocol, measure or law: equation, parameters, sources, references."""

from __future__ import annotations

import argparse


def add_arguments(parser: argparse.ArgumentParser) -> None:
    """Declare the arguments of the command."""
    parser.add_argument("name", metavar="NAME", help="a name that `plastic list` shows")


def run(args: argparse.Namespace) -> int:
    """Print everything about one part."""
    from plastic.report.parts import show_grids
    from plastic.report.tables import printed

    printed(show_grids(args.name))
    return 0
