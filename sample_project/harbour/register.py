"""The register of ships and their calls, in a database."""

from __future__ import annotations

import sqlite3
from collections.abc import Iterable
from dataclasses import dataclass


@dataclass(frozen=True, slots=True)
class Call:
    """One call at the port."""

    call_sign: str
    ship: str
    tonnes: int


def open_register(path: str = ":memory:") -> sqlite3.Connection:
    """A register with its tables; a new file is a new register."""
    register = sqlite3.connect(path)
    register.executescript(
        """
        CREATE TABLE IF NOT EXISTS ships (call_sign TEXT PRIMARY KEY, name TEXT NOT NULL);
        CREATE TABLE IF NOT EXISTS calls (
            number INTEGER PRIMARY KEY,
            call_sign TEXT NOT NULL REFERENCES ships (call_sign),
            tonnes INTEGER NOT NULL
        );
        """
    )
    return register


def import_calls(register: sqlite3.Connection, calls: Iterable[Call]) -> None:
    """Enter calls, and the ships that are new, in one transaction."""
    calls = list(calls)
    with register:
        register.executemany(
            "INSERT OR IGNORE INTO ships (call_sign, name) VALUES (?, ?)",
            ((call.call_sign, call.ship) for call in calls),
        )
        register.executemany(
            "INSERT INTO calls (call_sign, tonnes) VALUES (?, ?)",
            ((call.call_sign, call.tonnes) for call in calls),
        )


def day_sheet(register: sqlite3.Connection) -> list[str]:
    """A line for each call, with the ship's name: one query, however many calls there are."""
    rows = register.execute(
        """
        SELECT ships.name, calls.tonnes FROM calls JOIN ships USING (call_sign)
        ORDER BY calls.number
        """
    )
    return [f"{name}: {tonnes} t" for name, tonnes in rows]
