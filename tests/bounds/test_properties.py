"""Properties: a partial order, printing and reading as inverses, and no exception but BoundError."""

from __future__ import annotations

from fractions import Fraction

import pytest
from hypothesis import assume, given, settings
from hypothesis import strategies as st

from pytest_growthbudget.bounds.budget import Budget, compare, from_recurrence, parse_budget
from pytest_growthbudget.bounds.derivation import Unsolved
from pytest_growthbudget.bounds.exact import Undecidable
from pytest_growthbudget.bounds.growth import Factor
from pytest_growthbudget.bounds.language import BoundError
from pytest_growthbudget.bounds.recurrence import Decrease, Ratio, Recurrence

COMMON = settings(max_examples=150, deadline=None, derandomize=True)
POWERS = st.sampled_from(["0", "1", "2", "0.5", "1.5", "(1/3)", "log2(3)", "-1", "2.0000001", "(log2(7) - 1)"])


@st.composite
def products(draw: st.DrawFn, name: str = "n") -> str:
    """Texts of single products c^n n^p log^q n (log log n)^r n!^s."""
    base = draw(st.sampled_from(["1", "2", "1.5", "0.5", "((1+sqrt(5))/2)", "sqrt(2)", "exp(1)"]))
    factorial = draw(st.sampled_from(["0", "0", "0", "1", "2", "0.5"]))
    p, q, r = draw(POWERS), draw(POWERS), draw(POWERS)
    return f"{base}^{name} * ({name}!)^{factorial} * {name}^{p} * (log {name})^{q} * (log log {name})^{r}"


@st.composite
def expressions(draw: st.DrawFn, depth: int = 3) -> str:
    """Texts from a loose grammar; many have no growth."""
    if depth == 0:
        return draw(st.sampled_from(["n", "m", "2", "0.5", "7", "log n", "n!"]))
    a, b = draw(expressions(depth=depth - 1)), draw(expressions(depth=depth - 1))
    shape = draw(
        st.sampled_from(
            ["{a} + {b}", "{a} - {b}", "({a}) * ({b})", "({a}) / ({b})", "({a})^({b})", "log({a})", "sqrt({a})",
             "2^({a})", "floor({a})", "O({a})", "({a})!", "max({a}, {b})", "exp({a})", "({a})^1.5", "{a} {b}", "{a}"]
        )
    )  # fmt: skip
    return shape.format(a=a, b=b)


def _answer(text: str) -> Budget | BoundError:
    try:
        return parse_budget(text)
    except BoundError as fault:
        return fault


@COMMON
@given(products())
def test_print_and_parse_are_inverse(text: str) -> None:
    """What is printed reads back to the same exact growth, and prints the same again."""
    budget = parse_budget(text)
    again = parse_budget(budget.theta)
    assert again.growth.monomials == budget.growth.monomials
    assert again.theta == budget.theta


@COMMON
@given(products(), products(), products())
def test_order_is_total_on_one_size(a: str, b: str, c: str) -> None:
    """Reflexive, antisymmetric, transitive, and never undecided between products of one size."""
    rank = {"slower": -1, "same": 0, "faster": 1}
    assert compare(a, a) == "same"
    ab, ba, bc, ac = (rank[compare(x, y)] for x, y in ((a, b), (b, a), (b, c), (a, c)))
    assert ab == -ba
    if ab <= 0 and bc <= 0:
        assert ac <= 0
        assert (ac == 0) == (ab == 0 and bc == 0)


@COMMON
@given(products(), products())
def test_products_respect_the_order(a: str, b: str) -> None:
    """Multiplying both sides by n log n changes nothing; a sum grows like its larger part."""
    relation = compare(a, b)
    assert compare(f"n * log n * ({a})", f"n * log n * ({b})") == relation
    assert compare(f"({a}) + ({b})", b if relation == "slower" else a) == "same"


@COMMON
@given(st.lists(products("n") | products("m") | st.just("n m"), min_size=1, max_size=3))
def test_sums_of_two_sizes_read_back(parts: list[str]) -> None:
    """Sums that stay sums print and read back, and are of the same growth in any order."""
    text = " + ".join(parts)
    try:
        budget = parse_budget(text)
    except BoundError:
        assume(False)
        raise
    assert parse_budget(budget.theta).growth.monomials == budget.growth.monomials
    assert compare(budget.theta, " + ".join(reversed(parts))) == "same"


