"""Critical exponents and characteristic roots, against mpmath and by what defines them."""

from __future__ import annotations

import math
from decimal import Decimal
from fractions import Fraction

import mpmath
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from pytest_growthbudget.bounds import roots
from pytest_growthbudget.bounds.enclosure import compare_numbers, enclose, to_float
from pytest_growthbudget.bounds.exact import (
    ONE,
    ZERO,
    Number,
    Real,
    Undecidable,
    exp_number,
    ln_fraction,
    power_number,
)
from pytest_growthbudget.bounds.roots import Equation

COMMON = settings(max_examples=50, deadline=None, derandomize=True)
COEFFICIENTS = st.fractions(min_value=Fraction(1, 1000), max_value=10**6, max_denominator=1000)
LN_2, LN_3, LN_5, LN_10_7 = (ln_fraction(Fraction(x)) for x in ("2", "3", "5", "10/7"))


def characteristic(*terms: tuple[int | Fraction, int]) -> Equation:
    """x^K = Σ a x^(K-k), as an equation for ln x."""
    return Equation(tuple((Fraction(a), Fraction(k)) for a, k in terms))


def _left(equation: Equation, x: float) -> float:
    return math.fsum(float(a) * math.exp(-to_float(w) * x) for a, w in equation.terms)


@COMMON
@given(st.lists(st.tuples(COEFFICIENTS, st.integers(1, 60)), min_size=1, max_size=4, unique_by=lambda t: t[1]))
def test_the_approximate_root_solves_its_equation(terms: list[tuple[Fraction, int]]) -> None:
    """Roots far below and above 0 alike."""
    equation = characteristic(*terms)
    assert _left(equation, equation.approximate()) == pytest.approx(1.0, rel=1e-9)


EQUATIONS = [
    characteristic((1, 1), (1, 2)),
    characteristic((1, 1), (1, 2), (1, 3)),
    characteristic((Fraction(1, 2), 1), (Fraction(1, 3), 2)),
    characteristic((10**6, 7), (1, 40)),
    characteristic((10**200, 7), (1, 40)),
    characteristic((Fraction(1, 10**6), 1), (Fraction(1, 10**6), 3)),
    roots.equation([(ONE, LN_5), (ONE, LN_10_7)]),
    roots.equation([(Fraction(2), LN_2), (Fraction(8, 9), ln_fraction(Fraction(4, 3)))]),
    roots.equation([(ONE, LN_2 / LN_3), (Fraction(3), LN_5)]),
]


@pytest.mark.parametrize("equation", EQUATIONS, ids=[e.key[:60] for e in EQUATIONS])
@pytest.mark.parametrize("digits", [25, 60, 150])
def test_the_root_lies_in_its_enclosure(equation: Equation, digits: int) -> None:
    """The left side falls through 1 between the ends, which are close to one another."""
    low, high = equation.enclose(digits)
    assert 0 < high - low < abs(low) * Decimal(10) ** (6 - digits)
    with mpmath.workdps(digits + 40):
        weights = [(mpmath.mpf(a.numerator) / a.denominator, _mean(w, digits + 30)) for a, w in equation.terms]
        at_low, at_high = (
            mpmath.fsum(a * mpmath.exp(-w * mpmath.mpf(str(x))) for a, w in weights) for x in (low, high)
        )
        assert at_high < 1 < at_low


def _mean(x: Number, digits: int) -> mpmath.mpf:
    return sum(mpmath.mpf(str(end)) for end in enclose(x, digits)) / 2


@pytest.mark.parametrize("equation", EQUATIONS, ids=[e.key[:60] for e in EQUATIONS])
def test_the_left_side_lies_in_its_enclosure(equation: Equation) -> None:
    """Over a wide interval: it falls, so its largest value is at the lower end."""
    low, high = (enclose(Fraction(x), 40) for x in ("0.3", "0.7"))
    found = equation.sum_at((low[0], high[1]), 40)
    with mpmath.workdps(60):
        terms = [(mpmath.mpf(a.numerator) / a.denominator, _mean(w, 50)) for a, w in equation.terms]
        for end, x in zip(found, ("0.7", "0.3"), strict=True):
            value = mpmath.fsum(a * mpmath.exp(-w * mpmath.mpf(x)) for a, w in terms)
            assert abs(mpmath.mpf(str(end)) - value) < value * mpmath.mpf(10) ** -36
    assert found[0] < found[1]


GOLDEN = characteristic((1, 1), (1, 2))
TRIBONACCI = characteristic((1, 1), (1, 2), (1, 3))


@pytest.mark.parametrize(
    ("a", "b", "same"),
    [
        (GOLDEN, characteristic((2, 2), (1, 3)), True),  # (x + 1)(x^2 - x - 1)
        (GOLDEN, characteristic((3, 2), (2, 1), (3, 3), (1, 4)), False),
        (TRIBONACCI, characteristic((2, 2), (2, 3), (1, 4)), True),  # (x + 1)(x^3 - x^2 - x - 1)
        (characteristic((2, 2), (1, 3)), characteristic((3, 2), (2, 3)), False),  # x + 1 alone in common; roots φ and 2
        (characteristic((Fraction(1, 2), 1), (Fraction(1, 2), 2)), characteristic((1, 3)), True),
        (characteristic((4, 2)), characteristic((1, 1), (2, 2)), True),  # (x + 2)(x - 2), (x + 1)(x - 2)
        (GOLDEN, TRIBONACCI, False),
        (GOLDEN, roots.equation([(ONE, LN_2), (ONE, LN_3)]), False),
        (roots.equation([(ONE, LN_2), (ONE, LN_3)]), GOLDEN, False),
        (GOLDEN, Equation(((ONE, Fraction(1, 2)), (ONE, ONE))), False),
        (characteristic((1, 40)), characteristic((1, 39)), True),
        (characteristic((1, 41)), characteristic((1, 39)), False),  # not looked at: the degree is above 40
    ],
)
def test_equations_share_their_root_where_a_common_factor_has_it(a: Equation, b: Equation, same: bool) -> None:
    assert a.same_root(b) is same
    assert b.same_root(a) is same


