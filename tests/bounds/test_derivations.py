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


@pytest.mark.parametrize(
    ("text", "critical"),
    [
        ("T(n) = 8 T(n/2) + n^2", 3.0),
        ("T(n) = 4 T(n/2)", 2.0),
        ("T(n) = T(n/4) + T(3n/4) + n^2", 1.0),
        ("T(n) = 4 T(sqrt n) + log n", 2.0),
        ("T(n) = 2 T(sqrt n)", 1.0),
    ],
)
def test_the_critical_exponent_is_kept(text: str, critical: float) -> None:
    """Where the theorem has one."""
    derivation = parse_budget(text).derivation
    assert derivation is not None
    assert derivation.critical == critical


@pytest.mark.parametrize("text", ["T(n) = 2 T(n-1) + 1", "T(n) = T(n - sqrt n) + 1", "T(n) = 2 T(n/2) + 2^n"])
def test_other_theorems_have_no_critical_exponent(text: str) -> None:
    derivation = parse_budget(text).derivation
    assert derivation is not None
    assert derivation.critical is None
