"""The limit of time for code that is not ours."""

from __future__ import annotations

import signal
import threading

import pytest

from plastic.checking.limits import Endless, limited


def spin() -> None:
    while True:
        pass


def test_what_takes_too_long_is_stopped() -> None:
    with pytest.raises(Endless, match=r"no end within 0\.05 s"), limited(0.05):
        spin()


def spin_and_catch() -> None:
    try:
        spin()
    except Exception:
        pytest.fail("it was caught on the way")


def test_nothing_that_catches_errors_catches_it() -> None:
    with pytest.raises(Endless), limited(0.05):
        spin_and_catch()


def test_the_alarm_is_put_back() -> None:
    before = signal.getsignal(signal.SIGALRM)
    with limited(10.0):
        assert signal.getsignal(signal.SIGALRM) is not before
    assert signal.getsignal(signal.SIGALRM) is before
    assert signal.getitimer(signal.ITIMER_REAL) == (0.0, 0.0)


def test_in_another_thread_there_is_no_limit_and_no_error() -> None:
    found: list[str] = []

    def work() -> None:
        with limited(1.0):
            found.append("done")

    thread = threading.Thread(target=work)
    thread.start()
    thread.join()
    assert found == ["done"]
