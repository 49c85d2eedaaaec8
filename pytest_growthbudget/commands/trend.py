"""`trend`: how growth and cost moved over the runs of records files."""

from __future__ import annotations

import json
from collections.abc import Sequence
from dataclasses import asdict
from fnmatch import fnmatchcase
from typing import TYPE_CHECKING, TextIO

from pytest_growthbudget.commands.options import BadUsage, Options
from pytest_growthbudget.commands.reading import said_faults
from pytest_growthbudget.reporting import units
from pytest_growthbudget.reporting.records import read_records

if TYPE_CHECKING:
    from pytest_growthbudget.reporting.trend import Interval, Step, Trend

ABOUT = (
    "Show how each budget's exponent and its cost at a common size moved over the runs of records files. A change "
    "beyond the intervals is marked. Exit code: 0 fine, 2 where a file or a line could not be read."
)
LAST = 10


def trend_command(arguments: Sequence[str], out: TextIO, error: TextIO) -> int:
    """Write the trends of records files. Returns 0, or 2 where something could not be read."""
    options = Options("trend", ABOUT, out, error)
    options.add_argument("records", metavar="RECORDS", nargs="+", help="files written with --growth-records")
    options.add_argument("--test", metavar="GLOB", help="only tests whose node id matches")
    options.add_argument("--changed", action="store_true", help="only budgets with a change that is marked")
    options.add_argument(
        "--last", type=int, default=LAST, metavar="N", help=f"in the text, show the last N runs and all marked ({LAST})"
    )
    options.add_argument("--json", action="store_true", help="one JSON object a budget and line")
    try:
        given = options.parse(arguments)
        if given.last < 1:
            options.error("--last must be at least 1")
    except BadUsage as usage:
        return usage.code
    from pytest_growthbudget.reporting.trend import trends

    kept = read_records(given.records)
    wanted = [record for record in kept.records if given.test is None or fnmatchcase(record["test"], given.test)]
    found = [trend for trend in trends(wanted) if trend.changed or not given.changed]
    if given.json:
        for trend in found:
            out.write(json.dumps(asdict(trend)) + "\n")
    else:
        out.write("\n\n".join(text(trend, given.last) for trend in found))
        out.write(("\n\n" if found else "") + _total(found, len(wanted)) + "\n")
    return said_faults(kept.faults, error)


def _total(found: Sequence[Trend], records: int) -> str:
    if not records:
        return "no records"
    changed = sum(trend.changed for trend in found)
    budgets = "1 budget" if len(found) == 1 else f"{len(found)} budgets"
    return f"{budgets} in {records} records: {changed} changed beyond the intervals"


def text(trend: Trend, last: int = LAST) -> str:
    """The trend of one budget as lines of at most 80 columns, but for a long node id."""
    name = trend.variable
    lines = [f"{trend.test}", f"  {trend.meter} against {trend.steps[-1].bound}"]
    if trend.over:
        low, high = trend.over
        lines[-1] += f", over {name} = {units.count(low)} to {units.count(high)}"
    elif len(trend.steps) > 1:
        lines.append("  the runs share too few sizes: each exponent is over the run's own, none is compared")
    at = f"cost at {name} = {units.count(trend.at)}" if trend.at else ""
    lines.append(f"  {'run (UTC)':<16}  {trend.of:<21}  {at:<28}".rstrip())
    hidden = 0
    for index, step in enumerate(trend.steps):
        marked = step.change or step.cost_change or index == 0
        if not marked and index < len(trend.steps) - last:
            hidden += 1
            continue
        if hidden:
            lines.append(f"  ({hidden} more)")
            hidden = 0
        lines.extend(_row(step, trend))
    return "\n".join(lines)


def _row(step: Step, trend: Trend) -> list[str]:
    time = step.time[:16].replace("T", " ")
    cost = ""
    if step.cost:
        cost = (
            f"{units.cost(step.cost['estimate'], trend.unit)} "
            f"({units.cost(step.cost['low'], trend.unit)} to {units.cost(step.cost['high'], trend.unit)})"
        )
    lines = [f"  {time:<16}  {_growth(step.growth):<21}  {cost}".rstrip()]
    said = []
    if step.elsewhere:
        said.append("another processor or Python than before")
    if step.verdict != "within":
        said.append(step.verdict)
    if step.change:
        said.append(f"! the {trend.of} {step.change}")
    if step.cost_change:
        said.append(f"! the cost {step.cost_change}")
    if said:
        lines.append(f"{'':<20}{', '.join(said)}")
    return lines


def _growth(value: Interval | None) -> str:
    if value is None:
        return ""
    ends = [f"{value[end]:.2f}".replace("-0.00", "0.00") for end in ("estimate", "low", "high")]
    return f"{ends[0]} ({ends[1]} to {ends[2]})"
