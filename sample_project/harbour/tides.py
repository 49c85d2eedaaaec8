"""The tide table."""

from __future__ import annotations

from bisect import bisect_right
from collections.abc import Sequence
from math import cos, pi


class TideTable:
    """High and low waters in order of time; between two of them the water follows half a cosine."""

    def __init__(self, minutes: Sequence[float], heights: Sequence[float]) -> None:
        if len(minutes) != len(heights) or len(minutes) < 2:
            raise ValueError("a tide table needs two or more minutes and as many heights")
        self._minutes = minutes
        self._heights = heights

    def height_at(self, minute: float) -> float:
        """Height in metres at `minute`, found by halving. Raises `ValueError` outside the table."""
        if not self._minutes[0] <= minute <= self._minutes[-1]:
            raise ValueError(f"minute {minute} is outside the table")
        after = min(bisect_right(self._minutes, minute), len(self._minutes) - 1)
        begin, end = self._minutes[after - 1], self._minutes[after]
        low, high = self._heights[after - 1], self._heights[after]
        return low + (high - low) * (1 - cos(pi * (minute - begin) / (end - begin))) / 2
