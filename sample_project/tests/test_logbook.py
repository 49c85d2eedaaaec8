from __future__ import annotations

import pytest
from harbour.logbook import Logbook


def test_notes_are_numbered() -> None:
    logbook = Logbook()
    logbook.note("Pilot aboard")
    logbook.note("All fast")
    assert logbook.text() == "1. Pilot aboard\n2. All fast\n"


@pytest.mark.growth_budget("n")
def test_the_log_has_every_note(notes: list[str]) -> None:
    logbook = Logbook()
    for note in notes:
        logbook.note(note)
    text = logbook.text()
    assert text.count("\n") == len(notes)
    assert text.endswith(f"{len(notes)}. {notes[-1]}\n")
