"""Accepted records: the state that the ratchet holds tests to, one record a budget, kept in the user's repository."""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from dataclasses import dataclass
from pathlib import Path

from pytest_growthbudget.reporting.records import Fault, Record, budget_key, latest, line_of, read_records

Key = tuple[str, str]


@dataclass(frozen=True, slots=True, kw_only=True)
class Accepted:
    """The accepted record of each budget. `missing`: there is no such file yet. `faults`: lines that are none."""

    path: Path
    by_budget: dict[Key, Record]
    faults: tuple[Fault, ...] = ()
    missing: bool = False


def load_accepted(path: Path) -> Accepted:
    """What the file at `path` accepts. Where a budget is there twice, the later run counts."""
    if not path.exists():
        return Accepted(path=path, by_budget={}, missing=True)
    kept = read_records([path])
    return Accepted(path=path, by_budget=latest(kept.records), faults=kept.faults)


def to_accept(records: Sequence[Record]) -> dict[Key, Record]:
    """The newest measured record of each budget; one that could not be measured says nothing to be held to."""
    return latest([record for record in records if record["judgement"]["excess"] is not None])


def content(records: Iterable[Record]) -> bytes:
    """The file that accepts `records`: one line each, by test and meter, so that a change is a small diff."""
    return b"".join(line_of(record) for record in sorted(records, key=budget_key))
