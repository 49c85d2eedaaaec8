"""How growths and numbers are written: to the letter, and so that they read back as themselves."""

from __future__ import annotations

import json
from fractions import Fraction
from pathlib import Path

import pytest
from hypothesis import assume, given, settings
from hypothesis import strategies as st

from pytest_growthbudget.bounds.budget import parse_budget
from pytest_growthbudget.bounds.enclosure import to_float
from pytest_growthbudget.bounds.exact import (
    EULER,
    ONE,
    ZERO,
    Number,
    exp_number,
    ln_fraction,
    ln_number,
    power_number,
    symbol,
)
from pytest_growthbudget.bounds.printing import show_fraction, show_number
from pytest_growthbudget.bounds.roots import growth_rate, solve

PRINTED = json.loads((Path(__file__).parent / "valid" / "printed.json").read_text("utf-8"))
FRACTIONS = st.fractions(min_value=-9, max_value=9, max_denominator=12)
CONSTANTS: list[Number] = [
    ln_fraction(Fraction(2)),
    ln_fraction(Fraction(3, 5)),
    power_number(Fraction(2), Fraction(1, 2)),
    power_number(Fraction(6), Fraction(2, 3)),
    symbol(EULER),
    symbol(EULER, Fraction(-1, 3)),
    ln_number(ln_fraction(Fraction(7))),
    exp_number(power_number(Fraction(2), Fraction(1, 2))),
    growth_rate(((ONE, 1), (ONE, 2))),
    growth_rate(((ONE, 2), (Fraction(1, 3), 3))),
    solve([(ONE, ln_fraction(Fraction(2))), (Fraction(1, 4), ln_fraction(Fraction(3, 2)))]),
]


@pytest.mark.parametrize("entry", PRINTED, ids=[e["input"][:60] for e in PRINTED])
def test_a_growth_is_written_in_its_one_form(entry: dict[str, str]) -> None:
    """Simplest spellings of exponents, bases and products; quotients for what falls."""
    theta = parse_budget(entry["input"]).theta
    assert theta == entry["theta"]
    assert parse_budget(theta).theta == theta


@st.composite
def numbers(draw: st.DrawFn) -> Number:
    """Quotients of sums of products of constants."""

    def total() -> Number:
        out: Number = draw(FRACTIONS)
        for _ in range(draw(st.integers(0, 2))):
            part: Number = draw(FRACTIONS)
            for constant in draw(st.lists(st.sampled_from(CONSTANTS), min_size=1, max_size=2)):
                part = part * constant
            out = out + part
        return out

    top, bottom = total(), total()
    return top / bottom if bottom and draw(st.booleans()) else top


@settings(max_examples=100, deadline=None, derandomize=True)
@given(numbers())
def test_every_number_reads_back(x: Number) -> None:
    """As an exponent, where no digit may be lost."""
    assume(abs(to_float(x)) > 1e-9)
    (m,) = parse_budget(f"n^({show_number(x)})").growth.monomials
    ((_, factor),) = m
    assert factor.power - x == ZERO


@settings(max_examples=100, deadline=None, derandomize=True)
@given(st.fractions() | FRACTIONS | st.decimals(-1000, 1000, places=8).map(Fraction))
def test_every_rational_reads_back(x: Fraction) -> None:
    assert Fraction(show_fraction(x)) == x


@pytest.mark.parametrize(
    ("x", "text"),
    [
        ("7", "7"),
        ("-7", "-7"),
        ("1/2", "0.5"),
        ("-1/4", "-0.25"),
        ("5/4", "1.25"),
        ("1/3", "1/3"),
        ("-7/6", "-7/6"),
        ("1/100000000", "0.00000001"),
        ("1/1000000000", "1/1000000000"),
        ("1/256", "0.00390625"),
        ("1/512", "1/512"),
        ("12345/1000", "12.345"),
    ],
)
def test_short_decimals_are_written_as_such(x: str, text: str) -> None:
    """Up to eight places; else a quotient."""
    assert show_fraction(Fraction(x)) == text
