"""A call that does not come back is interrupted, where the platform can."""

from __future__ import annotations

import contextlib
import signal
import threading
import time

import pytest

from pytest_growthbudget.measuring.guards import REPEAT, Overrun, Watch

needs_timer = pytest.mark.skipif(not hasattr(signal, "setitimer"), reason="this platform has no interval timer")


def forever() -> None:
    for _ in range(5_000):
        time.sleep(0.001)
    pytest.fail("nothing interrupted it")


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
def test_a_call_is_interrupted_once() -> None:
    """What cleans up after it is left in peace, though the timer goes on."""
    watch = Watch(0.01)
    with watch.start():
        watch.guard()
        with pytest.raises(Overrun):
            forever()
        time.sleep(3 * REPEAT)
        watch.release()


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
def test_one_call_may_be_allowed_less_than_the_whole() -> None:
    """What a call leaves of its share goes back to the whole."""
    watch = Watch(6000)
    with watch.start():
        watch.allow(3000e9)
        for _ in range(3):
            watch.guard()
            assert 2000 < signal.getitimer(signal.ITIMER_REAL)[0] <= 3000
            watch.release()
            watch.release()
            assert 5000 < signal.getitimer(signal.ITIMER_REAL)[0] <= 6000
        watch.allow(9000e9)
        watch.guard()
        assert 5000 < signal.getitimer(signal.ITIMER_REAL)[0] <= 6000
        watch.release()
        assert 5000 < signal.getitimer(signal.ITIMER_REAL)[0] <= 6000


@needs_timer
def test_a_call_is_interrupted_after_its_own_share() -> None:
    watch = Watch(6000)
    with watch.start():
        watch.allow(1e7)
        watch.guard()
        with pytest.raises(Overrun):
            forever()
        watch.release()
        assert 5000 < signal.getitimer(signal.ITIMER_REAL)[0] < 6001


@needs_timer
def test_a_share_of_nothing_still_interrupts() -> None:
    """A timer set to zero would never go off."""
    watch = Watch(6000)
    with watch.start():
        watch.allow(0)
        watch.guard()
        with pytest.raises(Overrun):
            forever()


@needs_timer
def test_the_extension_is_added_to_what_is_left() -> None:
    watch = Watch(2000)
    with watch.start():
        watch.extend(3000)
        left, repeat = signal.getitimer(signal.ITIMER_REAL)
        assert 4000 < left <= 5000
        assert repeat == pytest.approx(REPEAT, rel=0.1)


@needs_timer
def test_an_alarm_that_came_outside_the_guard_comes_again() -> None:
    watch = Watch(0.001)
    with watch.start():
        time.sleep(0.01)
        watch.guard()
        with pytest.raises(Overrun):
            forever()


@needs_timer
def test_a_watch_that_stands_back_interrupts_nothing_any_more() -> None:
    watch = Watch(0.05)
    with watch.start():
        watch.guard()
        watch.stand_back()
        assert not watch.usable
        assert signal.getitimer(signal.ITIMER_REAL) == (0.0, 0.0)
        watch.guard()
        watch.extend(0.01)
        time.sleep(0.1)


@needs_timer
def test_a_handler_of_someone_else_is_left_alone() -> None:
    def theirs(number: int, frame: object) -> None:
        pass

    signal.signal(signal.SIGALRM, theirs)
    try:
        watch = Watch(0.01)
        with watch.start():
            watch.allow(1e6)
            watch.guard()
            watch.release()
        assert not watch.usable
        assert signal.getsignal(signal.SIGALRM) is theirs
    finally:
        signal.signal(signal.SIGALRM, signal.SIG_DFL)


@needs_timer
def test_a_timer_of_someone_else_is_left_alone() -> None:
    signal.setitimer(signal.ITIMER_REAL, 60)
    try:
        watch = Watch(0.01)
        assert not watch.usable
        with watch.start():
            watch.allow(1e9)
            watch.guard()
            assert signal.getitimer(signal.ITIMER_REAL)[0] > 50
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
