"""One law on one part: draw examples, and shrink the first that fails to the smallest."""

from __future__ import annotations

import copy
from collections.abc import Iterator
from contextlib import contextmanager
from dataclasses import dataclass, replace
from typing import Any

import hypothesis
import numpy as np
from hypothesis import HealthCheck, Phase, Verbosity
from hypothesis.errors import Flaky
from hypothesis.internal.conjecture import providers

from plastic.checking.limits import Endless, limited
from plastic.checking.memory import Memory
from plastic.checking.strategies import cases
from plastic.errors import RuleError
from plastic.laws._interface import Broken, Case, Law

#: s; the longest a case may take, and a law that looks at a part once
LONGEST, LONGEST_ONCE = 10.0, 300.0
REMEMBERS = "the same case gave different outcomes: something is remembered or random"


@dataclass
class Search:
    """What a search found.

    Attributes
    ----------
    examples : int
        Examples tried, up to the first that failed.
    case, broken : the smallest failing case, if any
    """

    examples: int = 0
    case: Case | None = None
    broken: Broken | None = None


class _Broke(Exception):  # noqa: N818
    """A case that breaks a law, for the search."""


def search(law: Law, part: type[Any], *, examples: int, seed: int) -> Search:
    """Return the smallest case of a part that breaks a law, or none.

    Parameters
    ----------
    law : Law
    part : class
    examples : int
        How many to try; laws whose examples take long try their share.
    seed : int

    Raises
    ------
    RuleError
        When a case does not come to an end.
    """
    if not law.drawn:
        case = Case(part())
        try:
            return Search(1, case, judged(law, case))
        except Endless as error:
            raise _refused(law, case, error) from None
    found, memory = Search(), Memory(part)
    seen: list[tuple[int, Case, Broken]] = []

    def one(case: Case) -> None:
        if not seen:
            found.examples += 1
        found.case = case
        memory.restore()
        broken = judged(law, case)
        if broken is not None:
            seen.append((len(seen), case, broken))
            raise _Broke

    settings = hypothesis.settings(
        max_examples=max(1, round(law.share * examples)),
        database=None,
        deadline=None,
        derandomize=False,
        phases=(Phase.generate, Phase.shrink),
        verbosity=Verbosity.quiet,
        report_multiple_bugs=False,
        suppress_health_check=list(HealthCheck),
    )
    run = hypothesis.seed(seed)(settings(hypothesis.given(cases(law, part))(one)))
    with _own_draws():
        try:
            run()
            found.case = None
        except Endless as error:
            raise _refused(law, found.case or Case(part), error) from None
        except _Broke:
            _, found.case, found.broken = seen[-1]  # the last one is the smallest
        except (Flaky, BaseExceptionGroup):
            if not seen:
                raise
            _, found.case, was = min(seen, key=lambda one: (one[1].spikes, one[0]))
            found.broken = Broken(f"{was.says} ({REMEMBERS})", was.rows, was.one, was.other)
    memory.restore()
    return found


def judged(law: Law, case: Case) -> Broken | None:
    """Return how a case breaks a law; a rule that raises does.

    Raises
    ------
    Endless
        When the case does not come to an end.
    """
    try:
        longest = LONGEST if law.drawn else LONGEST_ONCE
        with limited(longest), np.errstate(over="ignore", invalid="ignore"):
            # a rule that changes itself must not change what is shown
            return law.broken(replace(case, part=copy.copy(case.part)))
    except RuleError as error:
        return Broken(str(error))
    except Exception as error:
        return Broken(f"it raises {type(error).__name__}: {error}")


def _refused(law: Law, case: Case, error: Endless) -> RuleError:
    times = f"input {case.pre}, cell {case.post}, end {case.end:g} ms"
    return RuleError(
        f"{type(case.part).__name__}: a hook does not come to an end: {error} "
        f"(law {type(law).__name__}, {case.part!r}, {times})"
    )


@contextmanager
def _own_draws() -> Iterator[None]:
    """Let examples depend on the seed alone.

    Hypothesis mixes in constants that it finds in whatever modules happen to be loaded, and keeps
    them in the user's folder; both would be wrong here.
    """
    owner, name = providers.HypothesisProvider, "_maybe_draw_constant"
    if not hasattr(owner, name):
        yield
        return
    before = getattr(owner, name)
    setattr(owner, name, lambda *_, **__: None)
    try:
        yield
    finally:
        setattr(owner, name, before)
