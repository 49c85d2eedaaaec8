"""What is said of one judged budget: a first line that stands alone, and the evidence under it."""

from __future__ import annotations

import math
import textwrap
from typing import Any

from pytest_growthbudget.fitting.judgement import two_places
from pytest_growthbudget.reporting import audit, lines, risen, units

WIDTH = 80
BAR = 24


def fails(judgement: dict[str, Any]) -> bool:
    """Whether the test fails for this judgement (wire form), by the verdict and the policy for undecided ones."""
    if judgement["verdict"] == "exceeded" or risen.fails(judgement):
        return True
    return judgement["verdict"] in ("undecided", "unmeasured") and judgement["undecided"] == "fail"


def power(exponent: float, variable: str = "n") -> str:
    """A measured exponent as a growth: `n^1.97`."""
    return f"{variable}^{two_places(exponent)}"


def first_line(judgement: dict[str, Any]) -> str:
    """The line that stands alone in a CI summary."""
    verdict, meter, theta = judgement["verdict"], judgement["meter"], judgement["theta"]
    if verdict != "exceeded" and risen.fails(judgement):
        return risen.first_line(judgement)
    if verdict == "exceeded" and _over_ceiling(judgement):
        row = judgement["ceiling"]
        return (
            f"growth budget exceeded: {meter} is foreseen at {units.cost(row['cost']['estimate'], judgement['unit'])} "
            f"for {judgement['variable']} = {units.count(row['size'])} where "
            f"{units.cost(row['allowed'], judgement['unit'])} is allowed"
        )
    along = f" ({judgement['ray']})" if judgement["ray"] else ""
    if verdict in ("exceeded", "within"):
        word = "exceeded" if verdict == "exceeded" else "kept"
        return f"growth budget {word}: {meter} grows as {_observed(judgement)} where {theta} is allowed{along}"
    return f"growth budget {verdict}: {meter} against {theta}{along}: {judgement['reason']}"


def _over_ceiling(judgement: dict[str, Any]) -> bool:
    row = judgement["ceiling"]
    return row is not None and row["cost"]["estimate"] > row["allowed"]


def _observed(judgement: dict[str, Any]) -> str:
    exponent, excess = judgement["exponent"], judgement["excess"]
    if exponent is not None:
        if judgement["nearest"] and exponent["estimate"] > 4:
            return str(judgement["nearest"])
        return power(exponent["estimate"], judgement["variable"])
    if excess is not None:  # an exponential budget: the excess is a power of the growth itself
        return f"({judgement['theta']})^{1 + excess['estimate']:.2f}"
    return judgement["nearest"] or "an unknown growth"


def sections(judgements: list[dict[str, Any]], failed_at: str) -> list[tuple[str, str]]:
    """Titled texts for the report of one test: a judgement each, or the sizes at which the test failed."""
    titled = [("growth budget", describe(judgement)) for judgement in judgements]
    titled += [("audit", audit.describe(judgement["audit"])) for judgement in judgements if judgement.get("audit")]
    if failed_at:
        titled.append(("growth budget", f"the test failed at {failed_at}; no budget was judged"))
    return titled


def describe(judgement: dict[str, Any]) -> str:
    """The whole report of one judgement in wire form, at most 80 columns wide, in ASCII where the bound is."""
    parts = [_wrap(first_line(judgement)), _facts(judgement)]
    if judgement["sizes"]:
        parts.append(_table(judgement))
    if judgement["forecast"] and judgement["verdict"] == "exceeded":
        parts.append(_forecast(judgement))
    closing = _closing(judgement)
    if closing:
        parts.append(closing)
    return "\n\n".join(parts)


def _wrap(text: str, indent: str = "") -> str:
    return textwrap.fill(text, WIDTH, subsequent_indent=indent, break_on_hyphens=False)


def _fact(name: str, text: str) -> str:
    return textwrap.fill(
        text, WIDTH, initial_indent=f"  {name:<11}", subsequent_indent=" " * 13, break_on_hyphens=False
    )


def _facts(judgement: dict[str, Any]) -> str:
    lines = [_fact("declared", judgement["bound"])]
    if judgement["theta"] != judgement["bound"]:
        by = f" ({judgement['theorem']})" if judgement["theorem"] else ""
        lines.append(_fact("derived", f"{judgement['theta']}{by}"))
    if judgement["rays"]:
        lines.append(_fact("rays", "; ".join(f"{ray}: {verdict}" for ray, verdict in judgement["rays"])))
    exponent, excess = judgement["exponent"], judgement["excess"]
    sizes = judgement["sizes"]
    percent = f"{100 * judgement['confidence']:g} %"
    if exponent is not None:
        over = (
            f" over {judgement['variable']} = {units.count(sizes[0]['size'])} to {units.count(sizes[-1]['size'])}"
            if sizes
            else ""
        )
        lines.append(
            _fact(
                "observed",
                f"{power(exponent['estimate'], judgement['variable'])}, {percent} interval {exponent['low']:.2f} to "
                f"{exponent['high']:.2f},{over}",
            )
        )
    if excess is not None:
        told = ""
        if judgement["resolution"] is not None:
            told = f"; this run could tell an excess of {judgement['resolution']:.2f}"
        lines.append(
            _fact(
                "excess",
                f"{excess['estimate']:.2f} ({excess['low']:.2f} to {excess['high']:.2f}) over the budget, "
                f"slack {judgement['slack']:g}{told}",
            )
        )
    if judgement["bends_at"] is not None:
        lines.append(_fact("since", f"{judgement['variable']} = {units.count(judgement['bends_at'])}"))
    if judgement["ceiling"] is not None:
        lines.append(_fact("ceiling", _ceiling(judgement)))
    if judgement["confirmed"]:
        lines.append(_fact("confirmed", "by a second, independent set of readings"))
    if judgement.get("drift"):
        lines.append(_fact("drift", risen.fact(judgement)))
    if judgement["reason"] and judgement["verdict"] in ("within", "exceeded"):
        lines.append(_fact("because", judgement["reason"]))
    return "\n".join(lines)


