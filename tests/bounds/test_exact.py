"""Exact numbers: the laws of arithmetic hold formally, and every value is that of mpmath."""

from __future__ import annotations

import math
import pickle
from fractions import Fraction

import mpmath
import pytest
from hypothesis import assume, given, settings
from hypothesis import strategies as st

from pytest_growthbudget.bounds.enclosure import to_float
from pytest_growthbudget.bounds.exact import (
    BASE,
    EULER,
    ONE,
    ZERO,
    Number,
    Real,
    Symbol,
    Undecidable,
    common_measure,
    depends_on,
    exp_number,
    factor,
    integer_root,
    is_large,
    ln_fraction,
    ln_number,
    number_key,
    perfect_power,
    power_number,
    symbol,
)
from pytest_growthbudget.bounds.roots import growth_rate

COMMON = settings(max_examples=50, deadline=None, derandomize=True)
FRACTIONS = st.fractions(min_value=-9, max_value=9, max_denominator=6)
EXPONENTS = st.sampled_from([Fraction(x) for x in ("1/2", "-1/2", "1/3", "5/3", "2", "-3")])


@st.composite
def numbers(draw: st.DrawFn) -> Number:
    """A rational combination of products of constants."""
    total: Number = draw(FRACTIONS)
    for _ in range(draw(st.integers(0, 2))):
        part: Number = draw(FRACTIONS)
        for _ in range(draw(st.integers(1, 2))):
            prime = Fraction(draw(st.sampled_from([2, 3, 6])))
            constant = draw(st.sampled_from([ln_fraction(prime), symbol(EULER), prime, ln_number(ln_fraction(prime))]))
            part = part * (power_number(constant, draw(EXPONENTS)) if constant == prime else constant)
        total = total + part
    return total


@COMMON
@given(numbers(), numbers(), numbers())
def test_the_laws_of_arithmetic_hold_formally(a: Number, b: Number, c: Number) -> None:
    """No rounding: equal by cancellation, however the sides were reached."""
    assert a + b == b + a
    assert a * b == b * a
    assert (a + b) + c == a + (b + c)
    assert (a + b) * c == a * c + b * c
    assert a - a == ZERO
    assert (a + b) - b == a
    assert a - b == -(b - a)
    assert 0 + a == a + 0 == 1 * a == a * 1 == a / 1 == a
    assert 2 - a == -(a - 2)
    assert a * 0 == 0 * a == ZERO
    if b:
        assert b / b == ONE
        assert 0 / b == ZERO
        assert a * b / b - a == ZERO
        assert 3 / b * b - 3 == ZERO
        assert a / b + c / b - (a + c) / b == ZERO


@COMMON
@given(numbers(), numbers())
def test_arithmetic_has_the_values_of_floats(a: Number, b: Number) -> None:
    x, y = to_float(a), to_float(b)
    assert to_float(a + b) == pytest.approx(x + y, rel=1e-9, abs=1e-9)
    assert to_float(a - b) == pytest.approx(x - y, rel=1e-9, abs=1e-9)
    assert to_float(a * b) == pytest.approx(x * y, rel=1e-9, abs=1e-9)
    if b and abs(y) > 1e-6:
        assert to_float(a / b) == pytest.approx(x / y, rel=1e-9, abs=1e-9)


@COMMON
@given(numbers(), numbers())
def test_equal_numbers_have_one_key_and_hash_and_others_have_not(a: Number, b: Number) -> None:
    again = (a + b) - b
    assert (number_key(again), hash(again)) == (number_key(a), hash(a))
    assert (number_key(a) == number_key(b)) == (a == b)
    assert pickle.loads(pickle.dumps(a)) == a


@COMMON
@given(st.fractions(min_value=Fraction(1, 500), max_value=500, max_denominator=500), FRACTIONS)
def test_powers_of_rationals_multiply_and_undo(x: Fraction, exponent: Fraction) -> None:
    raised = power_number(x, exponent)
    assert to_float(raised) == pytest.approx(float(x) ** float(exponent), rel=1e-12)
    assert raised * power_number(x, 1 - exponent) == x
    assert raised * power_number(x, -exponent) == ONE
    if exponent:
        assert power_number(raised, 1 / exponent) == x
    assert ln_number(raised) == exponent * ln_fraction(x)
    assert exp_number(ln_number(raised)) == raised
    assert power_number(symbol(EULER), exponent) == exp_number(exponent)
    assert ln_number(exp_number(exponent)) == exponent


