"""Which sizes to try: a seeded ladder that avoids powers of two, where allocators and algorithms have steps."""

from __future__ import annotations

import itertools
import math
from collections.abc import Sequence

#: The ratio between neighbouring sizes: half an octave.
STEP = math.sqrt(2)
#: At most this factor in cost is risked by one step of the climb.
RISK = 8.0


def first_size(smallest: int | None, unit: float, *, exponential: bool) -> float:
    """Where the climb starts. `unit` is a seeded number in [0, 1)."""
    if smallest is not None:
        return float(smallest)
    return 1.0 + int(2 * unit) if exponential else 4 * 2 ** (0.1 + 0.4 * unit)


def next_size(
    ideal: float, sizes: Sequence[int], costs: Sequence[float], *, exponential: bool, step: float = STEP
) -> float:
    """The size to try after `sizes`, which cost `costs`, where the ladder stands at `ideal`.

    A step of `step`, but no further than the size at which log cost, extrapolated linearly in n, has grown by the
    factor `RISK`: a body that is secretly exponential must not hang the climb.
    """
    top = sizes[-1]
    if exponential:
        return float(top + 1)
    proposed = max(ideal * step, top + 1.0)
    if len(sizes) >= 2 and costs[-1] > costs[-2] > 0:
        slope = math.log(costs[-1] / costs[-2]) / (sizes[-1] - sizes[-2])
        proposed = min(proposed, max(top + math.log(RISK) / slope, top + 1.0))
    return proposed


def between(sizes: Sequence[int], wanted: int) -> list[int]:
    """Up to `wanted` whole numbers to fill in between neighbouring `sizes`, the widest gaps (by ratio) first."""
    have = sorted(sizes)
    added: list[int] = []
    while len(added) < wanted:
        gaps = [(b / a, a, b) for a, b in itertools.pairwise(have) if b - a > 1]
        if not gaps:
            break
        _, low, high = max(gaps)
        middle = min(max(round(math.sqrt(low * high)), low + 1), high - 1)
        added.append(middle)
        have = sorted([*have, middle])
    return sorted(added)
