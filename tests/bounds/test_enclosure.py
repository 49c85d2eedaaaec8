"""Intervals and the order of exact numbers, against exact fractions and against mpmath at far more digits."""

from __future__ import annotations

import math
from decimal import Decimal
from fractions import Fraction

import mpmath
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from pytest_growthbudget.bounds.enclosure import (
    Arithmetic,
    Interval,
    compare_numbers,
    enclose,
    floor_number,
    sign,
    to_float,
)
from pytest_growthbudget.bounds.exact import (
    BASE,
    EULER,
    Number,
    Symbol,
    Undecidable,
    exp_number,
    ln_fraction,
    ln_number,
    power_number,
    symbol,
)

COMMON = settings(max_examples=50, deadline=None, derandomize=True)
DIGITS = 12
EVERYTHING = (Decimal("-Infinity"), Decimal("Infinity"))
DECIMALS = st.integers(-(10**9), 10**9).map(lambda i: Decimal(i).scaleb(-4))
POSITIVE = st.integers(1, 10**9).map(lambda i: Decimal(i).scaleb(-4))


def _pairs(numbers: st.SearchStrategy[Decimal]) -> st.SearchStrategy[Interval]:
    return st.tuples(numbers, numbers).map(lambda pair: (min(pair), max(pair)))


def _is_around(found: Interval, low: Fraction | mpmath.mpf, high: Fraction | mpmath.mpf) -> None:
    """`found` holds [low, high], and ends at most a few units of the last digit outside."""
    ends = [type(low)(str(x)) for x in found]
    for inner, outer in ((low - ends[0], low), (ends[1] - high, high)):
        assert 0 <= inner <= abs(outer) * 3 / 10 ** (DIGITS - 1)


@COMMON
@given(_pairs(DECIMALS), _pairs(DECIMALS))
def test_sums_and_products_are_rounded_outward(a: Interval, b: Interval) -> None:
    on = Arithmetic(DIGITS)
    _is_around(on.add(a, b), Fraction(a[0]) + Fraction(b[0]), Fraction(a[1]) + Fraction(b[1]))
    products = [Fraction(x) * Fraction(y) for x in a for y in b]
    _is_around(on.mul(a, b), min(products), max(products))


@COMMON
@given(_pairs(POSITIVE))
def test_quotients_are_rounded_outward(a: Interval) -> None:
    on = Arithmetic(DIGITS)
    _is_around(on.inverse(a), 1 / Fraction(a[1]), 1 / Fraction(a[0]))
    minus = (-a[1], -a[0])
    _is_around(on.inverse(minus), -1 / Fraction(a[0]), -1 / Fraction(a[1]))
    ratio = Fraction(a[0]) / Fraction(a[1])
    _is_around(on.fraction(ratio), ratio, ratio)


@COMMON
@given(_pairs(POSITIVE), _pairs(DECIMALS))
def test_logarithms_and_exponentials_are_rounded_outward(a: Interval, b: Interval) -> None:
    on = Arithmetic(DIGITS)
    with mpmath.workdps(60):
        _is_around(on.ln(a), *(mpmath.log(mpmath.mpf(str(x))) for x in a))
        _is_around(on.exp(b), *(mpmath.exp(mpmath.mpf(str(x))) for x in b))


@COMMON
@given(_pairs(POSITIVE), st.fractions(-12, 12, max_denominator=3))
def test_powers_hold_the_powers_of_their_ends(a: Interval, exponent: Fraction) -> None:
    on = Arithmetic(DIGITS)
    with mpmath.workdps(60):
        e = mpmath.mpf(exponent.numerator) / exponent.denominator
        ends = sorted(mpmath.mpf(str(x)) ** e for x in a)
        low, high = (mpmath.mpf(str(x)) for x in on.power(a, exponent))
        own, spare = mpmath.mpf(10) ** -50, mpmath.mpf(10) ** (4 - DIGITS)
        assert low * (1 - own) <= ends[0] <= low * (1 + spare)
        assert high * (1 - spare) <= ends[1] <= high * (1 + own)


@pytest.mark.parametrize("ends", [("0", "1"), ("-1", "0"), ("-1", "1")])
def test_what_may_be_a_quotient_by_zero_can_be_anything(ends: tuple[str, str]) -> None:
    on = Arithmetic(DIGITS)
    interval = (Decimal(ends[0]), Decimal(ends[1]))
    assert on.inverse(interval) == EVERYTHING
    assert on.power(interval, Fraction(-1)) == EVERYTHING


def test_a_logarithm_or_root_of_what_may_be_zero_can_be_anything() -> None:
    on = Arithmetic(DIGITS)
    for interval in ((Decimal(0), Decimal(1)), (Decimal(-1), Decimal(2))):
        assert on.ln(interval) == EVERYTHING
        assert on.power(interval, Fraction(1, 2)) == EVERYTHING


def test_what_is_known_of_nothing_stays_unknown() -> None:
    """Infinite ends take part: 0 times anything is anything, and exp of anything is not negative."""
    on = Arithmetic(DIGITS)
    zero = (Decimal(0), Decimal(0))
    assert on.mul(EVERYTHING, zero) == EVERYTHING
    assert on.exp(EVERYTHING) == (0, Decimal("Infinity"))
    assert on.exp((Decimal("-Infinity"), Decimal("-Infinity")))[1] < Decimal("1e-1000")


