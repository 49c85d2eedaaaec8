"""Bounds and recurrences against outside sources: textbooks, papers, sympy and mpmath.

CLRS: Cormen, Leiserson, Rivest, Stein, Introduction to Algorithms, 3rd ed., 2009. Page numbers are left out where they
were not at hand; "[from memory]" marks a source quoted without it before us.
"""

from __future__ import annotations

import math
from fractions import Fraction

import mpmath
import pytest
import sympy

from pytest_growthbudget.bounds.budget import compare, parse_budget
from pytest_growthbudget.bounds.enclosure import enclose
from pytest_growthbudget.bounds.exact import ln_fraction
from pytest_growthbudget.bounds.growth import Factor
from pytest_growthbudget.bounds.roots import solve
from pytest_growthbudget.bounds.tables import evaluate

NAMED = {
    # Strassen, Numer. Math. 13 (1969) 354-356 [from memory]
    "Strassen": ("T(n) = 7 T(n/2) + n^2", "n^log2(7)"),
    # Karatsuba and Ofman, Doklady 145 (1962) 293-294 [from memory]
    "Karatsuba": ("T(n) = 3 T(n/2) + n", "n^log2(3)"),
    # Toom 1963, Cook 1966; Knuth, TAOCP 2, 4.3.3 [from memory]
    "Toom-3": ("T(n) = 5 T(n/3) + n", "n^log3(5)"),
    "Toom-4": ("T(n) = 7 T(n/4) + n", "n^log4(7)"),
    # CLRS problem 7-3
    "Stooge sort": ("T(n) = 3 T(2n/3) + 1", "n^(log(3)/log(1.5))"),
    # Blum, Floyd, Pratt, Rivest, Tarjan, JCSS 7 (1973) 448-461 [from memory]; CLRS 9.3
    "median of medians": ("T(n) = T(ceil(n/5)) + T(7n/10 + 6) + O(n)", "n"),
    "median of medians, groups of 3": ("T(n) = T(n/3) + T(2n/3) + O(n)", "n log n"),
    # CLRS exercise 2.3-5
    "binary search": ("T(n) = T(n/2) + 1", "log n"),
    "merge sort": ("T(n) = T(floor(n/2)) + T(ceil(n/2)) + n - 1", "n log n"),
    # Lucas 1883: 2^n - 1 moves (common practice)
    "towers of Hanoi": ("T(n) = 2 T(n-1) + 1", "2^n"),
    # Binet's formula (common practice)
    "naive Fibonacci": ("T(n) = T(n-1) + T(n-2) + 1", "((1 + sqrt(5))/2)^n"),
    # Lee and Wong, Acta Informatica 9 (1977) 23-29: partial match and range in a 2-d tree, O(sqrt n) [from memory]
    "k-d tree search, 2 dimensions": ("T(n) = 2 T(n/4) + 1", "sqrt(n)"),
    "k-d tree search, 3 dimensions": ("T(n) = 4 T(n/8) + 1", "n^(2/3)"),
    # Cooley and Tukey 1965 (common practice)
    "fast Fourier transform": ("T(n) = 2 T(n/2) + n", "n log n"),
    # CLRS 7.2
    "quicksort, worst case": ("T(n) = T(n-1) + n", "n^2"),
    "quicksort, 9 to 1 splits": ("T(n) = T(9n/10) + T(n/10) + n", "n log n"),
    # CLRS 4.4: recursion tree of an uneven split
    "recursion tree of CLRS 4.4": ("T(n) = 3 T(n/4) + n^2", "n^2"),
    # CLRS 4.3: changing variables
    "changing variables": ("T(n) = 2 T(floor(sqrt(n))) + lg n", "log n log log n"),
    # CLRS problem 4-3 and 4-1
    "CLRS 4-3 b": ("T(n) = 3 T(n/3) + n/lg n", "n log log n"),
    "CLRS 4-3 f": ("T(n) = T(n/2) + T(n/4) + T(n/8) + n", "n"),
    "CLRS 4-3 g": ("T(n) = T(n-1) + 1/n", "log n"),
    "CLRS 4-3 h": ("T(n) = T(n-1) + lg n", "n log n"),
    "CLRS 4-3 i": ("T(n) = T(n-2) + 1/lg n", "n / log n"),
    "CLRS 4-3 j": ("T(n) = sqrt(n) T(sqrt(n)) + n", "n log log n"),
    "CLRS 4-1 e": ("T(n) = 7 T(n/2) + n^2", "n^log2(7)"),
    "CLRS 4-1 f": ("T(n) = 2 T(n/4) + sqrt(n)", "sqrt(n) log n"),
    # CLRS exercise 4.6-2: the log^k extension of case 2
    "CLRS 4.6-2": ("T(n) = 4 T(n/2) + n^2 lg^3 n", "n^2 log^4 n"),
    # Lehman, Leighton, Meyer, Mathematics for Computer Science, the Akra-Bazzi examples [from memory]
    "Akra-Bazzi example": ("T(n) = 2 T(n/2) + 8/9 T(3n/4) + n^2", "n^2 log n"),
    # heap construction, Floyd 1964; sift-down along one branch (CLRS 6.3)
    "heap construction": ("T(n) = 2 T(n/2) + log n", "n"),
    "sift down": ("T(n) = T(2n/3) + 1", "log n"),
    # permutations by recursion (common practice)
    "all permutations": ("T(n) = n T(n-1) + 1", "n!"),
    # derangements, D(n) ~ n!/e (Euler; common practice)
    "derangements": ("T(n) = (n-1)(T(n-1) + T(n-2))", "n!"),
    # Beigel and Eppstein-like branching: x^3 = x^2 + 1, 1.4656^n (common practice)
    "branching on 1 or 3": ("T(n) = T(n-1) + T(n-3)", "{x: x^3 = x^2 + 1}^n"),
    # van Emde Boas 1975 [from memory]
    "van Emde Boas tree": ("T(n) = T(sqrt(n)) + 1", "log log n"),
    # Harvey and van der Hoeven aside, Schoenhage-Strassen 1971 as a bound
    "Schoenhage-Strassen": ("n log n log log n", "n log n log log n"),
}


