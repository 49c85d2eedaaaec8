"""One reading after another: what the campaign calls, between the repeated test and its meter."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, field

from pytest_growthbudget.measuring.readings import Reading
from pytest_growthbudget.measuring.yardstick import YardstickGrowth
from pytest_growthbudget.meters import witness
from pytest_growthbudget.meters.protocol import Meter, checked_cost, notes_of
from pytest_growthbudget.workloads.repeat import Repeater

#: What a clock that did not move counts as, in nanoseconds, so that its logarithm exists.
NOTHING = 0.5


@dataclass(slots=True)
class Taker:
    """Takes readings of one test with one meter. Warnings that the body gave are forgotten after each.

    With a yardstick each reading of the body is followed by one of the reference on the same workload, and scaled
    by how that one stood to the reference's usual cost: what slows both down at the time cancels out.
    """

    repeater: Repeater
    meter: Meter
    forget: Callable[[], None]
    reference: Callable[..., object] | None = None
    growth: YardstickGrowth = field(default_factory=YardstickGrowth)
    _ratios: list[float] = field(default_factory=list)

    def __call__(self, size: int, calls: int) -> Reading:
        taken = self.repeater.take(size, self.meter, calls)
        cost = checked_cost(self.meter, taken.cost)
        if not self.meter.deterministic:
            cost = max(cost, NOTHING)
        if self.meter.name == "cpu_time":
            self._ratios.append(taken.wall / cost)
        elif self.meter.name == "wall_time":
            self._ratios.append(taken.wall / max(taken.cpu, NOTHING))
        if self.reference is not None:
            beside = max(checked_cost(self.meter, self.repeater.yardstick(size, self.meter, self.reference)), NOTHING)
            cost *= self.growth.add(size, beside) / beside
        self.forget()
        return Reading(size=size, cost=cost, calls=calls, wall=taken.wall, elapsed=taken.elapsed)

    def notes(self) -> tuple[str, ...]:
        """What distorted the readings."""
        name = self.meter.name
        return (*notes_of(self.meter), *witness.distortions(name), *witness.busy(self._ratios, name))
