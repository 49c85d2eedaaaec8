"""Budget: evaluation without overflow, rays, order, recurrences from numbers."""

from __future__ import annotations

import math
import pickle
from fractions import Fraction

import pytest

from pytest_growthbudget.bounds.budget import Budget, compare, from_recurrence, parse_budget
from pytest_growthbudget.bounds.derivation import Unsolved
from pytest_growthbudget.bounds.growth import Factor
from pytest_growthbudget.bounds.language import BoundError
from pytest_growthbudget.bounds.recurrence import Decrease, Ratio, Recurrence, Root, Shrink, Term

ONE_VARIABLE = ["1", "log n", "log log n", "n", "n log n", "n^2", "n log log n", "2^n", "n 2^n", "n!", "n^n", "sqrt(n)"]


@pytest.mark.parametrize("text", ONE_VARIABLE)
def test_log_growth_is_defined_at_every_size(text: str) -> None:
    """From 1 to beyond the floats: a number, never a NaN, never an exception."""
    budget = parse_budget(text)
    for n in (1, 1.5, 2, 3, 4, 100, 10**9, 1e300, 10**400):
        assert not math.isnan(budget.log_growth({"n": n}))


@pytest.mark.parametrize("text", ONE_VARIABLE)
def test_log_growth_never_falls(text: str) -> None:
    """Growths that rise in the limit rise from n = 1 on."""
    budget = parse_budget(text)
    values = [budget.log_growth({"n": n}) for n in (1, 2, 3, 4, 5, 8, 16, 17, 100, 1000, 10**6, 10**12)]
    assert values == sorted(values)


@pytest.mark.parametrize(
    ("text", "n", "expected"),
    [
        ("n log n", 1024, math.log(1024 * 10)),
        ("n^2", 1e200, 400 * math.log(10)),
        ("2^n", 1000, 1000 * math.log(2)),
        ("n!", 20, math.lgamma(21)),
        ("n! ", 1e16, 1e16 * (math.log(1e16) - 1)),
        ("n^1.5 / log n", 2**20, 30 * math.log(2) - math.log(20)),
        ("log log n", 2**16, math.log(4)),
        ("1", 7, 0.0),
        ("n log n", 0.25, 0.0),
        ("log n", 2, 0.0),
        ("log log n", 4, 0.0),
        ("log n log log n", 2**16, math.log(64)),
        ("2^n", 10**400, math.inf),
        ("n! / 2^n", 10**400, math.inf),
        ("2^n / n!", 10**400, -math.inf),
    ],
)
def test_log_growth_value(text: str, n: float, expected: float) -> None:
    """Against the formula in plain floats."""
    assert parse_budget(text).log_growth({"n": n}) == pytest.approx(expected, rel=1e-12)


def test_sums_keep_their_written_weights() -> None:
    """V + 1000 E at V = E = 7 is 7007, and logarithms count to base 2 whatever their base."""
    assert parse_budget("V + 1000 E").log_growth({"V": 7, "E": 7}) == pytest.approx(math.log(7007))
    assert parse_budget("V + E log E").log_growth({"V": 8, "E": 8}) == pytest.approx(math.log(32))
    assert parse_budget("V + E log2(E)").log_growth({"V": 8, "E": 8}) == pytest.approx(math.log(32))
    natural = parse_budget("V + E ln(E)").log_growth({"V": 8, "E": 8})
    assert natural == pytest.approx(math.log(8 + 8 * math.log(8)))
    both = parse_budget("V + E ln(3) log E").log_growth({"V": 8, "E": 8})
    assert both == pytest.approx(math.log(8 + 8 * math.log(3) * 3))
    assert parse_budget("V + E / (1 + log(2))").log_growth({"V": 8, "E": 8}) == pytest.approx(math.log(12))
    assert math.isfinite(parse_budget("V + 10^310 E").log_growth({"V": 8, "E": 8}))


