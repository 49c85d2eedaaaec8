"""The memory curve, on a clock that charges by the footprint."""

from __future__ import annotations

import gc
import json
import math
import socket
from collections.abc import Callable
from dataclasses import asdict
from pathlib import Path
from typing import Any

import numpy as np
import pytest

from pytest_growthbudget.measuring import kernels
from pytest_growthbudget.measuring.kernels import (
    KERNELS,
    Kernel,
    curve_of,
    from_dict,
    kernel_costs,
    machine_key,
    measure_curve,
)

KIB = 1024


class Machine:
    """A clock, and kernels whose visits advance it by `each(bytes)` nanoseconds an element."""

    def __init__(self) -> None:
        self.now = 0.0

    def clock(self) -> int:
        return round(self.now)

    def kernel(self, each: Callable[[float], float], bytes_each: int = 64) -> Kernel:
        def aim(held: int, places: list[int]) -> Callable[[], object]:
            def visit() -> None:
                self.now += len(places) * each(held * bytes_each)

            return visit

        return Kernel("fake", bytes_each, lambda count, rng: [None] * count, lambda objects, count: count, aim)


def test_the_curve_is_the_worst_kernel() -> None:
    machine = Machine()
    steady = machine.kernel(lambda held: 10.0)
    steep = machine.kernel(lambda held: 5.0 if held <= 512 * KIB else 40.0)
    dear = machine.kernel(lambda held: 100.0 if held <= 512 * KIB else 170.0)
    curve = measure_curve(machine.clock, largest=4096 * KIB, kernels=[steady, steep, dear])
    inflation = [math.exp(each) for each in curve.log_inflation]
    assert [round(math.exp(each) / KIB) for each in curve.log_bytes] == [128, 256, 512, 1024, 2048, 4096]
    assert inflation == pytest.approx([1, 1, 1, 8, 8, 8], rel=1e-3)
    assert list(curve.extra) == pytest.approx([0, 0, 0, 70, 70, 70], abs=0.1)
    assert curve.cheapest == pytest.approx(5, rel=1e-3)
    share = math.log(1.2) / math.log(8)
    assert curve.resident == pytest.approx(512 * KIB * 2**share, rel=0.01)


def test_the_curve_never_falls() -> None:
    curve = curve_of([1024, 2048, 4096], [[10.0, 20.0, 15.0], [10.0, 9.0, 12.0]])
    assert [math.exp(each) for each in curve.log_inflation] == pytest.approx([1, 2, 2])
    assert curve.extra == (0.0, 10.0, 10.0)
    assert curve.cheapest == 9.0


def test_a_machine_without_edges_is_resident_throughout() -> None:
    assert curve_of([1024, 2048], [[10.0, 11.0]]).resident == pytest.approx(2048)


def test_a_reading_is_the_median_of_five() -> None:
    machine = Machine()
    disturbed = iter([1.0, 1.0, 50.0, 1.0, 80.0] * 4)

    def aim(held: int, places: list[int]) -> Callable[[], object]:
        factor = next(disturbed)

        def visit() -> None:
            machine.now += len(places) * 10.0 * factor

        return visit

    noisy = Kernel("noisy", 64, lambda count, rng: [None] * count, lambda objects, count: count, aim)
    costs = kernel_costs(noisy, [128 * KIB, 256 * KIB], machine.clock, np.random.default_rng(1))
    assert costs == pytest.approx([10, 10], rel=1e-3)


def test_a_clock_that_stands_still_gives_a_flat_curve() -> None:
    curve = measure_curve(lambda: 7, largest=256 * KIB)
    assert curve.log_inflation == (0.0, 0.0)
    assert curve.extra == (0.0, 0.0)


