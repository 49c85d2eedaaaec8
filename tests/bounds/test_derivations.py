"""Derivations, to the letter: each step is what the theorem says at this recurrence."""

from __future__ import annotations

import json
from pathlib import Path
from typing import Any

import pytest

from pytest_growthbudget.bounds.budget import describe, parse_budget

ENTRIES = json.loads((Path(__file__).parent / "valid" / "derivations.json").read_text("utf-8"))


@pytest.mark.parametrize("entry", ENTRIES, ids=[e["input"] for e in ENTRIES])
def test_derivation_is_told_whole(entry: dict[str, Any]) -> None:
    """Growth, theorem and every step, as `explain --json` gives them."""
    answer = describe(parse_budget(entry["input"]))
    assert {key: answer[key] for key in entry} == entry
