"""The valid bounds and the pairs to compare: expectations written down by hand."""

from __future__ import annotations

import json
from pathlib import Path
from typing import Any

import pytest

from pytest_growthbudget.bounds.budget import compare, parse_budget

HERE = Path(__file__).parent / "valid"
BOUNDS = json.loads((HERE / "bounds.json").read_text("utf-8"))
PAIRS = json.loads((HERE / "pairs.json").read_text("utf-8"))


def _flat(terms: list[dict[str, dict[str, float]]]) -> list[list[tuple[str, str, float]]]:
    neutral = {"exp_base": 1}
    return sorted(
        sorted(
            (name, part, round(float(x), 10))
            for name, factor in term.items()
            for part, x in factor.items()
            if x != neutral.get(part, 0)
        )
        for term in terms
    )


@pytest.mark.parametrize("entry", BOUNDS, ids=[e["input"] for e in BOUNDS])
def test_bound_has_the_expected_terms(entry: dict[str, Any]) -> None:
    """Every spelling gives the growth written beside it."""
    budget = parse_budget(entry["input"])
    assert budget.kind == "bound"
    assert _flat(budget.terms()) == _flat(entry["terms"])


@pytest.mark.parametrize("entry", BOUNDS, ids=[e["input"] for e in BOUNDS])
def test_printed_growth_reads_back(entry: dict[str, Any]) -> None:
    """parse after print is the identity, on the text and on the exact growth."""
    budget = parse_budget(entry["input"])
    again = parse_budget(budget.theta)
    assert again.theta == budget.theta
    assert again.growth.monomials == budget.growth.monomials


@pytest.mark.parametrize("pair", PAIRS, ids=[f"{p['a']} against {p['b']}" for p in PAIRS])
def test_order(pair: dict[str, str]) -> None:
    """The relation written down holds, and so does its mirror image."""
    mirror = {"slower": "faster", "faster": "slower", "same": "same"}
    assert compare(pair["a"], pair["b"]) == pair["relation"]
    assert compare(pair["b"], pair["a"]) == mirror[pair["relation"]]
