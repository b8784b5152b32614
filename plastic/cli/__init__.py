"""The command line: every command parses, calls one public function, and prints.

Only the standard library is imported before a command runs, so that ``plastic --help`` is quick.
Each command is a file of its own with ``add_arguments(parser)`` and ``run(args) -> int``.

Exit status: 0 done; 1 something unexpected, or a law that fails; 2 an input that cannot be used,
said in one line;
130 stopped by Ctrl-C; 141 nobody reads the output any more. What is possible but unusual is one
line each on the same stream, and changes no status.
"""

from __future__ import annotations

import argparse
import difflib
import os
import sys
import traceback
import warnings
from collections.abc import Iterator, Sequence
from contextlib import contextmanager
from types import ModuleType
from typing import Any

import plastic
from plastic.cli import cell, check, compare, impose, list_, new, run, show
from plastic.errors import PlasticError, UnusualValue

#: name -> (module, one line of help)
COMMANDS: dict[str, tuple[ModuleType, str]] = {
    "run": (run, "run a study: every rule, route and protocol, in every simulated cell"),
    "cell": (cell, "print the cell sheet of a study: its inputs one by one and together"),
    "impose": (impose, "apply one rule to spike times from files, without a cell"),
    "compare": (compare, "print the tables of results that are there already"),
    "check": (check, "check laws on a rule or a route, and show the smallest case that fails"),
    "list": (list_, "list rules, routes, protocols, measures and laws"),
    "show": (show, "show one of them: equation, parameters, sources, references"),
    "new": (new, "write a commented starter study that runs as it is"),
}


class _Parser(argparse.ArgumentParser):
    """A parser that answers a word it does not know with the nearest one it does."""

    def _check_value(self, action: argparse.Action, value: Any) -> None:
        known = list(action.choices or [])
        if known and value not in known:
            near = difflib.get_close_matches(str(value), known, n=1, cutoff=0.5)
            hint = f"; did you mean {near[0]!r}?" if near else ""
            raise argparse.ArgumentError(action, f"unknown: {value!r}{hint} ({', '.join(known)})")


def parser() -> argparse.ArgumentParser:
    """Return the parser of the whole command line."""
    top = _Parser(
        prog="plastic",
        description="Compare learning rules and routes of synaptic strengthening on one protocol.",
        epilog="Start with: plastic new first, then plastic run first.toml",
    )
    top.add_argument("--version", action="version", version=f"plastic {plastic.__version__}")
    commands = top.add_subparsers(dest="command", required=True, metavar="COMMAND")
    for name, (module, told) in COMMANDS.items():
        module.add_arguments(commands.add_parser(name, help=told, description=module.__doc__))
    return top


def main(argv: Sequence[str] | None = None) -> int:
    """Run one command and return its exit status.

    Parameters
    ----------
    argv : sequence of str, optional
        The words after ``plastic``; by default those of the command line.
    """
    for stream in (sys.stdout, sys.stderr):
        if hasattr(stream, "reconfigure"):
            stream.reconfigure(errors="replace")  # a terminal without "†" shows "?", not an error
    try:
        args = parser().parse_args(argv)
        with _unusual_told():
            status: int = COMMANDS[args.command][0].run(args)
        sys.stdout.flush()
    except SystemExit as stop:  # argparse has printed its message, or its help
        return stop.code if isinstance(stop.code, int) else 2
    except KeyboardInterrupt:
        return _said(_stopped(args.command), 130)
    except BrokenPipeError:
        os.dup2(os.open(os.devnull, os.O_WRONLY), sys.stdout.fileno())
        return 141
    except PlasticError as error:
        return _said(str(error), 2)
    except OSError as error:
        return _said(f"{error.filename or 'a file'}: {error.strerror or error}", 2)
    except Exception as error:
        return _unexpected(error)
    return status


@contextmanager
def _unusual_told() -> Iterator[None]:
    """Print every unusual value as one line, once."""
    told: set[str] = set()

    def show(message: Warning | str, category: type[Warning], *place: Any, **more: Any) -> None:
        if not issubclass(category, UnusualValue):
            others(message, category, *place, **more)
        elif str(message) not in told:
            told.add(str(message))
            print(f"plastic: {message}", file=sys.stderr)

    with warnings.catch_warnings():
        others = warnings.showwarning
        warnings.simplefilter("always", UnusualValue)
        warnings.showwarning = show
        yield


def _said(text: str, status: int) -> int:
    print(f"plastic: {' '.join(text.split())}", file=sys.stderr)
    return status


def _stopped(command: str) -> str:
    kept = "; finished blocks are kept, the same command resumes" if command == "run" else ""
    return f"stopped{kept}"


def _unexpected(error: Exception) -> int:
    if os.environ.get("PLASTIC_TRACEBACK") == "1":
        traceback.print_exception(error)
    return _said(
        f"something went wrong that should not ({type(error).__name__}: {error}); please report "
        "it with what you ran. PLASTIC_TRACEBACK=1 shows where.",
        1,
    )
