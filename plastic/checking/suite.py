"""Laws in your own pytest suite: one test per law.

    from plastic.checking.suite import law_tests
    from my_rules import MyRule

    test_my_rule = law_tests(MyRule)

gives ``test_my_rule[silence]``, ``test_my_rule[time_units]`` and so on. A law that has nothing to
say about the rule, or from which it is exempt, is skipped with the reason.
"""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

import pytest

from plastic.checking.check import EXAMPLES, about_of, check_law, laws_about
from plastic.checking.loading import load
from plastic.checking.shown import verdict_lines


def law_tests(part: Any, *, examples: int = EXAMPLES, seed: int = 0) -> Callable[[str], None]:
    """Return a test function, to be given a name that starts with ``test_``, of all laws.

    Parameters
    ----------
    part : class or str
        A rule or a route, its name in a catalogue, or ``path/to/file.py:ClassName``.
    examples, seed : int
    """
    cls = load(part) if isinstance(part, str) else part

    @pytest.mark.parametrize("law", laws_about(about_of(cls)))
    def test_law(law: str) -> None:
        verdict = check_law(cls, law, examples=examples, seed=seed)
        if not verdict.ok:
            pytest.fail("\n".join(verdict_lines(verdict)), pytrace=False)
        if verdict.status in ("idle", "exempt"):
            pytest.skip(f"{verdict.status}: {verdict.reason}")

    return test_law
