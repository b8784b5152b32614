"""Apply one rule to spike times from files, without a cell.

A file holds one spike time a line; a header line and comment lines (#) are skipped. A header that
names another unit than --unit, such as time_s for ms, is refused.
"""

from __future__ import annotations

import argparse
from pathlib import Path
from typing import Any

#: lines of the printed table; --out holds every event
SHOWN = 12
#: spikes from which compiling the rule takes less time than running it in plain Python
COMPILED = 20_000


def add_arguments(parser: argparse.ArgumentParser) -> None:
    """Declare the arguments of the command."""
    parser.add_argument("rule", metavar="RULE", help="a rule; `plastic list rules` names them")
    parser.add_argument("--pre", type=Path, required=True, metavar="FILE", help="presynaptic times")
    parser.add_argument(
        "--post", type=Path, required=True, metavar="FILE", help="spikes of the cell"
    )
    parser.add_argument("--unit", default="ms", help="unit of the times in the files (default: ms)")
    parser.add_argument(
        "--column", metavar="NAME", help="the column with the times, in files that have several"
    )
    parser.add_argument("--set", metavar="NAME", help="a parameter set of the rule")
    parser.add_argument(
        "--param", action="append", default=[], metavar="NAME=VALUE",
        help="change one parameter; may be given several times",
    )  # fmt: skip
    parser.add_argument("--out", type=Path, metavar="FILE.csv", help="write every event as CSV")


def run(args: argparse.Namespace) -> int:
    """Impose the spike times, print a short table and the final change."""
    from plastic.cli._output import refuse_existing, write_new
    from plastic.protocols._recorded import read_times
    from plastic.report.tables import printed

    refuse_existing(args.out, "--out")
    rule = _rule(args.rule, args.set, args.param)
    pre, post = (
        list(read_times(path, unit=args.unit, column=args.column)) for path in (args.pre, args.post)
    )
    grid, change = _table(rule, pre, post)
    if args.out is not None:
        write_new(args.out, grid.csv(), "--out")
    for kind, path, times in (("pre", args.pre, pre), ("post", args.post, post)):
        print(f"{kind}synaptic, {path.name}: {_train(times)}; times read in {args.unit}")
    print()
    kept = f"all of them in {args.out}" if args.out else "--out FILE.csv keeps them all"
    printed([grid.shortened(SHOWN, kept)])
    spikes = f"{len(pre)} presynaptic and {_counted(len(post), 'postsynaptic spike')}"
    print(f"{_rounded(100 * change)} % after {spikes}")
    print(f"final change: {100 * change:+.6g} % of the baseline")
    if rule.illustrative:
        print(f"illustrative: {rule.illustrative}")
    return 0


def _train(times: list[float]) -> str:
    """Return number, span and mean rate of spikes, so that a wrong unit shows."""
    count = _counted(len(times), "spike")
    if len(times) < 2:
        return f"{count} at {times[0] / 1000:.6g} s"
    rate = 1000 * (len(times) - 1) / (times[-1] - times[0])
    return (
        f"{count} from {times[0] / 1000:.6g} to {times[-1] / 1000:.6g} s, mean rate {rate:.3g} Hz"
    )


def _counted(count: int, what: str) -> str:
    return f"{count} {what}{'' if count == 1 else 's'}"


def _rounded(value: float) -> str:
    """Return a signed percentage in two digits, or in whole numbers from 10 on."""
    return f"{value:+.0f}" if abs(value) >= 10 else f"{value:+.2g}"


def _rule(name: str, chosen: str | None, given: list[str]) -> Any:
    """Return the rule with its set and the parameters given as NAME=VALUE."""
    import plastic
    from plastic.errors import DataError, UnknownName
    from plastic.units import INTERNAL, QuantityError, number_in

    cls = plastic.rules.find(name)
    dimensions = {unit or "1": dimension for dimension, unit in INTERNAL.items()}
    values: dict[str, float] = {}
    for text in given:
        key, sign, value = text.partition("=")
        key = key.strip()
        if not sign:
            raise DataError("--param", "", text, "must be NAME=VALUE")
        if key not in cls.parameters:
            raise UnknownName("parameter", key, cls.parameters, where=name)
        unit = cls.parameters[key].unit
        try:
            plain = _is_number(value)
            values[key] = float(value) if plain else number_in(value, dimensions[unit])
        except QuantityError as error:
            told = str(error).removeprefix(f"{value!r} is ")
            raise DataError("--param", key, value, told) from None
    return cls.from_set(chosen, **values) if chosen else cls(**values)


def _is_number(text: str) -> bool:
    try:
        float(text)
    except ValueError:
        return False
    return True


def _table(rule: Any, pre: list[float], post: list[float]) -> tuple[Any, float]:
    """Return one row per event with the state just after it, and the final change."""
    import numpy as np

    import plastic
    from plastic.report.grid import Grid

    events = np.unique([*pre, *post])
    many = len(events) > COMPILED
    end = float(plastic.impose(rule, pre, post, compiled=many)["time"][-1])
    after = np.nextafter(events, np.inf)
    late = max(end, float(np.nextafter(after[-1], np.inf)))
    result = plastic.impose(rule, pre, post, end=late, readings=[*after, late], compiled=many)
    factor = result["factor"].values[0]
    names = [name for name in result.data_vars if name != "factor"]
    states = [np.ravel(result[name].values) for name in names]
    kinds = [
        "both" if t in set(pre) and t in set(post) else "pre" if t in set(pre) else "post"
        for t in events
    ]
    rows = [
        [f"{t:.10g}", kind, f"{factor[k]:.10g}", *(f"{state[k]:.10g}" for state in states)]
        for k, (t, kind) in enumerate(zip([*events, late], [*kinds, "end"], strict=True))
    ]
    columns = ["time (ms)", "spike of", "factor", *(f"{name} of the rule" for name in names)]
    return Grid(f"{rule}", columns, rows, ["state just after each event"]), float(factor[-1]) - 1.0
