"""The lines at the end of a run: how many budgets were judged, and how each that is not within came out."""

from __future__ import annotations

import textwrap
from collections import Counter
from typing import Any

from pytest_growthbudget.fitting.remarks import FLAT
from pytest_growthbudget.reporting import units
from pytest_growthbudget.reporting.failure import first_line

ORDER = ("within", "exceeded", "undecided", "unmeasured")


def write_summary(terminal: Any, judged: list[dict[str, Any]]) -> None:
    """Write the summary of `judged` (wire form, each with its `test`) to pytest's terminal reporter."""
    verbosity = terminal.config.get_verbosity() if hasattr(terminal.config, "get_verbosity") else 0
    if verbosity < 0:
        terminal.write_line(total_line(judged))
        return
    terminal.section("growth budgets", sep="-")
    for judgement in judged:
        doubts = [note for note in judgement["notes"] if note.startswith(FLAT)]
        if verbosity > 0 or doubts or judgement["verdict"] in ("undecided", "unmeasured"):
            terminal.write_line(f"{judgement['test']}")
            terminal.write_line(f"    {first_line(judgement)}")
        for note in doubts:
            terminal.write_line(textwrap.indent(textwrap.fill(note, 76, break_on_hyphens=False), "    "))
    terminal.write_line(total_line(judged))


def total_line(judged: list[dict[str, Any]]) -> str:
    """One line: counts by verdict and the time that measuring took."""
    counts = Counter(judgement["verdict"] for judgement in judged)
    parts = [f"{counts[verdict]} {verdict}" for verdict in ORDER if counts[verdict]]
    spent = sum(judgement["seconds"] for judgement in judged)
    noun = "budget" if len(judged) == 1 else "budgets"
    return f"{len(judged)} growth {noun}: {', '.join(parts)} (measured in {units.seconds(spent)})"
