"""Which of two cranes makes which lift."""

from __future__ import annotations

from collections.abc import Sequence


def shortest_shift(lifts: Sequence[int]) -> int:
    """Minutes until both cranes are done, shared out in the best way.

    Every way is tried, T(n) = 2 T(n-1) + 1: good enough for the score of lifts in a shift.
    """

    def shared(left: int, first: int, second: int) -> int:
        if left == 0:
            return max(first, second)
        minutes = lifts[left - 1]
        return min(shared(left - 1, first + minutes, second), shared(left - 1, first, second + minutes))

    return shared(len(lifts), 0, 0)
