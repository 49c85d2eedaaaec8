"""What distorts readings is stated, one whole sentence each."""

from __future__ import annotations

import sys
from types import FrameType
from typing import Any

import pytest

from pytest_growthbudget.meters import clocks, witness


def tracer(frame: FrameType, event: str, argument: Any) -> Any:
    return None


def test_a_tracer_is_named() -> None:
    before = sys.gettrace()
    sys.settrace(tracer)
    try:
        notes = witness.distortions("cpu_time")
        counted = witness.distortions("steps")
    finally:
        sys.settrace(before)
    assert any(note.startswith("tests") or "traces this process" in note for note in notes)
    assert counted == ()


def test_a_coarse_clock_is_named(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(clocks, "cpu_clock", lambda: clocks.wall_time_ns)
    monkeypatch.setattr(clocks, "tick_ns", lambda: 15_625_000)
    assert "the CPU clock of this platform steps by 16 ms: elapsed time was read instead." in witness.distortions(
        "cpu_time"
    )
    assert not any("CPU clock" in note for note in witness.distortions("wall_time"))


def test_a_busy_machine_is_named() -> None:
    assert witness.busy([1.0, 1.1, 1.0, 1.2, 9.0], "cpu_time") == ()
    assert witness.busy([3.0] * 4, "cpu_time") == (), "too few readings to say"
    assert witness.busy([0.5] * 9, "cpu_time") == (
        (
            "CPU time ran ahead of elapsed time: several threads worked at once, and how many may depend on the size; "
            "for numpy set OMP_NUM_THREADS=1 before it is imported."
        ),
    )
    assert witness.busy([3.0] * 9, "cpu_time") == (
        "elapsed time was 3.0 times CPU time: the machine was busy, or the body waits, which is not read.",
    )
    assert witness.busy([3.0] * 9, "wall_time") == (
        (
            "elapsed time was 3.0 times the CPU time of this process: either the body waits, as wall_time is meant "
            "for, or the machine was busy, and then these readings are too long."
        ),
    )
