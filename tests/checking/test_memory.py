"""What a rule remembers is put back before every case."""

from __future__ import annotations

import threading
from typing import Any

from plastic.checking.memory import Memory

SLATE: dict[str, Any] = {"n": [1]}
ORDER = [3, 2, 1]
COUNT = 0
LOCKED = {"lock": threading.Lock()}


def deeper() -> int:
    ORDER.append(0)
    return len(ORDER)


class Remembering:
    """Remembers in every way there is."""

    seen: set[int] = set()

    def at_pre(self, kept: list[int] = []) -> None:  # noqa: B006 - the fault it is about
        global COUNT, LATE
        COUNT += 1
        LATE = COUNT
        SLATE["n"].append(COUNT)
        kept.append(deeper())
        self.seen.add(COUNT)
        LOCKED["lock"].locked()


def test_module_names_containers_defaults_and_class_attributes_are_put_back() -> None:
    memory, kept = Memory(Remembering), Remembering.at_pre.__defaults__
    slate = SLATE
    for _ in range(2):
        Remembering().at_pre()
    assert (COUNT, SLATE["n"], ORDER[-1], Remembering.seen) == (2, [1, 1, 2], 0, {1, 2})
    memory.restore()
    assert (COUNT, SLATE, ORDER, Remembering.seen) == (0, {"n": [1]}, [3, 2, 1], set())
    assert kept == ([],)
    assert SLATE is slate  # the same object: others may hold it
    assert "LATE" not in globals()


def test_putting_back_twice_gives_the_same() -> None:
    memory = Memory(Remembering)
    for _ in range(2):
        Remembering().at_pre()
        memory.restore()
        assert SLATE == {"n": [1]}
