"""Adding to a string that an attribute holds copies it: n notes cost n²."""

from __future__ import annotations

import pytest


class Logbook:
    def __init__(self) -> None:
        self._text = ""
        self._notes = 0

    def note(self, text: str) -> None:
        self._notes += 1
        self._text += f"{self._notes}. {text}\n"

    def text(self) -> str:
        return self._text


@pytest.mark.growth_budget("n")
def test_the_log_has_every_note(notes: list[str]) -> None:
    logbook = Logbook()
    for note in notes:
        logbook.note(note)
    text = logbook.text()
    assert text.count("\n") == len(notes)
    assert text.endswith(f"{len(notes)}. {notes[-1]}\n")