@pytest.mark.parametrize("name", NAMED)
def test_named_fact(name: str) -> None:
    """The growth that the literature gives."""
    text, expected = NAMED[name]
    assert compare(text, expected) == "same"


def test_exponents_of_fast_multiplication() -> None:
    """The decimals printed in the literature: 2.80735, 1.58496, 1.46497, 1.40368, 2.70951."""
    for text, value in (
        ("T(n) = 7T(n/2) + n^2", 2.80735),
        ("T(n) = 3T(n/2) + n", 1.58496),
        ("T(n) = 5T(n/3) + n", 1.46497),
        ("T(n) = 7T(n/4) + n", 1.40368),
        ("T(n) = 3T(2n/3) + 1", 2.70951),
    ):
        assert parse_budget(text).terms()[0]["n"]["power"] == pytest.approx(value, abs=5e-6)


# (coefficients and ratios, exponent by bisection to five places)
CRITICAL = [
    ([(1, Fraction(1, 5)), (1, Fraction(7, 10))], 0.83978),
    ([(2, Fraction(1, 4)), (3, Fraction(1, 6))], 1.0),
    ([(2, Fraction(1, 2)), (Fraction(8, 9), Fraction(3, 4))], 2.0),
    ([(1, Fraction(1, 3)), (1, Fraction(2, 3))], 1.0),
    ([(Fraction(7, 4), Fraction(1, 2)), (1, Fraction(3, 4))], 2.0),
    ([(1, Fraction(1, 2)), (1, Fraction(1, 4))], 0.69424),
    ([(1, Fraction(99, 100)), (1, Fraction(1, 100))], 1.0),
    ([(5, Fraction(9, 10)), (1, Fraction(1, 7))], 15.2755318),
    ([(Fraction(1, 10), Fraction(1, 2)), (Fraction(1, 5), Fraction(1, 3))], -1.2230028),
]


@pytest.mark.parametrize(("terms", "rough"), CRITICAL)
def test_critical_exponent_in_60_digits(terms: list[tuple[Fraction, Fraction]], rough: float) -> None:
    """mpmath's root of Σ a b^p = 1 lies in the interval that is claimed to enclose it."""
    p = solve([(Fraction(a), -ln_fraction(b)) for a, b in terms])
    low, high = enclose(p, 60)
    with mpmath.workdps(70):
        parts = [(mpmath.mpf(a.numerator) / a.denominator, mpmath.mpf(b.numerator) / b.denominator)
                 for a, b in ((Fraction(a), b) for a, b in terms)]  # fmt: skip
        root = mpmath.findroot(lambda x: sum(a * b**x for a, b in parts) - 1, rough)
        assert mpmath.mpf(str(low)) - mpmath.mpf(10) ** -50 <= root <= mpmath.mpf(str(high)) + mpmath.mpf(10) ** -50
    assert float(root) == pytest.approx(rough, abs=5e-6)
    assert high - low <= (abs(high) + 1) / 10**40


N = sympy.Symbol("n", integer=True, positive=True)
Y = sympy.Function("y")