@COMMON
@given(numbers())
def test_logarithm_and_exponential_undo_each_other(a: Number) -> None:
    assume(abs(to_float(a)) < 50)
    raised = exp_number(a)
    assert to_float(raised) == pytest.approx(math.exp(to_float(a)), rel=1e-12)
    assert ln_number(raised) == a
    if to_float(a) > 1e-6:
        assert to_float(ln_number(a)) == pytest.approx(math.log(to_float(a)), rel=1e-9, abs=1e-9)
        assert exp_number(ln_number(a)) == a
        assert exp_number(-2 * ln_number(a)) == ONE / (a * a)


def test_roots_of_one_number_cancel_and_roots_of_others_do_not() -> None:
    half = Fraction(1, 2)
    root_2, root_3, root_6 = (power_number(Fraction(x), half) for x in (2, 3, 6))
    assert root_2 * root_3 == root_6
    assert root_2 * root_2 == 2
    assert power_number(Fraction(8), half) == 2 * root_2
    assert power_number(Fraction(1, 2), half) == root_2 / 2
    assert power_number(Fraction(2), Fraction(7, 2)) == 8 * root_2
    assert root_2 != root_3
    assert (root_2 + 1) * (root_2 - 1) == 1
    assert (2 * root_2 + 2 * root_3) / (root_2 + root_3) == 2
    assert (root_2 + root_3) / (root_2 - root_3) != -1
    assert power_number(root_2 + 1, Fraction(2)) == 3 + 2 * root_2
    assert power_number(root_2 + 1, Fraction(0)) == ONE
    with pytest.raises(ZeroDivisionError):
        ONE / (root_2 - root_2)
    with pytest.raises(ZeroDivisionError):
        root_2 / 0


def _product(parts: tuple[tuple[int, int], ...]) -> int:
    return math.prod(p**k for p, k in parts)


@COMMON
@given(st.integers(1, 10**6) | st.integers(1, 10**30))
def test_factors_multiply_to_the_number_and_are_no_powers(n: int) -> None:
    """Primes up to 1000 apart from one another; the rest is no power of anything."""
    parts = factor(n)
    assert _product(parts) == n
    assert len({p for p, _ in parts}) == len(parts)
    for p, k in parts:
        assert k >= 1
        assert perfect_power(p) == (p, 1)
        assert all(p == d or p % d for d in range(2, 1000))


@pytest.mark.parametrize("n", [1, 2, 4, 997, 997**2, 1009, 1009**2, 1009**5, 1009 * 1013, (1009 * 1013) ** 3, 2**64])
def test_factors_are_as_small_as_can_be_found(n: int) -> None:
    for power in (1, 2, 3):
        assert factor(n**power) == tuple((p, k * power) for p, k in factor(n))


@COMMON
@given(st.integers(0, 10**40), st.integers(2, 12))
def test_integer_roots_are_the_largest(n: int, k: int) -> None:
    r = integer_root(n, k)
    assert r**k <= n < (r + 1) ** k
    assert integer_root(n**k, k) == n


@COMMON
@given(st.sampled_from([1009, 1013, 1009 * 1013, 10_007, 2**61 - 1]), st.integers(1, 30))
def test_a_perfect_power_is_taken_apart_whole(root: int, k: int) -> None:
    """Of numbers without primes below 1000, which are divided out before."""
    base, exponent = perfect_power(root**k)
    assert base**exponent == root**k
    assert exponent == k


def test_small_perfect_powers_are_taken_apart_whole() -> None:
    for n in range(2, 1100):
        base, exponent = perfect_power(n)
        assert base**exponent == n
        assert not any(r**k == n for k in range(exponent + 1, 11) for r in range(2, 34))


