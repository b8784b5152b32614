"""A limit of time for code that is not ours."""

from __future__ import annotations

import signal
import threading
from collections.abc import Iterator
from contextlib import contextmanager
from typing import Any


class Endless(BaseException):
    """Code that did not come to an end within its limit of time."""


@contextmanager
def limited(seconds: float) -> Iterator[None]:
    """Raise `Endless` when the block takes longer.

    Where there is no alarm to set (Windows, a thread that is not the main one) there is no limit.
    """
    if (
        not hasattr(signal, "setitimer")
        or threading.current_thread() is not threading.main_thread()
    ):
        yield
        return

    def ring(*_: Any) -> None:
        raise Endless(f"no end within {seconds:g} s")

    before = signal.signal(signal.SIGALRM, ring)
    signal.setitimer(signal.ITIMER_REAL, seconds)
    try:
        yield
    finally:
        signal.setitimer(signal.ITIMER_REAL, 0)
        signal.signal(signal.SIGALRM, before)
