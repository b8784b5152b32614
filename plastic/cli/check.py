"""Check laws that any rule or route must survive, and print the smallest case that breaks one.

NAME is a rule or a route of the catalogue, "cells", or path/to/file.py:ClassName; a file is run as
Python, so check only files that you would run. Exit status: 0 every law holds, 1 one fails, 2 a
part that cannot be checked.
"""

from __future__ import annotations

import argparse
import sys
from pathlib import Path


def add_arguments(parser: argparse.ArgumentParser) -> None:
    """Declare the arguments of the command."""
    parser.add_argument("names", nargs="*", metavar="NAME", help="what to check")
    parser.add_argument("--all", action="store_true", help="check everything there is")
    parser.add_argument(
        "--examples", type=_positive, default=100, metavar="N", help="of each law (default: 100)"
    )
    parser.add_argument("--seed", type=_whole, default=0, metavar="N", help="(default: 0)")
    parser.add_argument("--json", action="store_true", help="print everything as JSON")
    parser.add_argument(
        "--certificate", type=Path, metavar="FILE",
        help="write one page: HTML for .html, text for anything else",
    )  # fmt: skip


def _whole(text: str) -> int:
    value = int(text)
    if value < 0:
        raise argparse.ArgumentTypeError(f"{text} is below 0")
    return value


def _positive(text: str) -> int:
    value = _whole(text)
    if value == 0:
        raise argparse.ArgumentTypeError("at least one example")
    return value


def run(args: argparse.Namespace) -> int:
    """Check every part that is named."""
    import json

    from plastic.checking.check import check
    from plastic.checking.loading import names
    from plastic.checking.shown import report_lines
    from plastic.cli._output import refuse_existing, write_new
    from plastic.errors import Misfit

    wanted = names() if args.all else args.names
    if not wanted or (args.all and args.names):
        raise Misfit("plastic check", got="no part" if not wanted else "names and --all",
                     expected="NAME, path/to/file.py:ClassName or --all")  # fmt: skip
    refuse_existing(args.certificate, "--certificate")
    reports = []
    for name in wanted:
        if ".py" in name:
            print(f"plastic: {name} is run as Python", file=sys.stderr)
        reports.append(check(name, examples=args.examples, seed=args.seed))
        if not args.json:
            print("\n".join(report_lines(reports[-1])), end="\n\n", flush=True)
    if args.json:
        print(json.dumps([report.data() for report in reports], indent=1, allow_nan=False))
    if args.certificate is not None:
        from plastic.report.certificate import certificate

        page = certificate(reports, html=args.certificate.suffix in (".html", ".htm"))
        write_new(args.certificate, page, "--certificate")
    return 0 if all(report.ok for report in reports) else 1
