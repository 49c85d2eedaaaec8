"""What the guide shows of the commands is what they print: their input lies in the tests, so it never differs."""

from __future__ import annotations

from pathlib import Path

import pytest

from tests.docs.refresh import refreshed

GUIDE = Path(__file__).parents[2] / "pytest_growthbudget" / "guide"


@pytest.mark.parametrize("name", ["records.md", "ci.md"])
def test_the_guide_shows_what_the_commands_print(name: str) -> None:
    text = (GUIDE / name).read_text(encoding="utf-8")
    assert text.count("<!-- command: ") == 1
    assert refreshed(text) == text