@COMMON
@given(expressions())
def test_loose_grammar_raises_nothing_else(text: str) -> None:
    """An answer that reads back, or BoundError with a place inside the text."""
    budget = _answer(text)
    if isinstance(budget, BoundError):
        assert budget.position is not None
        assert 0 <= budget.position <= len(text)
        assert budget.message in str(budget)
    else:
        assert parse_budget(budget.theta).growth.monomials == budget.growth.monomials


@COMMON
@given(st.text(alphabet="nmT0123456789.+-*/^!(){}=,;:|√⌈⌉²ⁿ·ΘOlogsqrt '[]_Ωп\n", max_size=40) | st.text(max_size=30))
def test_noise_raises_nothing_else(text: str) -> None:
    """Random characters are answered or refused."""
    budget = _answer(text)
    assert str(budget)


RATIOS = st.fractions(min_value=Fraction(1, 20), max_value=Fraction(19, 20), max_denominator=20)
COEFFICIENTS = st.fractions(min_value=Fraction(1, 10), max_value=10, max_denominator=10)
EXPONENTS = st.fractions(min_value=-2, max_value=4, max_denominator=4)


@COMMON
@given(
    st.lists(st.tuples(COEFFICIENTS, RATIOS), min_size=1, max_size=3, unique_by=lambda t: t[1]), EXPONENTS, EXPONENTS
)
def test_akra_bazzi_exponent_solves_its_equation(
    terms: list[tuple[Fraction, Fraction]], power: Fraction, log: Fraction
) -> None:
    """Σ a b^p = 1 at the critical exponent, and the growth lies on the side that the toll's exponent says."""
    toll = Factor(power=power, log=log)
    try:
        budget = from_recurrence(Recurrence.of([(a, Ratio(b)) for a, b in terms], toll))
    except (Unsolved, Undecidable):
        assume(False)
        raise
    at_toll = sum(float(a) * float(b) ** float(power) for a, b in terms)
    (found,) = (next(iter(t.values())) for t in budget.terms())
    if at_toll < 1 - 1e-9:
        assert found["power"] == pytest.approx(float(power))
        assert found["log"] == pytest.approx(float(log))
    elif at_toll > 1 + 1e-9:
        assert sum(float(a) * float(b) ** found["power"] for a, b in terms) == pytest.approx(1.0)
        assert found["log"] == 0
    else:
        assert found["power"] == pytest.approx(float(power))


@COMMON
@given(
    st.lists(st.tuples(COEFFICIENTS, st.integers(1, 5)), min_size=1, max_size=3, unique_by=lambda t: t[1]),
    st.sampled_from([None, Fraction(0), Fraction(2)]),
)
def test_characteristic_root_solves_its_equation(terms: list[tuple[Fraction, int]], power: Fraction | None) -> None:
    """Σ a ρ^-k = 1 for the base of a homogeneous solution above 1."""
    toll = None if power is None else Factor(power=power)
    budget = from_recurrence(Recurrence.of([(a, Decrease(Fraction(k))) for a, k in terms], toll))
    (found,) = (next(iter(t.values())) for t in budget.terms())
    total = sum(a for a, _ in terms)
    if total > 1 or toll is None:
        assert sum(float(a) * found["exp_base"] ** -k for a, k in terms) == pytest.approx(1.0)
        assert found["power"] == 0
    else:
        assert found["exp_base"] == 1
        assert found["power"] == float(power or 0) + (1 if total == 1 else 0)


@COMMON
@given(products(), st.integers(1, 10**6), st.integers(1, 10**6))
def test_log_growth_is_a_number(text: str, n: int, k: int) -> None:
    """Finite at ordinary sizes, and additive over products."""
    budget = parse_budget(text)
    value = budget.log_growth(dict.fromkeys(budget.variables, n))
    assert value == value
    assert abs(value) < 1e9
    assert parse_budget(f"({text}) * 1").log_growth(dict.fromkeys(budget.variables, k)) == pytest.approx(
        budget.log_growth(dict.fromkeys(budget.variables, k))
    )
