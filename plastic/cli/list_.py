"""List rules, routes, protocols, measures and laws."""

from __future__ import annotations

import argparse

ROOMS = ("rules", "routes", "protocols", "measures", "laws")


def add_arguments(parser: argparse.ArgumentParser) -> None:
    """Declare the arguments of the command."""
    parser.add_argument("room", nargs="?", choices=ROOMS, help="one catalogue (default: all)")


def run(args: argparse.Namespace) -> int:
    """Print one catalogue, or all."""
    from plastic.report.parts import catalogue_grid
    from plastic.report.tables import printed

    rooms = [args.room] if args.room else list(ROOMS)
    printed([grid for room in rooms if (grid := catalogue_grid(room)).rows])
    return 0