def test_exponentials_are_held_far_beyond_the_floats() -> None:
    """10^7 and -10^7, and a power that a logarithm takes back."""
    on = Arithmetic(DIGITS)
    with mpmath.workdps(60):
        for x in (Decimal(10**7), Decimal(-(10**7))):
            _is_around(on.exp((x, x)), mpmath.exp(int(x)), mpmath.exp(int(x)))
    low, high = on.ln(on.exp((Decimal(10**12), Decimal(10**12))))
    assert 10**12 - 20 <= low < 10**12 < high <= 10**12 + 20


LN_2, LN_3 = ln_fraction(Fraction(2)), ln_fraction(Fraction(3))
ROOT_2, ROOT_3 = power_number(Fraction(2), Fraction(1, 2)), power_number(Fraction(3), Fraction(1, 2))
E = symbol(EULER)
#: Numbers beside what mpmath makes of the same expression.
NUMBERS: list[tuple[Number, str]] = [
    (LN_2 / LN_3, "log(2) / log(3)"),
    (ROOT_2 + ROOT_3 - 3, "sqrt(2) + sqrt(3) - 3"),
    (1 / (ROOT_2 - 1), "1 / (sqrt(2) - 1)"),
    ((E - 3) / (LN_2 + 1), "(e - 3) / (log(2) + 1)"),
    (ln_number(ROOT_2 + 1) * Fraction(-7, 3), "-7 * log(sqrt(2) + 1) / 3"),
    (exp_number(ROOT_2), "exp(sqrt(2))"),
    (exp_number(ROOT_2 / (LN_2 + 1)), "exp(sqrt(2) / (log(2) + 1))"),
    (ln_number(LN_2), "log(log(2))"),
    (power_number(E, Fraction(-5, 2)), "exp(-mpf(5) / 2)"),
    (power_number(LN_3, ROOT_2), "log(3) ** sqrt(2)"),
    (power_number(ROOT_2 + 1, Fraction(-3)), "(sqrt(2) + 1) ** -3"),
    (power_number(LN_2, Fraction(11, 3)) / 9, "log(2) ** (mpf(11) / 3) / 9"),
    (exp_number(2 * ln_number(LN_3) + LN_2 / 3), "log(3) ** 2 * mpf(2) ** (mpf(1) / 3)"),
]
by_number = pytest.mark.parametrize(("x", "text"), NUMBERS, ids=[text for _, text in NUMBERS])


@by_number
@pytest.mark.parametrize("digits", [25, 60])
def test_a_number_lies_in_its_enclosure(x: Number, text: str, digits: int) -> None:
    with mpmath.workdps(100):
        expected = eval(text, vars(mpmath).copy())
        low, high = (mpmath.mpf(str(end)) for end in enclose(x, digits))
        assert low < expected < high
        assert high - low < abs(expected) * mpmath.mpf(10) ** (4 - digits)


@by_number
def test_a_number_has_its_float_sign_floor_and_order(x: Number, text: str) -> None:
    with mpmath.workdps(100):
        expected = eval(text, vars(mpmath).copy())
        assert to_float(x) == pytest.approx(float(expected), rel=1e-15)
        assert sign(x) == mpmath.sign(expected)
        assert floor_number(x) == mpmath.floor(expected)
        for y, other in NUMBERS:
            assert compare_numbers(x, y) == mpmath.sign(expected - eval(other, vars(mpmath).copy()))


def test_rational_numbers_have_their_order_and_floor() -> None:
    assert [compare_numbers(Fraction(x), Fraction(1)) for x in (0, 1, 2)] == [-1, 0, 1]
    assert [sign(Fraction(x)) for x in (-3, 0, 3)] == [-1, 0, 1]
    assert [floor_number(Fraction(x, 2)) for x in (-3, -2, 3)] == [-2, -1, 1]


def test_floats_beyond_the_range_are_infinite() -> None:
    assert to_float(Fraction(10**400)) == math.inf
    assert to_float(Fraction(-(10**400))) == -math.inf
    assert to_float(exp_number(1000 * ROOT_2)) == math.inf


def test_an_unstated_factor_decides_nothing_but_its_own_sign() -> None:
    """The base of a bare log is positive, so what all parts agree on holds for every base."""
    base = symbol(BASE)
    assert sign(base) == 1
    assert sign(-3 * base) == -1
    assert sign(base * LN_2 + base * base + 1) == 1
    assert sign((-1 - base) / (LN_2 + base)) == -1
    with pytest.raises(Undecidable, match=r"^which of two parts is larger depends on a factor that is not stated$"):
        sign(base - 1)
    with pytest.raises(Undecidable, match=r"^a factor that is not stated matters here$"):
        to_float(base)
    bounded = symbol(Symbol("some", None, "1"))
    assert sign(bounded) == 1
    with pytest.raises(Undecidable):
        sign(bounded - base)


def test_equal_numbers_without_a_proof_are_not_called_equal() -> None:
    """sqrt(2 + sqrt(3)) = (sqrt(2) + sqrt(6)) / 2, which no rule here knows; nor is it called smaller or larger."""
    left = power_number(2 + ROOT_3, Fraction(1, 2))
    right = (ROOT_2 + power_number(Fraction(6), Fraction(1, 2))) / 2
    with pytest.raises(Undecidable, match="agree to 150 digits, but their equality could not be proved"):
        compare_numbers(left, right)


def test_a_number_too_large_to_be_rounded_is_refused() -> None:
    assert floor_number(2**49 * ROOT_2) == math.isqrt(2**99)
    for x in (2**50 * ROOT_2, -(2**50) * ROOT_2):
        with pytest.raises(Undecidable, match=r"^a number here is too large to be rounded$"):
            floor_number(x)
