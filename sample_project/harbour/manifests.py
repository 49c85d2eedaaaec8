"""Cargo manifests: reading them, and getting rid of what was sent twice."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass


@dataclass(frozen=True, slots=True)
class Consignment:
    """One line of a manifest: a container, the port it is bound for, its weight in tonnes, and what is in it."""

    container: str
    port: str
    tonnes: int
    contents: str


class ManifestError(ValueError):
    """A line of a manifest that cannot be read."""


def read_manifest(text: str) -> list[Consignment]:
    """Read `container;port;tonnes;contents`, one consignment a line. Blank lines are passed over.

    Raises `ManifestError`, with the line's number, where a line has not four fields or no whole weight.
    """
    return [_read_line(line, number) for number, line in enumerate(text.splitlines(), start=1) if line.strip()]


def _read_line(line: str, number: int) -> Consignment:
    fields = line.split(";")
    if len(fields) != 4 or not fields[2].strip().isdecimal():
        raise ManifestError(f"line {number}: expected container;port;tonnes;contents, found {line!r}")
    return Consignment(fields[0].strip(), fields[1].strip(), int(fields[2]), fields[3].strip())


def distinct_ids(ids: Iterable[str]) -> list[str]:
    """The ids without repeats, each where it first stood."""
    seen: set[str] = set()
    kept = []
    for container in ids:
        if container not in seen:
            seen.add(container)
            kept.append(container)
    return kept


def tonnes_by_port(lines: Iterable[str]) -> dict[str, int]:
    """Total weight for each port. The lines are used up one by one and never held."""
    totals: dict[str, int] = {}
    for line in lines:
        _, port, tonnes, _ = line.split(";")
        totals[port] = totals.get(port, 0) + int(tonnes)
    return totals
