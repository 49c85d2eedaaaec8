"""A yardstick: a reference function whose own measured growth is the budget."""

from __future__ import annotations

import bisect
import math
import statistics
from collections.abc import Mapping
from dataclasses import dataclass, field


@dataclass(slots=True)
class YardstickGrowth:
    """log g(n) as the readings of the reference function tell it, more exactly with every reading.

    Between the sizes read it is interpolated in log-log; beyond them it goes on as over the last octave.
    """

    _costs: dict[int, list[float]] = field(default_factory=dict)

    def add(self, size: int, cost: float) -> float:
        """Note a reading of the reference at `size`; return the typical cost there so far (the median)."""
        self._costs.setdefault(size, []).append(max(cost, 1e-9))
        return self.cost(size)

    def cost(self, size: int) -> float:
        """The typical cost of the reference at a size that was read. Raises KeyError at any other."""
        return statistics.median(self._costs[size])

    def log_value(self, sizes: Mapping[str, float]) -> float:
        """The natural logarithm of the reference's cost. `sizes` has one entry."""
        (n,) = sizes.values()
        known = sorted(self._costs)
        if not known:
            return 0.0
        logs = [math.log(self.cost(size)) for size in known]
        x = math.log(n)
        if len(known) == 1:
            return logs[0]
        if n >= known[-1]:
            far = max(i for i in range(len(known) - 1) if i == 0 or 2 * known[i] <= known[-1])
            slope = (logs[-1] - logs[far]) / math.log(known[-1] / known[far])
            return logs[-1] + slope * (x - math.log(known[-1]))
        right = max(bisect.bisect_right(known, n), 1)
        left = right - 1
        share = (x - math.log(known[left])) / math.log(known[right] / known[left])
        return logs[left] + share * (logs[right] - logs[left])
