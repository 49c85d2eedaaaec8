"""Peak memory: growth of known cases, exact sizes, and a tracemalloc that was running before or was tampered with."""

from __future__ import annotations

import gc
import sys
import tracemalloc

import numpy as np
import pytest

from pytest_growthbudget.meters.memory import PeakMemory
from pytest_growthbudget.meters.protocol import MeterError, notes_of


@pytest.fixture(autouse=True)
def no_tracing():
    assert not tracemalloc.is_tracing()
    yield
    tracemalloc.stop()


def peak(body, *, warm: bool = True) -> int:
    """One reading, after a call that fills the interpreter's own caches (Python 3.10 keeps a frame a function)."""
    if warm:
        body()
    meter = PeakMemory()
    meter.start()
    body()
    read = meter.stop()
    assert type(read) is float
    return int(read)


def tonnage(manifest: range) -> int:
    return sum(crate % 7 for crate in manifest)


def distance_table(berths: int) -> list[list[int]]:
    return [[min(abs(a - b), 99) for b in range(berths)] for a in range(berths)]


def test_a_generator_pipeline_promises_one():
    peaks = [peak(lambda n=n: tonnage(range(n))) for n in (1000, 10_000, 100_000)]
    assert max(peaks) - min(peaks) <= 64
    assert max(peaks) < 2000


def test_a_list_promises_n():
    one, ten = (peak(lambda n=n: [None] * n) for n in (10_000, 100_000))
    assert ten - one == 90_000 * 8


def test_a_distance_table_promises_n_squared():
    small, large = (peak(lambda n=n: distance_table(n)) for n in (50, 400))
    assert 8 * 0.85 < (large / small) ** 0.5 < 8 * 1.02


def test_the_peak_is_read_and_not_what_is_left():
    assert peak(lambda: len([None] * 10_000)) >= 80_000


def test_numpy_data_are_included():
    assert 0 <= peak(lambda: np.zeros(125_000)) - 1_000_000 < 1000
    assert 0 <= peak(lambda: np.add(np.zeros(125_000), np.zeros(1))) - 2_000_000 < 2000


def test_the_workload_is_excluded():
    workload = [object() for _ in range(100_000)]
    assert peak(lambda: max(map(id, workload))) < 1000


def test_memory_that_was_freed_before_the_body_is_no_credit_and_no_debt():
    tracemalloc.start()
    workload = [bytes(100) for _ in range(50_000)]
    del workload
    assert 80_000 <= peak(lambda: [None] * 10_000) < 81_000


@pytest.mark.parametrize("collector", [True, False], ids=["on", "off"])
def test_rubbish_of_the_workload_is_not_freed_during_the_body(collector):
    """It would make room below the start, for which the body's own memory then got credit."""
    tracemalloc.start()
    gc.collect()
    gc.disable()
    try:
        rubbish: list = [[None] * 100_000]
        rubbish.append(rubbish)
        del rubbish
        meter = PeakMemory()
        if collector:
            gc.enable()
        meter.start()
        if collector:
            gc.collect()
        kept = [None] * 10_000
        assert 80_000 <= meter.stop() < 81_000
        assert len(kept) == 10_000
    finally:
        gc.enable()


def test_the_same_input_gives_the_same_peak():
    peaks = [peak(lambda: distance_table(60)) for _ in range(5)]
    assert max(peaks) - min(peaks) <= 3e-4 * max(peaks)


def test_tracing_ends_with_the_reading_if_it_began_with_it():
    meter = PeakMemory()
    for _ in range(2):
        meter.start()
        assert tracemalloc.is_tracing()
        assert tracemalloc.get_traceback_limit() == 1
        meter.stop()
        assert not tracemalloc.is_tracing()
        assert notes_of(meter) == ()


def test_a_reading_that_was_broken_off_is_cleared_up_by_close():
    meter = PeakMemory()
    meter.start()
    meter.close()
    assert not tracemalloc.is_tracing()
    meter.close()


def test_a_reading_that_was_broken_off_does_not_hold_the_next():
    meter = PeakMemory()
    meter.start()
    kept = [None] * 100_000
    meter.start()
    assert meter.stop() < 1000
    assert len(kept) == 100_000
    assert not tracemalloc.is_tracing()


def test_tracing_that_was_on_stays_on_as_it_was_and_is_reported():
    tracemalloc.start(5)
    meter = PeakMemory()
    meter.start()
    kept = [None] * 10_000
    assert 0 <= meter.stop() - sys.getsizeof(kept) < 1000
    assert tracemalloc.is_tracing()
    assert tracemalloc.get_traceback_limit() == 5
    assert notes_of(meter) == (
        (
            "tracemalloc was already running, keeping 5 frames a block: "
            "memory of the workload that the body frees is set against what it allocates."
        ),
    )


def test_a_body_that_stops_tracemalloc_is_told():
    with pytest.raises(MeterError) as caught:
        peak(tracemalloc.stop, warm=False)
    assert caught.value.args[0] == (
        "the body stopped tracemalloc while the meter 'peak_memory' was reading, so its peak is lost. "
        "Take tracemalloc out of the body."
    )
    assert peak(lambda: [None] * 1000) >= 8000


def test_a_body_that_clears_the_traces_is_told():
    tracemalloc.start()
    held = [bytes(1000) for _ in range(100)]
    with pytest.raises(MeterError, match="the body cleared the traces of tracemalloc while the meter"):
        peak(tracemalloc.clear_traces, warm=False)
    assert len(held) == 100
