"""The logbook of the watch."""

from __future__ import annotations


class Logbook:
    """Notes of the watch, in the order in which they were made."""

    def __init__(self) -> None:
        self._lines: list[str] = []

    def note(self, text: str) -> None:
        """Add one note."""
        self._lines.append(f"{len(self._lines) + 1}. {text}\n")

    def text(self) -> str:
        """The whole log."""
        return "".join(self._lines)
