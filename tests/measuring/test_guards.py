"""A call that does not come back is interrupted, where the platform can."""

from __future__ import annotations

import contextlib
import signal
import threading
import time

import pytest

from pytest_growthbudget.measuring.guards import Overrun, Watch

needs_timer = pytest.mark.skipif(not hasattr(signal, "setitimer"), reason="this platform has no interval timer")


def forever() -> None:
    while True:
        time.sleep(0.001)


@needs_timer
def test_a_guarded_call_is_interrupted() -> None:
    watch = Watch(0.05)
    with watch.start():
        watch.guard()
        with pytest.raises(Overrun):
            forever()
    assert signal.getsignal(signal.SIGALRM) is signal.SIG_DFL
    assert signal.getitimer(signal.ITIMER_REAL) == (0.0, 0.0)


@needs_timer
def test_a_body_that_catches_every_exception_is_interrupted_too() -> None:
    def stubborn() -> None:
        while True:
            with contextlib.suppress(Exception):
                forever()

    watch = Watch(0.05)
    with watch.start():
        watch.guard()
        with pytest.raises(Overrun):
            stubborn()


@needs_timer
def test_nothing_is_interrupted_outside_the_guard() -> None:
    watch = Watch(0.01)
    with watch.start():
        time.sleep(0.05)
        watch.guard()
        watch.release()
        time.sleep(0.1)


@needs_timer
def test_the_allowance_can_be_extended() -> None:
    watch = Watch(0.02)
    with watch.start():
        watch.extend(60)
        watch.guard()
        time.sleep(0.1)


@needs_timer
def test_a_timer_of_someone_else_is_left_alone() -> None:
    signal.setitimer(signal.ITIMER_REAL, 60)
    try:
        watch = Watch(0.01)
        assert not watch.usable
        with watch.start():
            watch.guard()
            time.sleep(0.05)
        assert signal.getitimer(signal.ITIMER_REAL)[0] > 50
    finally:
        signal.setitimer(signal.ITIMER_REAL, 0)


def test_off_the_main_thread_there_is_no_guard() -> None:
    seen: list[bool] = []
    thread = threading.Thread(target=lambda: seen.append(Watch(1).usable))
    thread.start()
    thread.join()
    assert seen == [False]
