"""What a check found: one verdict per law, and the report of one part."""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from typing import Any, Literal

from plastic.laws._interface import Broken, Case

#: holds; fails; exempt with a reason; exempt though it holds; nothing to say about the part
Status = Literal["holds", "fails", "exempt", "needless", "idle"]


@dataclass(frozen=True)
class Verdict:
    """What one law says of one part.

    Attributes
    ----------
    law, words : str
        Its name, and the law itself.
    status : str
    examples : int
        Examples tried; up to the first that failed when the law fails.
    reason : str
        Why the part is exempt, or why the law has nothing to say.
    case, broken : the smallest failing case and its numbers
    """

    law: str
    words: str
    status: Status
    examples: int = 0
    reason: str = ""
    case: Case | None = None
    broken: Broken | None = None

    @property
    def ok(self) -> bool:
        """Whether there is nothing to mend."""
        return self.status not in ("fails", "needless")


@dataclass(frozen=True)
class Report:
    """The verdicts of all laws on one part.

    Attributes
    ----------
    name : str
        The public name, or file and class.
    about : str
        "rule", "route" or "cell".
    verdicts : sequence of Verdict
    examples, seed : int
        As asked for.
    source : str
        Hash of the text of the part's class.
    versions : mapping of library to version
    """

    name: str
    about: str
    verdicts: Sequence[Verdict]
    examples: int
    seed: int
    source: str
    versions: Mapping[str, str]

    @property
    def ok(self) -> bool:
        """Whether every law holds or is exempt with need."""
        return all(verdict.ok for verdict in self.verdicts)

    @property
    def failures(self) -> list[Verdict]:
        """The verdicts with something to mend."""
        return [verdict for verdict in self.verdicts if not verdict.ok]

    def __getitem__(self, law: str) -> Verdict:
        return next(verdict for verdict in self.verdicts if verdict.law == law)

    def data(self) -> dict[str, Any]:
        """Return everything as plain values, fit for JSON."""
        return {
            "name": self.name,
            "about": self.about,
            "ok": self.ok,
            "examples": self.examples,
            "seed": self.seed,
            "source": self.source,
            "versions": dict(self.versions),
            "laws": [_verdict_data(verdict) for verdict in self.verdicts],
        }


def _verdict_data(verdict: Verdict) -> dict[str, Any]:
    data: dict[str, Any] = {
        "law": verdict.law,
        "words": verdict.words,
        "status": verdict.status,
        "examples": verdict.examples,
        "reason": verdict.reason,
    }
    if verdict.case is not None and verdict.broken is not None:
        case, broken = verdict.broken.case or verdict.case, verdict.broken
        data["case"] = {
            "part": repr(case.part),
            "pre": [list(train) for train in case.pre],
            "post": list(case.post),
            "end": case.end,
            "numbers": dict(case.numbers),
        }
        data["says"] = broken.says
        data["disagree"] = [
            {"what": r.what, broken.one: _plain(r.one), broken.other: _plain(r.other)}
            for r in broken.rows
        ]
    return data


def _plain(value: float) -> float | str:
    return value if math.isfinite(value) else str(value)