@pytest.mark.parametrize("kernel", KERNELS, ids=lambda kernel: kernel.name)
def test_a_kernel_visits_every_place_it_is_told(kernel: Kernel) -> None:
    """Its answer is a sum over the places, in whatever order they come."""
    rng = np.random.default_rng(4)
    objects = kernel.build(500, rng)
    held = kernel.hold(objects, 400)
    places = [int(place) for place in rng.permutation(400)[:100]]
    total: Any = kernel.aim(held, places)()
    values = {
        "sum over scattered floats": lambda place: objects[place],
        "a list at random places": lambda place: objects[place],
        "a scattered linked list": lambda place: place,
        "a dictionary at random keys": lambda place: 1,
    }[kernel.name]
    assert total == pytest.approx(sum(values(place) for place in places))


@pytest.mark.parametrize("count", [10, kernels.VISITS, 10 * kernels.VISITS])
def test_places_are_distinct_and_scattered(count: int) -> None:
    places = kernels._places(count, np.random.default_rng(2))
    assert len(places) == len(set(places))
    assert len(places) > 0.9 * min(count, kernels.VISITS)
    assert all(0 <= place < count for place in places)
    assert places != sorted(places)


def test_the_real_curve_starts_at_one_and_survives_json() -> None:
    curve = measure_curve(largest=1024 * KIB)
    assert curve.log_inflation[0] == 0.0
    assert curve.cheapest > 0
    assert math.exp(curve.log_bytes[0]) <= curve.resident * 1.0000001
    assert from_dict(json.loads(json.dumps(asdict(curve)))) == curve


@pytest.mark.parametrize(
    "kept",
    [{}, {"log_bytes": 3}, {"log_bytes": [1.0], "log_inflation": [], "extra": [], "resident": 1, "cheapest": 1}],
)
def test_what_is_not_a_curve_is_none(kept: dict[str, Any]) -> None:
    assert from_dict(kept) is None


def test_the_machine_is_named_without_its_host() -> None:
    key = machine_key()
    assert key == machine_key()
    assert socket.gethostname() not in key or len(socket.gethostname()) < 4
    assert "bit" in key
    assert "\n" not in key


@pytest.mark.parametrize("collecting", [True, False])
def test_the_collection_of_garbage_is_left_as_it_was(collecting: bool) -> None:
    machine, seen = Machine(), []
    was = gc.isenabled()

    def each(held: float) -> float:
        seen.append(gc.isenabled())
        return 10.0

    try:
        (gc.enable if collecting else gc.disable)()
        measure_curve(machine.clock, largest=256 * KIB, kernels=[machine.kernel(each)])
        assert gc.isenabled() is collecting
    finally:
        (gc.enable if was else gc.disable)()
    assert set(seen) == {False}


def test_the_resident_size_is_where_the_inflation_passes_a_fifth() -> None:
    """Interpolated between the two footprints about it, in logs."""
    curve = curve_of([64, 256, 1024], [[1.0, 1.1, 1.3]])
    share = (math.log(1.2) - math.log(1.1)) / (math.log(1.3) - math.log(1.1))
    assert curve.resident == pytest.approx(256 * 4**share)
    assert curve_of([64, 256, 1024], [[1.0, 1.1, 1.19]]).resident == pytest.approx(1024)


def test_the_machine_is_known_by_its_processor_and_its_caches(monkeypatch: pytest.MonkeyPatch, tmp_path: Path) -> None:
    """A curve that was kept is not taken over by another machine."""
    (tmp_path / "proc").mkdir()
    (tmp_path / "proc" / "cpuinfo").write_text("processor\t: 0\nmodel name\t: Fast 5: revised\nstepping\t: 6\n")
    for index, (level, size) in enumerate((("1", "32K\n"), ("", ""), ("2", "2048K\n"))):
        place = tmp_path / "sys" / "devices" / "system" / "cpu" / "cpu0" / "cache" / f"index{index}"
        place.mkdir(parents=True)
        if level:
            (place / "level").write_text(level)
            (place / "size").write_text(size)
    monkeypatch.setattr(kernels, "Path", lambda text: tmp_path / text.lstrip("/"))
    assert ", Fast 5: revised, L1 32K, L2 2048K, " in machine_key()
