"""The lines that grow fastest, as text: how often each ran, or how long it took, at two sizes."""

from __future__ import annotations

import math
from collections.abc import Sequence
from typing import Any

from pytest_growthbudget.reporting import units

#: Beyond this exponent a growth is told as a power of its base instead.
STEEP = 5.0


#: What a line that takes longer each time may call; the trace sees none of it.
INSIDE = "inside what it calls: `in`, a slice, pop(0), sorted(), a library"


def describe(lines: Sequence[dict[str, Any]], variable: str, width: int) -> list[str]:
    """Rows for `lines` (wire form), at most `width` wide but for a long file name: place, growth and source of each."""
    small, large = lines[0]["sizes"]
    rows = [f"what grows fastest from {variable} = {units.count(small)} to {units.count(large)}:"]
    for line in lines:
        place, growth = f"{line['file']}:{line['line']}", _growth(line, variable)
        one_row = f"{place} {growth}"
        rows += [one_row] if len(one_row) <= width else [place, f"    {growth}"]
        rows += [f"    {line['source']}"] if line["source"] else []
    if any(line["kind"] == "takes" for line in lines):
        rows.append(INSIDE)
    return rows


def _growth(line: dict[str, Any], variable: str) -> str:
    small, large = line["sizes"]
    ratio = math.log(line["after"] / line["before"])
    exponent = ratio / math.log(large / small)
    shown = f"{variable}^{exponent:.1f}"
    if exponent > STEEP:
        shown = f"{math.exp(ratio / (large - small)):.2g}^{variable}"
    if line["kind"] == "runs":
        return f"runs {shown} times: {units.count(round(line['before']))} -> {units.count(round(line['after']))}"
    return f"takes {shown} longer each time: {units.cost(line['before'], 'ns')} -> {units.cost(line['after'], 'ns')}"