@pytest.mark.parametrize(
    ("terms", "x", "expected"),
    [
        ([(1, LN_2), (1, LN_2)], ONE, 0),
        ([(1, LN_3), (1, ln_fraction(Fraction(3, 2)))], ONE, 0),
        ([(1, LN_3), (1, ln_fraction(Fraction(3, 2)))], Fraction(999_999, 10**6), 1),
        ([(1, LN_3), (1, ln_fraction(Fraction(3, 2)))], Fraction(1_000_001, 10**6), -1),
        ([(3, LN_2)], LN_3 / LN_2, 0),
        ([(1, Fraction(1)), (1, Fraction(2))], roots.solve([(ONE, ONE), (ONE, Fraction(2))]), 0),
        ([(1, LN_5), (1, LN_10_7)], roots.solve([(ONE, LN_5), (ONE, LN_10_7)]), 0),
        ([(1, LN_5), (1, LN_10_7)], LN_2, 1),
        ([(1, LN_5), (1, LN_10_7)], LN_3, -1),
    ],
)  # fmt: skip
def test_order_tells_on_which_side_of_a_number_the_root_lies(
    terms: list[tuple[int, Number]], x: Number, expected: int
) -> None:
    assert roots.order(roots.equation([(Fraction(a), w) for a, w in terms]), x) == expected


def test_an_exponent_that_agrees_to_150_digits_is_not_called_equal() -> None:
    equation = roots.equation([(ONE, LN_5), (ONE, LN_10_7)])
    near = Fraction(equation.enclose(200)[0])
    with pytest.raises(Undecidable) as caught:
        roots.order(equation, near)
    assert str(caught.value) == (
        "a critical exponent agrees with the toll's to 150 digits, but no proof of equality was found"
    )


@pytest.mark.parametrize(
    ("terms", "expected"),
    [
        ([(7, LN_2)], ln_fraction(Fraction(7)) / LN_2),
        ([(1, LN_3), (1, ln_fraction(Fraction(3, 2)))], ONE),
        ([(Fraction(1, 4), LN_2), (Fraction(3, 4), LN_5)], ZERO),
        ([(2, 2 * LN_2), (3, LN_2 + LN_3)], ONE),
        ([(1, LN_2), (2, 2 * LN_2)], ONE),
        ([(1, Fraction(1)), (6, Fraction(2))], LN_3),
        ([(1, Fraction(1, 2)), (6, ONE)], 2 * LN_3),
        ([(Fraction(1, 6), ONE), (Fraction(1, 6), Fraction(2))], -LN_2),
        ([(Fraction(2), LN_2), (Fraction(8, 9), ln_fraction(Fraction(4, 3)))], Fraction(2)),
        ([(1, LN_2), (1, LN_2), (2, LN_2)], Fraction(2)),
    ],
)
def test_roots_with_a_closed_form_have_it(terms: list[tuple[int | Fraction, Number]], expected: Number) -> None:
    assert roots.solve([(Fraction(a), w) for a, w in terms]) == expected


@COMMON
@given(
    st.lists(
        st.tuples(st.fractions(min_value=Fraction(1, 9), max_value=9, max_denominator=9), st.integers(2, 60)),
        min_size=1,
        max_size=3,
        unique_by=lambda t: t[1],
    )
)
def test_every_root_solves_its_equation(terms: list[tuple[Fraction, int]]) -> None:
    """Whatever form it has."""
    weights = [(a, ln_fraction(Fraction(b))) for a, b in terms]
    p = to_float(roots.solve(weights))
    assert math.fsum(float(a) * b**-p for a, b in terms) == pytest.approx(1.0, rel=1e-9)


SURDS = [
    (Fraction(1, 2), Fraction(1, 2), 5, True),
    (ONE, ONE, 2, True),
    (ONE, Fraction(1, 3), 7, False),
    (Fraction(2), ONE, 3, False),
    (Fraction(-1), ONE, 3, False),
    (ONE, Fraction(2), 6, True),
]


@pytest.mark.parametrize(("u", "v", "d", "root"), SURDS)
def test_the_logarithm_of_a_surd_is_that_of_a_characteristic_root(u: Fraction, v: Fraction, d: int, root: bool) -> None:
    """ln(u + v sqrt(d)): a root where its quadratic has positive coefficients, so that equal growths look alike."""
    x = u + v * power_number(Fraction(d), Fraction(1, 2))
    found = roots.ln_with_surds(x)
    assert to_float(found) == pytest.approx(math.log(u + v * math.sqrt(d)), rel=1e-14)
    assert isinstance(found, Real)
    kinds = {symbol.kind for mono in found.num for symbol, _ in mono}
    assert kinds == ({"root"} if root else {"lnof"})
    if root:
        assert found == roots.growth_rate(((2 * u, 1), (v * v * d - u * u, 2)))


def test_the_golden_ratio_is_one_number_however_it_comes_about() -> None:
    """From Fibonacci's recurrence, from its surd, and as e to its own logarithm."""
    surd = (1 + power_number(Fraction(5), Fraction(1, 2))) / 2
    rate = roots.growth_rate(((ONE, 1), (ONE, 2)))
    assert roots.ln_with_surds(surd) == rate
    assert compare_numbers(exp_number(rate), Fraction(1618, 1000)) == 1
    assert compare_numbers(exp_number(rate), Fraction(1619, 1000)) == -1
