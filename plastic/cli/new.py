"""Write a commented starter study that runs as it is."""

from __future__ import annotations

import argparse
from pathlib import Path


def add_arguments(parser: argparse.ArgumentParser) -> None:
    """Declare the arguments of the command."""
    parser.add_argument("name", metavar="NAME", help="the study will be NAME.toml")


def run(args: argparse.Namespace) -> int:
    """Write the study, unless something of that name is there."""
    from plastic.errors import StoreError
    from plastic.study.starter import STARTER

    stem = args.name.removesuffix(".toml")
    if stem.endswith("/") or not stem.strip(" ./"):
        raise StoreError(f"{args.name!r} is no name; write one such as: plastic new first")
    path = Path(args.name if args.name.endswith(".toml") else f"{args.name}.toml")
    if not path.parent.is_dir():
        raise StoreError(f"{path}: there is no folder {path.parent}; make it first")
    try:
        with path.open("x", encoding="utf-8") as file:
            file.write(STARTER)
    except FileExistsError:
        raise StoreError(f"{path} is there already; choose another name") from None
    print(f"{path} is written; run it with: plastic run {path}")
    return 0
