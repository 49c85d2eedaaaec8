"""`page`: draws the page of records files."""

from __future__ import annotations

from collections.abc import Sequence
from pathlib import Path
from typing import TextIO

from pytest_growthbudget.commands.options import BadUsage, Options
from pytest_growthbudget.commands.reading import said_faults
from pytest_growthbudget.reporting.extra import missing_libraries
from pytest_growthbudget.reporting.files import reason, replace_file
from pytest_growthbudget.reporting.records import latest, read_records

ABOUT = (
    "Draw the newest record of each budget in RECORDS as one HTML page. "
    "Exit code: 0 fine, 2 where a file could not be read or written."
)


def page_command(arguments: Sequence[str], out: TextIO, error: TextIO) -> int:
    """Draw the page of records files. Returns 0, or 2 where something could not be read or written."""
    options = Options("page", ABOUT, out, error)
    options.add_argument("records", metavar="RECORDS", nargs="+", help="files written with --growth-records")
    options.add_argument("--out", metavar="FILE.html", required=True, help="the page to write")
    try:
        given = options.parse(arguments)
    except BadUsage as usage:
        return usage.code
    missing = missing_libraries()
    if missing:
        error.write(missing + "\n")
        return 2
    from pytest_growthbudget.reporting.page import render

    kept = read_records(given.records)
    newest = list(latest(kept.records).values())
    try:
        replace_file(Path(given.out), render(newest).encode("utf-8", "backslashreplace"))
    except OSError as fault:
        error.write(f"{given.out}: {reason(fault)}\n")
        return 2
    out.write(f"{given.out}: {len(newest)} budgets\n")
    return said_faults(kept.faults, error)
