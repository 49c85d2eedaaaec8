"""What a meter is. Anyone may write one; the registry finds it by its name.

A meter reads one kind of cost of one call of a test's body:

    class HeldBlocks:
        name = "held_blocks"
        unit = "blocks"
        deterministic = True

        def start(self) -> None:
            self._before = sys.getallocatedblocks()

        def stop(self) -> float:
            return float(max(0, sys.getallocatedblocks() - self._before))

The contract:

- `start()` is called once the workload is built, straight before the body; `stop()` straight after it, also
  when the body raised. `stop()` returns the cost since `start()`, in `unit`: a finite number, zero or more.
- Readings follow one another on the same meter and are never nested. `start()` after a reading that was
  broken off without `stop()` begins afresh.
- `deterministic` says that the same workload costs the same each time. Such a meter is read once a workload
  and judged with a slack of 0.05; any other is read many times a size, as a clock is.
- `notes()` may be left out. It says what distorted the last reading, one whole sentence each; the report
  prints them.
- `close()` may be left out. It is called once, after the last reading.
- A meter that cannot read raises `MeterError` from `start()` or `stop()`; the test is then reported as
  unmeasured.
"""

from __future__ import annotations

import math
from typing import Protocol, runtime_checkable


class MeterError(Exception):
    """A meter has no honest reading to give. `args[0]` is whole sentences: the reason, then the remedy."""


@runtime_checkable
class Meter(Protocol):
    """What every meter has. `notes()` and `close()` are optional: see `notes_of` and `close_meter`."""

    @property
    def name(self) -> str:
        """What a marker's `meter=` says; no blanks."""

    @property
    def unit(self) -> str:
        """What a cost of 1 is one of, as the report prints it: `ns`, `bytes`, `steps`."""

    @property
    def deterministic(self) -> bool:
        """Whether the same workload costs the same each time."""

    def start(self) -> None:
        """Begin a reading."""

    def stop(self) -> float:
        """End it: the cost since `start()`, in `unit`."""


def notes_of(meter: Meter) -> tuple[str, ...]:
    """What distorted the last reading, in the meter's own words; () where it has none to say."""
    notes = getattr(meter, "notes", None)
    return tuple(str(note) for note in notes()) if callable(notes) else ()


def close_meter(meter: Meter) -> None:
    """Let a meter give back what it holds, where it has a `close()`."""
    close = getattr(meter, "close", None)
    if callable(close):
        close()


def checked_cost(meter: Meter, cost: object) -> float:
    """`cost` as a float, if it is one that a reading can have.

    Raises MeterError where it is no number, not finite, or negative. The sentence names the meter and the
    value.
    """
    try:
        value = float(cost)  # type: ignore[arg-type]
    except (TypeError, ValueError, OverflowError):
        raise MeterError(
            f"the meter {meter.name!r} returned {cost!r}, which is not a number. "
            "Its stop() must return the cost since start() as a float."
        ) from None
    if not math.isfinite(value):
        raise MeterError(
            f"the meter {meter.name!r} returned {value!r}, which is no cost. "
            "Its stop() must return a finite number; raise MeterError where there is none."
        )
    if value < 0:
        raise MeterError(
            f"the meter {meter.name!r} went backwards: it read {value:g} {meter.unit} since its start. "
            "Its stop() must return the cost since start(), zero or more; "
            "look for a counter that the body resets or that wraps around."
        )
    return value