@pytest.mark.parametrize(
    ("text", "moving", "expected"),
    [
        ("V + E", ["V"], "V"),
        ("V + E", ["V", "E"], "λ"),
        ("n m", ["n", "m"], "λ^2"),
        ("n m", ["m"], "m"),
        ("n m", ["n"], "n"),
        ("m log log n", ["n", "m"], "λ log log λ"),
        ("(V + E) log V", ["V", "E"], "λ log λ"),
        ("(V + E) log V", ["E"], "E"),
        ("V^2 + E", ["E"], "E"),
        ("n log n", ["n"], "n log n"),
        ("2^n m", ["n", "m"], "λ 2^λ"),
        ("n/m", ["n", "m"], "1"),
    ],
)
def test_ray(text: str, moving: list[str], expected: str) -> None:
    """The growth in one scale when some variables move together."""
    assert parse_budget(text).ray_theta(moving) == expected


def test_along_is_the_growth_on_the_ray() -> None:
    """V = 2 n, E = 3 n, and then E held at 50."""
    budget = parse_budget("V + E")
    assert budget.along({"V": 2, "E": 3}, {})(10.0) == pytest.approx(math.log(50))
    assert budget.along({"V": 2}, {"E": 50})(10.0) == pytest.approx(math.log(70))


@pytest.mark.parametrize(
    ("text", "expected"),
    [("n^100", False), ("1.01^n", True), ("n!", True), ("0.5^n", False), ("V + 2^E", True), ("log n", False)],
)
def test_exponential(text: str, expected: bool) -> None:
    """Whether some variable outruns every power."""
    assert parse_budget(text).exponential is expected


def test_recurrence_reads_as_plain_records() -> None:
    """Coefficients, arguments and toll are there to be compared with what was observed."""
    recurrence = parse_budget("T(n) = 3 T(ceil(2n/3)) + T(n/4) + n log n").recurrence
    assert recurrence is not None
    assert recurrence.terms == (
        Term(Fraction(3), Ratio(Fraction(2, 3), perturbed=True)),
        Term(Fraction(1), Ratio(Fraction(1, 4))),
    )
    assert recurrence.toll == Factor(power=Fraction(1), log=Fraction(1))
    assert (recurrence.variable, recurrence.function) == ("n", "T")


def test_equal_arguments_are_one_term() -> None:
    """T(n/2) + T(n/2) is 2 T(n/2); floor and ceiling of the same part count alike."""
    for text in ("T(n) = T(n/2) + T(n/2) + 1", "T(n) = T(floor(n/2)) + T(ceil(n/2)) + 1"):
        recurrence = parse_budget(text).recurrence
        assert recurrence is not None
        assert [term.coefficient for term in recurrence.terms] == [2]


@pytest.mark.parametrize(
    ("terms", "toll", "expected"),
    [
        ([(2, Ratio(Fraction(1, 2)))], Factor(power=Fraction(1)), "n log n"),
        ([(1, Decrease(Fraction(1)))], Factor(power=Fraction(2)), "n^3"),
        ([(2, Decrease(Fraction(1)))], None, "2^n"),
        ([(1, Root(Fraction(1, 2)))], Factor(), "log log n"),
        ([(1, Shrink(Factor(power=Fraction(1, 2))))], Factor(), "sqrt(n)"),
        ([(Fraction(1, 2), Ratio(Fraction(1, 2)))], Factor(), "1"),
    ],
)
def test_recurrence_from_numbers(
    terms: list[tuple[int | Fraction, Ratio | Decrease | Root | Shrink]], toll: Factor | None, expected: str
) -> None:
    """A recurrence built without text is solved alike."""
    assert from_recurrence(Recurrence.of(terms, toll)).theta == expected


