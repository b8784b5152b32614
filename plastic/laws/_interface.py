"""How to write a law: the implementer's manual.

1.  A law is one class in one file; the file's name is the public name, the class its CamelCase.
    The first line of the docstring is the law, in words a physiologist reads.
2.  ``about`` says what it is a law of: a "rule", a "route" or a "cell".
3.  ``needs`` says what one example is made of: how many inputs, how many instants with spikes, how
    long a gap may be, how parameters are drawn, and further whole numbers. Whoever draws examples
    reads it; a law draws nothing itself.
4.  ``broken(case)`` returns None when the case keeps the law, and otherwise the numbers that
    disagree. It must not depend on anything but the case. A hook that raises breaks every law.
5.  ``idle(part)`` says why the law has nothing to say about a part; empty when it has.
6.  A law with ``drawn = False`` looks at the part once instead of at many drawn examples. One with
    ``promised = True`` is kept only by rules that name it in ``promises``.

A part is exempt from a law when its class says so with a reason, in ``exempt``; an exempt law that
holds is reported as needless.
"""

from __future__ import annotations

import inspect
from collections.abc import Mapping
from dataclasses import dataclass, field
from typing import Any, ClassVar, Literal

#: how parameters are drawn: the default and published sets; those and values around them; or the
#: ends of their declared ranges
Parameters = Literal["published", "working", "ends"]
Times = tuple[float, ...]


@dataclass(frozen=True)
class Needs:
    """What one example of a law is made of.

    Attributes
    ----------
    inputs : int
    events : int
        At most so many instants with spikes; 0 for none.
    gap : float, ms
        The longest gap between two instants, and the longest wait after the last.
    parameters : str
    numbers : mapping of name to (low, high)
        Further whole numbers, inclusive.
    """

    inputs: int = 1
    events: int = 10
    gap: float = 2000.0
    parameters: Parameters = "working"
    numbers: Mapping[str, tuple[int, int]] = field(default_factory=dict)


@dataclass(frozen=True)
class Case:
    """One example: a part, spike times (ms) of its inputs and of the cell, and further numbers."""

    part: Any
    pre: tuple[Times, ...] = ()
    post: Times = ()
    end: float = 0.0
    numbers: Mapping[str, int] = field(default_factory=dict)

    @property
    def instants(self) -> list[float]:
        """All times with a spike, rising, ms."""
        return sorted({*self.post, *(t for train in self.pre for t in train)})

    @property
    def spikes(self) -> int:
        """The number of spikes."""
        return len(self.post) + sum(len(train) for train in self.pre)


@dataclass(frozen=True)
class Row:
    """Two numbers that should agree."""

    what: str
    one: float
    other: float


@dataclass(frozen=True)
class Broken:
    """How a case breaks a law.

    Attributes
    ----------
    says : str
        What went wrong, one sentence.
    rows : tuple of Row
        The numbers that disagree.
    one, other : str
        What the two numbers of a row are.
    case : Case, optional
        The case to show, when the law made it itself.
    """

    says: str
    rows: tuple[Row, ...] = ()
    one: str = "expected"
    other: str = "found"
    case: Case | None = None


class Law:
    """Base of every law; see the manual at the top of this module."""

    about: ClassVar[Literal["rule", "route", "cell"]] = "rule"
    needs: ClassVar[Needs] = Needs()
    drawn: ClassVar[bool] = True
    promised: ClassVar[bool] = False
    #: share of the usual number of examples, for a law whose examples take long
    share: ClassVar[float] = 1.0

    def idle(self, part: Any) -> str:
        """Return why the law has nothing to say about a part; empty when it has."""
        return ""

    def broken(self, case: Case) -> Broken | None:
        """Return how a case breaks the law, or None."""
        raise TypeError("a law defines broken")

    @classmethod
    def summary(cls) -> str:
        """Return the law: the first line of its docstring."""
        return (inspect.getdoc(cls) or "").split("\n")[0]
