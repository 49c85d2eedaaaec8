"""Drift: whether a judged body now grows faster than the record of it that was accepted.

Two exponents are compared only over the sizes that both runs read: the local exponent of most bodies changes with
the size, and a faster machine reaches further. On another processor only sizes that fit the caches are compared,
since a smaller cache bends the curve of sound code. A rise counts where the intervals are disjoint and the rise is
above a margin. `tests/studies/drift_rates.py` prints how often that accuses an unchanged body, over recorded
sessions, and how small a rise it sees.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from typing import Any, Final

from pytest_growthbudget.fitting.drift import exponent_over
from pytest_growthbudget.fitting.excess import FEWEST_SIZES
from pytest_growthbudget.reporting.records import Record, is_counted, is_flat

#: The smallest rise of an exponent that the ratchet reports: clocks, and meters that count.
CLOCK_MARGIN: Final = 0.10
COUNT_MARGIN: Final = 0.03
#: Bytes that fit the caches of any machine that tests run on.
RESIDENT: Final = 2.0**20

Facts = dict[str, Any]


def same_machine(one: Mapping[str, Any], other: Mapping[str, Any]) -> bool:
    """Whether two environments have the same kind of processor."""
    return bool(one["machine"] == other["machine"] and one["processor"] == other["processor"])


def against(
    accepted: Record, judgement: Mapping[str, Any], environment: Mapping[str, Any], margin: float | None = None
) -> Facts:
    """What the ratchet says of a judgement in wire form: plain builtins.

    `risen` is None where the two cannot be compared, and `why` says why. `of` is what was compared: the exponent
    of the cost, or its excess where the budget is exponential.
    """
    before = accepted["judgement"]
    facts: Facts = {
        "risen": None,
        "why": "",
        "of": "exponent",
        "over": None,
        "accepted": None,
        "now": None,
        "since": accepted["run"]["time"],
    }
    facts["why"] = _incomparable(before, judgement)
    if facts["why"]:
        return facts
    if judgement["exponent"] is None:
        facts.update(of="excess", accepted=before["excess"], now=judgement["excess"])
    else:
        far = is_counted(judgement["meter"]) or same_machine(accepted["environment"], environment)
        rows = shared_rows([before["sizes"], judgement["sizes"]], footprint=float("inf") if far else RESIDENT)
        fits = [fit(each, shared) for each, shared in zip((before, judgement), rows, strict=True)]
        if None in fits:
            facts["why"] = f"fewer than {FEWEST_SIZES} sizes in common" + (
                "" if far else " that fit the caches of both machines"
            )
            return facts
        facts.update(accepted=fits[0], now=fits[1], over=[rows[1][0]["size"], rows[1][-1]["size"]])
    if margin is None:
        margin = COUNT_MARGIN if is_counted(judgement["meter"]) else CLOCK_MARGIN
    facts["risen"] = rises(facts["accepted"], facts["now"], margin)
    return facts


def _incomparable(before: Mapping[str, Any], now: Mapping[str, Any]) -> str:
    if now["excess"] is None or before["excess"] is None:
        return "it could not be measured"
    if now.get("ray", "") != before.get("ray", ""):
        return "other sizes were grown"
    if (now["exponent"] is None) != (before["exponent"] is None):
        return "its bound was changed"
    if now["exponent"] is None and now["theta"] != before["theta"]:
        return "its bound was changed"
    return ""


def rises(before: Mapping[str, float], now: Mapping[str, float], margin: float) -> bool:
    """Whether an interval lies wholly above another, and its estimate by more than `margin`."""
    return now["low"] > before["high"] and now["estimate"] - before["estimate"] > margin


def shared_rows(tables: Sequence[Sequence[Facts]], *, footprint: float = float("inf")) -> list[list[Facts]]:
    """The rows of each table whose sizes lie where all tables have some, and touch at most `footprint` bytes."""
    known = [[row for row in table if row["cost"] > 0 and row["footprint"] <= footprint] for table in tables]
    if not all(known):
        return [[] for _ in tables]
    low = max(table[0]["size"] for table in known)
    high = min(table[-1]["size"] for table in known)
    # A step beyond the common end still belongs: sizes of different seeds never match.
    low, high = low / 1.2, high * 1.2
    return [[row for row in table if low <= row["size"] <= high] for table in known]


def fit(judgement: Mapping[str, Any], rows: Sequence[Facts]) -> dict[str, float] | None:
    """The exponent over some of the judgement's rows; None where they are too few."""
    if len(rows) < FEWEST_SIZES:
        return None
    interval = exponent_over(
        [row["size"] for row in rows],
        [row["cost"] for row in rows],
        confidence=judgement["confidence"],
        counted=is_counted(judgement["meter"]),
        flat=is_flat(judgement),
    )
    if interval is None:
        return None
    return {"estimate": interval.estimate, "low": interval.low, "high": interval.high}