def _ceiling(judgement: dict[str, Any]) -> str:
    row, unit = judgement["ceiling"], judgement["unit"]
    cost = row["cost"]
    return (
        f"{units.cost(row['allowed'], unit)} at {judgement['variable']} = {units.count(row['size'])}; foreseen "
        f"{units.cost(cost['estimate'], unit)} ({units.cost(cost['low'], unit)} to {units.cost(cost['high'], unit)})"
    )


def _table(judgement: dict[str, Any]) -> str:
    rows = judgement["sizes"]
    allowed = judgement["allowed"] or [None] * len(rows)
    ratios = [row["cost"] / limit if limit else None for row, limit in zip(rows, allowed, strict=True)]
    longest = max((ratio for ratio in ratios if ratio is not None), default=1.0)
    slopes = _local_exponents(rows)
    beside = judgement["yardstick"] or [None] * len(rows)
    column = f"  {'yardstick':>10}" if judgement["yardstick"] else ""
    width = BAR - len(column)
    lines = [f"  {judgement['variable']:>12}  {'cost':>10}{column}  {'exponent':>8}  {'x allowed':>9}"]
    for row, ratio, slope, reference in zip(rows, ratios, slopes, beside, strict=True):
        bar = "#" * round(width * ratio / longest) if ratio is not None else ""
        shown = f"{ratio:.3g}" if ratio is not None else ""
        read = f"  {units.cost(reference, judgement['unit']):>10}" if reference is not None else ""
        lines.append(
            f"  {units.count(row['size']):>12}  {units.cost(row['cost'], judgement['unit']):>10}{read}  "
            f"{slope:>8}  {shown:>9}  {bar}".rstrip()
        )
    return "\n".join(lines)


def _local_exponents(rows: list[dict[str, Any]]) -> list[str]:
    """The exponent of the cost between each size and one about an octave below."""
    shown = []
    for index, row in enumerate(rows):
        below = [earlier for earlier in rows[:index] if 1.9 * earlier["size"] <= row["size"]]
        if not below or below[-1]["cost"] <= 0 or row["cost"] <= 0:
            shown.append("")
            continue
        slope = math.log(row["cost"] / below[-1]["cost"]) / math.log(row["size"] / below[-1]["size"])
        shown.append(f"{slope:.2f}")
    return shown


def _forecast(judgement: dict[str, Any]) -> str:
    unit = judgement["unit"]
    lines = [
        "  forecast, at sizes that were not run",
        f"  {judgement['variable']:>12}  {'expected':>10}  {'interval':>24}  budget allows",
    ]
    for row in judgement["forecast"]:
        cost = row["cost"]
        interval = f"{units.cost(cost['low'], unit)} to {units.cost(cost['high'], unit)}"
        lines.append(
            f"  {units.count(row['size']):>12}  {units.cost(cost['estimate'], unit):>10}  {interval:>24}  "
            f"{units.cost(row['allowed'], unit)}"
        )
    return "\n".join(lines)


def _closing(judgement: dict[str, Any]) -> str:
    rows = []
    if judgement["nearest"]:
        rows.append(_fact("nearest", f"{judgement['nearest']}, the simple growth nearest to what was observed"))
    if judgement["verdict"] == "exceeded":
        rows.extend(_look_at(judgement))
    rows.extend(_fact("note", note) for note in judgement["notes"])
    if judgement["seconds"]:
        rows.append(
            _fact("repeat", f"--growth-seed {judgement['seed']} (measured in {units.seconds(judgement['seconds'])})")
        )
    return "\n".join(rows)


def _look_at(judgement: dict[str, Any]) -> list[str]:
    accused = judgement.get("audit") and audit.blame(judgement["audit"])
    if not judgement["lines"]:
        return [_fact("look at", _hint(judgement))]
    rows = lines.describe(judgement["lines"], judgement["variable"], WIDTH - 13)
    head = [_fact("look at", accused)] if accused else []
    return head + [f"  {'' if head or number else 'look at':<11}{row}" for number, row in enumerate(rows)]


def _hint(judgement: dict[str, Any]) -> str:
    if _over_ceiling(judgement):
        return "the constant factor: the growth is kept, but each step is too dear for that size"
    if judgement.get("audit") and audit.blame(judgement["audit"]):
        return audit.blame(judgement["audit"])
    excess = judgement["excess"]["estimate"] if judgement["excess"] else 0.0
    if excess > 3:
        return "a step that branches into several of nearly its own size, or the same subproblem solved again"
    if excess > 0.6:
        return (
            "a pass over the input inside a step that should not need one: a search in a list, a slice or a copy, "
            "pop(0) or insert(0, ...), text built up by +, a loop inside the loop"
        )
    return "a step whose own cost grows with the input: a longer search, an uneven split, a copy of part of the input"
