"""`accept`: takes the newest record of each budget into the file that the ratchet holds tests to."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from fnmatch import fnmatchcase
from pathlib import Path
from typing import TextIO

from pytest_growthbudget.commands.options import BadUsage, Options
from pytest_growthbudget.commands.reading import said_faults
from pytest_growthbudget.reporting.accepted import Key, content, load_accepted, to_accept
from pytest_growthbudget.reporting.files import reason, replace_file
from pytest_growthbudget.reporting.records import Record, read_records

ABOUT = (
    "Accept the newest measured record of each budget in RECORDS: the file of accepted records, which pyproject.toml "
    "names under [tool.growthbudget.ratchet], then holds it, and no test may grow faster. Budgets that RECORDS does "
    "not name stay as they are. Exit code: 0 fine, 2 where a file could not be read or written."
)


def accept_command(arguments: Sequence[str], out: TextIO, error: TextIO) -> int:
    """Accept what records files say. Returns 0, or 2 where something could not be read or written."""
    options = Options("accept", ABOUT, out, error)
    options.add_argument("records", metavar="RECORDS", nargs="+", help="files written with --growth-records")
    options.add_argument("--test", metavar="GLOB", help="only tests whose node id matches")
    options.add_argument("--file", metavar="FILE", help="the file of accepted records (the one in pyproject.toml)")
    options.add_argument("--prune", action="store_true", help="drop budgets that RECORDS does not name")
    try:
        given = options.parse(arguments)
    except BadUsage as usage:
        return usage.code
    path = Path(given.file) if given.file else _configured(error)
    if path is None:
        return 2
    kept = read_records(given.records)
    code = said_faults(kept.faults, error)
    if code:
        error.write("nothing was accepted\n")
        return code
    before = load_accepted(path)
    if said_faults(before.faults, error):
        error.write(f"{path} was left as it is: mend or remove these lines first\n")
        return 2
    new = {key: record for key, record in to_accept(kept.records).items() if _wanted(key, given.test)}
    if not new:
        error.write("no measured record to accept\n")
        return 2
    dropped = [key for key in before.by_budget if given.prune and key not in new]
    after = {key: record for key, record in {**before.by_budget, **new}.items() if key not in dropped}
    try:
        replace_file(path, content(after.values()))
    except OSError as fault:
        error.write(f"{path}: {reason(fault)}\n")
        return 2
    for key, record in sorted(new.items()):
        out.write(_said(key, before.by_budget.get(key), record) + "\n")
    for test, meter in sorted(dropped):
        out.write(f"{test} ({meter}): dropped\n")
    out.write(f"{path}: {len(after)} budgets accepted\n")
    return 0


def _configured(error: TextIO) -> Path | None:
    """The file that pyproject.toml in this directory or above names."""
    from pytest_growthbudget.settings import SettingsError, read_pyproject

    here = Path.cwd()
    for folder in (here, *here.parents):
        file = folder / "pyproject.toml"
        if file.is_file():
            try:
                settings = read_pyproject(file)
            except SettingsError as fault:
                error.write(f"{fault}\n")
                return None
            if settings.ratchet:
                return folder / settings.ratchet.accepted
            break
    error.write(
        "no file to accept into: give --file FILE, or switch the ratchet on in pyproject.toml:\n"
        '    [tool.growthbudget.ratchet]\n    accepted = "growth-accepted.jsonl"\n'
    )
    return None


def _wanted(key: Key, glob: str | None) -> bool:
    return glob is None or fnmatchcase(key[0], glob)


def _said(key: Key, before: Record | None, after: Record) -> str:
    test, meter = key
    if before is None:
        return f"{test} ({meter}): {_growth(after)}, new"
    return f"{test} ({meter}): {_growth(before)} -> {_growth(after)}"


def _growth(record: Record) -> str:
    judgement: Mapping[str, object] = record["judgement"]
    name = "exponent" if judgement["exponent"] else "excess"
    value = judgement[name]
    assert isinstance(value, dict)
    return f"{name} {value['estimate']:.2f}"
