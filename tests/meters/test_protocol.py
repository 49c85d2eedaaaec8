"""The protocol of a meter, held against a real one of a user's own, and the costs that no reading can have."""

from __future__ import annotations

import math
import os
import sys
import tempfile
from decimal import Decimal
from fractions import Fraction

import numpy as np
import pytest

from pytest_growthbudget.meters.protocol import Meter, MeterError, checked_cost, close_meter, notes_of
from pytest_growthbudget.meters.registry import meter_for


class DiskBytes:
    """Bytes that the body leaves in one folder: a meter such as a user would write, with all that is optional."""

    name = "disk_bytes"
    unit = "bytes"
    deterministic = True

    def __init__(self) -> None:
        self._folder = tempfile.TemporaryDirectory()
        self.folder = self._folder.name
        self._missing: list[str] = []

    def _size(self) -> int:
        self._missing = [entry.name for entry in os.scandir(self.folder) if not entry.is_file()]
        return sum(entry.stat().st_size for entry in os.scandir(self.folder) if entry.is_file())

    def start(self) -> None:
        self._before = self._size()

    def stop(self) -> float:
        return float(self._size() - self._before)

    def notes(self):
        return tuple(f"{name} is no file and was passed over." for name in self._missing)

    def close(self) -> None:
        self._folder.cleanup()


class HeldBlocks:
    """Blocks of memory still held after the body: the example of the protocol's own text, word for word."""

    name = "held_blocks"
    unit = "blocks"
    deterministic = True

    def start(self) -> None:
        self._before = sys.getallocatedblocks()

    def stop(self) -> float:
        return float(max(0, sys.getallocatedblocks() - self._before))


def read(meter: Meter, body) -> float:
    meter.start()
    body()
    return checked_cost(meter, meter.stop())


def test_a_users_own_meter_is_found_and_reads():
    own = DiskBytes()
    meter = meter_for("disk_bytes", [own])
    assert meter is own
    assert isinstance(meter, Meter)

    def log(lines):
        with open(os.path.join(own.folder, "arrivals.log"), "ab") as file:
            file.write(b"ship in\n" * lines)

    assert [read(meter, lambda n=n: log(n)) for n in (0, 1, 10, 1000)] == [0, 8, 80, 8000]
    assert notes_of(meter) == ()
    os.mkdir(os.path.join(own.folder, "archive"))
    assert read(meter, lambda: log(1)) == 8
    assert notes_of(meter) == ("archive is no file and was passed over.",)
    close_meter(meter)
    assert not os.path.exists(own.folder)


def test_a_meter_without_notes_and_close_is_whole():
    meter = meter_for("held_blocks", [HeldBlocks()])
    kept: list = []
    few, many = (read(meter, lambda n=n: kept.extend([bytes(600) for _ in range(n)])) for n in (1000, 3000))
    assert 1990 <= many - few <= 2010
    assert notes_of(meter) == ()
    close_meter(meter)


@pytest.mark.parametrize("cost", [0, 3, 2.5, True, Decimal("1.5"), Fraction(1, 2), np.float64(7), np.int32(7)])
def test_a_cost_becomes_a_float(cost):
    checked = checked_cost(HeldBlocks(), cost)
    assert type(checked) is float
    assert checked == float(cost)


@pytest.mark.parametrize(
    ("cost", "message"),
    [
        (
            None,
            (
                "the meter 'held_blocks' returned None, which is not a number. "
                "Its stop() must return the cost since start() as a float."
            ),
        ),
        (
            "many",
            (
                "the meter 'held_blocks' returned 'many', which is not a number. "
                "Its stop() must return the cost since start() as a float."
            ),
        ),
        (
            10**400,
            (
                f"the meter 'held_blocks' returned {10**400}, which is not a number. "
                "Its stop() must return the cost since start() as a float."
            ),
        ),
        (
            math.nan,
            (
                "the meter 'held_blocks' returned nan, which is no cost. "
                "Its stop() must return a finite number; raise MeterError where there is none."
            ),
        ),
        (
            math.inf,
            (
                "the meter 'held_blocks' returned inf, which is no cost. "
                "Its stop() must return a finite number; raise MeterError where there is none."
            ),
        ),
        (
            -3,
            (
                "the meter 'held_blocks' went backwards: it read -3 blocks since its start. "
                "Its stop() must return the cost since start(), zero or more; "
                "look for a counter that the body resets or that wraps around."
            ),
        ),
    ],
    ids=["None", "text", "overflow", "NaN", "infinite", "negative"],
)
def test_a_cost_that_no_reading_has_is_refused(cost, message):
    with pytest.raises(MeterError) as caught:
        checked_cost(HeldBlocks(), cost)
    assert caught.value.args[0] == message