# (text, sympy's equation y(n) - ... = 0, initial values); y(n) by rsolve, its limit against the growth by sympy.
SOLVED = [
    ("T(n) = 2 T(n-1) + 1", Y(N) - 2 * Y(N - 1) - 1, {Y(0): 1}),
    ("T(n) = 2 T(n-1) + n", Y(N) - 2 * Y(N - 1) - N, {Y(0): 1}),
    ("T(n) = 2 T(n-1) + 2^n", Y(N) - 2 * Y(N - 1) - 2**N, {Y(0): 1}),
    ("T(n) = 3 T(n-1) + 2^n", Y(N) - 3 * Y(N - 1) - 2**N, {Y(0): 1}),
    ("T(n) = T(n-1) + n^2", Y(N) - Y(N - 1) - N**2, {Y(0): 1}),
    ("T(n) = T(n-1) + 2 T(n-2)", Y(N) - Y(N - 1) - 2 * Y(N - 2), {Y(0): 1, Y(1): 1}),
    ("T(n) = T(n-1) + 2 T(n-2) + 3^n", Y(N) - Y(N - 1) - 2 * Y(N - 2) - 3**N, {Y(0): 1, Y(1): 1}),
    ("T(n) = T(n-1) + T(n-2)", Y(N) - Y(N - 1) - Y(N - 2), {Y(0): 1, Y(1): 1}),
    ("T(n) = 5 T(n-1) + 6 T(n-2)", Y(N) - 5 * Y(N - 1) - 6 * Y(N - 2), {Y(0): 1, Y(1): 1}),
    ("T(n) = n T(n-1)", Y(N) - N * Y(N - 1), {Y(0): 1}),
]


@pytest.mark.parametrize(("text", "equation", "start"), SOLVED, ids=[s[0] for s in SOLVED])
def test_linear_recurrence_against_rsolve(text: str, equation: sympy.Expr, start: dict[sympy.Expr, int]) -> None:
    """sympy's closed form divided by the growth settles at a positive constant between n = 400 and n = 800."""
    closed = sympy.rsolve(equation, Y(N), start)
    assert closed is not None
    budget = parse_budget(text)

    def ratio(n: int) -> float:
        value = sympy.N(closed.subs(N, n), 40)
        log_t = mpmath.log(mpmath.mpf(str(sympy.re(value))))
        return float(log_t) - budget.log_growth({"n": n})

    assert ratio(800) == pytest.approx(ratio(400), abs=0.01)


LIMITS = [
    ("log(n)**3", "log^3 n", "n**sympy.Rational(1, 1000)", "n^0.001"),
    ("n*log(n)**10", "n log^10 n", "n**sympy.Rational(101, 100)", "n^1.01"),
    ("n**100", "n^100", "sympy.Rational(101, 100)**n", "1.01^n"),
    ("n*log(log(n))", "n log log n", "n*log(n)", "n log n"),
    ("n**2/log(n)", "n^2 / log n", "n**2", "n^2"),
    ("2**n*n**3", "2^n n^3", "3**n", "3^n"),
    ("log(log(n))**5", "(log log n)^5", "log(n)", "log n"),
]


@pytest.mark.parametrize(("small", "a", "large", "b"), LIMITS, ids=[f"{x[1]} against {x[3]}" for x in LIMITS])
def test_order_against_limits(small: str, a: str, large: str, b: str) -> None:
    """sympy's limit of the quotient is 0 where the order says slower."""
    n = sympy.Symbol("n", positive=True)
    names = {"n": n, "log": sympy.log, "sympy": sympy}
    quotient = eval(small, names) / eval(large, names)
    assert sympy.limit(quotient, n, sympy.oo) == 0
    assert compare(a, b) == "slower"


def test_stirling_forms() -> None:
    """n^n, (2n)! and n!! in the class, against mpmath's log-gamma at n = 10^6."""
    n = 10**6
    with mpmath.workdps(30):
        for text, exact in (
            ("n^n", n * mpmath.log(n)),
            ("(2n)!", mpmath.loggamma(2 * n + 1)),
            ("(n/2)!", mpmath.loggamma(mpmath.mpf(n) / 2 + 1)),
            ("(2n)!/(n!)^2", mpmath.loggamma(2 * n + 1) - 2 * mpmath.loggamma(n + 1)),
            ("T(n) = n T(n-2)", mpmath.log(2) * n / 2 + mpmath.loggamma(mpmath.mpf(n) / 2 + 1)),
        ):
            assert abs(float(exact) - parse_budget(text).log_growth({"n": n})) < 2.0


def test_cost_of_the_99_to_1_split() -> None:
    """The limit constant of T(n)/(n log2 n) is 1/H with H the split's entropy in bits: 12.4 against 1 for halves."""
    entropy = -(0.99 * math.log2(0.99) + 0.01 * math.log2(0.01))
    assert 1 / entropy == pytest.approx(12.38, abs=0.01)
    toll = Factor(power=Fraction(1))
    values = [evaluate([1.0, 1.0], [0.99, 0.01], toll, 2.0**k) for k in (16, 20)]
    assert values[0] is not None
    assert values[1] is not None
    slope = (values[1] / 2.0**20 - values[0] / 2.0**16) / 4
    assert slope == pytest.approx(1 / entropy, rel=0.4)