@COMMON
@given(st.lists(st.fractions(min_value=Fraction(1, 60), max_value=60, max_denominator=60), min_size=1, max_size=4))
def test_the_common_measure_is_the_largest(weights: list[Fraction]) -> None:
    measure = common_measure(weights)
    counts = [w / measure for w in weights]
    assert all(count.denominator == 1 for count in counts)
    assert math.gcd(*(count.numerator for count in counts)) == 1


ROOT = growth_rate(((ONE, 1), (ONE, 2), (ONE, 3)))


def test_what_a_number_depends_on_is_found_inside_logarithms_and_exponentials() -> None:
    base = symbol(BASE)
    for x in (base, base + 1, 1 / (1 + base), ln_number(base + 1), exp_number(base * ln_fraction(Fraction(2)))):
        assert depends_on(x, ("base", "some"))
        assert not depends_on(x, ("root",))
    assert depends_on(exp_number(ROOT), ("root",))
    assert not depends_on(Fraction(1), ("base",))
    assert not depends_on(ln_fraction(Fraction(2)), ("base",))


def test_large_integers_are_found_wherever_they_are() -> None:
    big = 2**99
    large: list[Number] = [
        Fraction(big),
        Fraction(-big),
        Fraction(1, big),
        big * ln_fraction(Fraction(2)),
        1 / (ln_fraction(Fraction(2)) + Fraction(1, big)),
        power_number(symbol(EULER), Fraction(1, big)),
        ln_fraction(Fraction(2**127 - 1)),
        power_number(Fraction(2**127 - 1), Fraction(1, 2)),
        ln_number(ln_fraction(Fraction(2**127 - 1))),
        exp_number(big * ln_number(ln_fraction(Fraction(2))) / 3),
        growth_rate(((Fraction(big), 1), (ONE, 3))),
    ]
    for x in large:
        assert is_large(x, 99)
        assert not is_large(x, 130)
    assert not is_large(Fraction(big), 100)
    for x in (ONE, ln_fraction(Fraction(2)), ROOT, symbol(BASE), exp_number(ROOT / 2)):
        assert not is_large(x, 50)


@pytest.mark.parametrize(
    ("base", "exponent"),
    [
        (Fraction(2**100), Fraction(64)),
        (Fraction(1, 2**100), Fraction(64)),
        (Fraction(2), Fraction(10001, 2)),
        (Fraction(2), Fraction(-10001, 2)),
    ],
)
def test_powers_of_thousands_of_digits_are_refused(base: Fraction, exponent: Fraction) -> None:
    with pytest.raises(Undecidable, match=r"^a number here is too large$"):
        power_number(base, exponent)


def test_powers_just_below_that_are_exact() -> None:
    assert power_number(Fraction(2**50), Fraction(64)) == 2**3200
    assert power_number(Fraction(2), Fraction(2001, 2)) == 2**1000 * power_number(Fraction(2), Fraction(1, 2))


def test_products_of_too_many_parts_are_refused() -> None:
    long = sum((ln_fraction(Fraction(p)) for p in (2, 3, 5, 7, 11, 13, 17)), start=ONE)
    square = long * long
    with pytest.raises(Undecidable, match=r"^a number here has too many parts$"):
        square * square * square


def test_numbers_of_one_kind_differ_by_their_key_and_keep_an_order() -> None:
    ln_2, ln_3, rad_2 = Symbol("ln", 2, "2"), Symbol("ln", 3, "3"), Symbol("rad", 2, "2")
    assert sorted([rad_2, ln_3, ln_2]) == [ln_2, ln_3, rad_2]
    assert Symbol("ln", 2, "2") == Symbol("ln", None, "2") != Symbol("ln", 2, "3")
    assert isinstance(symbol(EULER), Real)
    assert repr(symbol(EULER)).startswith("Real({")


def test_the_value_of_each_kind_of_constant() -> None:
    with mpmath.workdps(30):
        for x, expected in (
            (ln_fraction(Fraction(8, 9)), mpmath.log(mpmath.mpf(8) / 9)),
            (symbol(EULER, Fraction(1, 2)), mpmath.exp(0.5)),
            (symbol(Symbol("rad", 5, "5"), Fraction(-7, 3)), mpmath.mpf(5) ** (mpmath.mpf(-7) / 3)),
        ):
            assert to_float(x) == pytest.approx(float(expected), rel=1e-15)