def test_a_recurrence_from_numbers_keeps_its_variable() -> None:
    budget = from_recurrence(Recurrence.of([(2, Ratio(Fraction(1, 2)))], Factor(power=Fraction(1)), "m"))
    assert (budget.theta, budget.variables) == ("m log m", ("m",))
    assert from_recurrence(Recurrence.of([(2, Ratio(Fraction(1, 2)))])).variables == ("n",)


@pytest.mark.parametrize("coefficient", [0, -1])
def test_coefficients_that_are_not_positive_are_refused(coefficient: int) -> None:
    with pytest.raises(ValueError, match=rf"^the coefficient {coefficient} is not positive$"):
        Recurrence.of([(coefficient, Ratio(Fraction(1, 2)))])


@pytest.mark.parametrize(
    "argument",
    [
        Ratio(Fraction(0)),
        Ratio(Fraction(1)),
        Ratio(Fraction(-1, 2)),
        Decrease(Fraction(0)),
        Decrease(Fraction(-1)),
        Root(Fraction(1)),
        Root(Fraction(3, 2)),
        Root(Fraction(-1, 2)),
        Shrink(Factor()),
        Shrink(Factor(power=Fraction(-1))),
        Shrink(Factor(power=Fraction(1))),
        Shrink(Factor(power=Fraction(2))),
    ],
    ids=str,
)
def test_arguments_that_do_not_shrink_are_refused(argument: Ratio | Decrease | Root | Shrink) -> None:
    """Numbers are checked where they enter."""
    with pytest.raises(ValueError, match=r"does not shrink$") as caught:
        Recurrence.of([(1, argument)])
    assert str(caught.value) == f"the argument {argument} does not shrink"


def test_a_recurrence_without_calls_is_refused() -> None:
    with pytest.raises(ValueError, match=r"^a recurrence needs a term$"):
        Recurrence.of([])


def test_a_logarithm_as_argument_is_a_root_of_exponent_zero() -> None:
    """It is read, and refused only where it decides."""
    toll = Factor(power=Fraction(1))
    assert from_recurrence(Recurrence.of([(1, Root(Fraction(0), plain=False))], toll)).theta == "n"


def test_unsolved_numbers_say_why() -> None:
    """A mix outside the theorems is refused, not guessed."""
    recurrence = Recurrence.of([(1, Decrease(Fraction(1))), (1, Ratio(Fraction(1, 2)))], Factor())
    with pytest.raises(Unsolved, match="faster than any power"):
        from_recurrence(recurrence)


def test_budget_travels_between_processes() -> None:
    """A pickled budget is the same budget."""
    for text in ("n^log2(7) log n", "T(n) = T(n-1) + T(n-2) + n", "V + 2^E"):
        budget = parse_budget(text)
        copy: Budget = pickle.loads(pickle.dumps(budget))
        assert copy == budget
        assert compare(copy, budget) == "same"


def test_split_costs_are_in_the_steps() -> None:
    """The deepest branch of a 99 to 1 split is 69 times as long as that of halves: log 2 / log(1/0.99)."""
    steps = parse_budget("T(n) = T(0.99 n) + T(0.01 n) + n").steps
    assert any("about 69 log2 n" in step for step in steps)
    assert math.log(2) / -math.log(0.99) == pytest.approx(68.97, abs=0.01)


def test_order_is_that_of_compare() -> None:
    """Budget.order and compare agree, and refuse alike."""
    assert parse_budget("n").order(parse_budget("n log n")) == "slower"
    with pytest.raises(BoundError):
        parse_budget("V").order(parse_budget("E"))


@pytest.mark.parametrize(
    ("text", "names"),
    [("5", [["n"]]), ("T(m) = T(m-1)", [["m"]]), ("1 + E / V", [["E"], ["E", "V"]]), ("V + E W", [["V"], ["E", "W"]])],
)
def test_every_term_names_a_size(text: str, names: list[list[str]]) -> None:
    """A constant is one in the first size, or in n."""
    assert [list(term) for term in parse_budget(text).terms()] == names
