"""What a budget's verdict leaves as properties of its test: names and texts, which junit XML and other reports keep."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any


def properties_of(judgements: Sequence[dict[str, Any]]) -> list[tuple[str, object]]:
    """For each judgement (wire form): `growth.METER.verdict`, `.budget`, and where there are any, `.excess` and
    `.excess_interval`.
    """
    found: list[tuple[str, object]] = []
    for judgement in judgements:
        name = f"growth.{judgement['meter'].replace(' ', '_')}"
        found += [(f"{name}.verdict", judgement["verdict"]), (f"{name}.budget", judgement["theta"])]
        excess = judgement["excess"]
        if excess is not None:
            found.append((f"{name}.excess", f"{excess['estimate']:.3f}"))
            found.append((f"{name}.excess_interval", f"{excess['low']:.3f} to {excess['high']:.3f}"))
    return found
