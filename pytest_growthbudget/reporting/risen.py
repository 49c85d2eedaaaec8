"""What is said of a budget that the ratchet compared with its accepted record."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any


def fails(judgement: Mapping[str, Any]) -> bool:
    """Whether the ratchet fails the test for this judgement."""
    drift = judgement.get("drift")
    return bool(drift and drift["risen"])


def first_line(judgement: Mapping[str, Any]) -> str:
    """The line that stands alone, for a judgement that fails by the ratchet."""
    drift, meter = judgement["drift"], judgement["meter"]
    now, before = drift["now"]["estimate"], drift["accepted"]["estimate"]
    if drift["of"] == "excess":
        return f"growth has drifted: {meter} has an excess of {now:.2f} where {before:.2f} was accepted"
    name = judgement["variable"]
    return f"growth has drifted: {meter} grows as {name}^{now:.2f} where {name}^{before:.2f} was accepted"


def fact(judgement: Mapping[str, Any]) -> str:
    """What the report says beside the verdict; "" where nothing was accepted."""
    drift = judgement.get("drift")
    if not drift:
        return ""
    if drift["risen"] is None:
        return f"not compared with the record accepted on {drift['since'][:10]}: {drift['why']}"
    over = ""
    if drift["over"]:
        low, high = drift["over"]
        over = f" over {judgement['variable']} = {low:,.0f} to {high:,.0f}"
    said = f"{drift['of']} {_interval(drift['now'])}{over}; accepted on {drift['since'][:10]}: "
    said += _interval(drift["accepted"])
    if drift["why"]:
        said += f"; {drift['why']}"
    if drift["risen"]:
        said += ". If this is meant: python -m pytest_growthbudget accept RECORDS"
    return said


def _interval(value: Mapping[str, float]) -> str:
    return f"{value['estimate']:.2f} ({value['low']:.2f} to {value['high']:.2f})"
