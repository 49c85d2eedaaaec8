"""The lines at the end of a run: how many budgets were judged, and how each that is not within came out."""

from __future__ import annotations

import textwrap
from collections import Counter
from typing import Any

from pytest_growthbudget.fitting.remarks import FLAT
from pytest_growthbudget.reporting import units
from pytest_growthbudget.reporting.failure import first_line

#: Seconds of measuring from which on the summary says where they went, and how many budgets it names.
SLOW = 10.0
NAMED = 3
ORDER = ("within", "exceeded", "undecided", "unmeasured")


def write_summary(terminal: Any, judged: list[dict[str, Any]]) -> None:
    """Write the summary of `judged` (wire form, each with its `test`) to pytest's terminal reporter."""
    config = terminal.config
    verbosity = config.get_verbosity() if hasattr(config, "get_verbosity") else config.option.verbose  # before 8.0
    if verbosity < 0:
        terminal.write_line(total_line(judged))
        return
    terminal.ensure_newline()
    terminal.section("growth budgets", sep="-")
    for judgement in judged:
        doubts = [note for note in judgement["notes"] if note.startswith(FLAT)]
        is_open = judgement["verdict"] in ("undecided", "unmeasured") and judgement["undecided"] != "pass"
        if verbosity > 0 or doubts or is_open:
            terminal.write_line(f"{judgement['test']}")
            terminal.write_line(_indented(first_line(judgement)))
        for note in doubts:
            terminal.write_line(_indented(note))
    for line in where_time_went(judged, always=verbosity > 0):
        terminal.write_line(line)
    terminal.write_line(total_line(judged))


def _indented(text: str) -> str:
    return textwrap.fill(text, 80, initial_indent="    ", subsequent_indent="    ", break_on_hyphens=False)


def where_time_went(judged: list[dict[str, Any]], *, always: bool = False) -> list[str]:
    """The budgets that took longest to measure, where all together took long; where there is more than one."""
    if len(judged) < 2 or (sum(judgement["seconds"] for judgement in judged) <= SLOW and not always):
        return []
    slowest = sorted(judged, key=lambda judgement: -judgement["seconds"])[:NAMED]
    rows = [f"  {units.seconds(judgement['seconds']):>9}  {_named(judgement)}" for judgement in slowest]
    return ["measuring took longest for", *rows]


def _named(judgement: dict[str, Any]) -> str:
    return f"{judgement['test']} ({judgement['meter']} against {judgement['theta']})"


def total_line(judged: list[dict[str, Any]]) -> str:
    """One line: counts by verdict and the time that measuring took."""
    counts = Counter(judgement["verdict"] for judgement in judged)
    parts = [f"{counts[verdict]} {verdict}" for verdict in ORDER if counts[verdict]]
    spent = sum(judgement["seconds"] for judgement in judged)
    noun = "budget" if len(judged) == 1 else "budgets"
    return f"{len(judged)} growth {noun}: {', '.join(parts)} (measured in {units.seconds(spent)})"
