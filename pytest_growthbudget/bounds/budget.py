"""Budget: text in; growth, evaluator and derivation out."""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass, field
from fractions import Fraction
from functools import lru_cache
from typing import Any, Literal

from pytest_growthbudget.bounds import growth as g
from pytest_growthbudget.bounds.derivation import Derivation, Unsolved
from pytest_growthbudget.bounds.enclosure import to_float
from pytest_growthbudget.bounds.exact import Undecidable, exp_number, is_large
from pytest_growthbudget.bounds.growth import Factor, Growth, Relation
from pytest_growthbudget.bounds.language import BoundError
from pytest_growthbudget.bounds.printing import show_growth
from pytest_growthbudget.bounds.recurrence import Recurrence
from pytest_growthbudget.bounds.statement import read
from pytest_growthbudget.bounds.theorems import solve


@dataclass(frozen=True)
class Budget:
    """A promise of growth.

    `theta` is the growth as text, which `parse_budget` reads back to the same growth. `theorem` and `steps` are
    the derivation of a recurrence ("" and a reading note for a bound). `growth` is the exact growth;
    `recurrence` and `derivation` are there for recurrences.
    """

    text: str
    kind: Literal["bound", "recurrence", "callable"]
    variables: tuple[str, ...]
    theta: str
    theorem: str
    steps: tuple[str, ...]
    growth: Growth
    recurrence: Recurrence | None = field(default=None, compare=False)
    derivation: Derivation | None = field(default=None, compare=False)

    def terms(self) -> list[dict[str, dict[str, float]]]:
        """One mapping a monomial: variable → base of the exponential, exponents of n, log n, log log n and n!."""
        return [{name: _plain(dict(m).get(name, g.CONSTANT)) for name in self._named(m)} for m in self.growth.monomials]

    def _named(self, m: g.Monomial) -> list[str]:
        present = [name for name, _ in m]
        return present or list(self.variables[:1] or ("n",))

    def log_growth(self, sizes: Mapping[str, float]) -> float:
        """The natural logarithm of the growth at these sizes (one number for each of `variables`, at least 1).

        Never overflows. Raises KeyError if a variable has no size.
        """
        return self.growth.log_value(sizes)

    @property
    def exponential(self) -> bool:
        """Whether the growth outruns every power of some variable."""
        return any(Factor(f.factorial, f.rate).sign() > 0 for m in self.growth.monomials for _, f in m)

    def order(self, other: Budget) -> Relation:
        """This growth against another's; raises BoundError where they are incomparable."""
        return compare(self, other)

    def along(self, scales: Mapping[str, float], held: Mapping[str, float]) -> Callable[[float], float]:
        """log growth as a function of one scale n: variable v has size scales[v]·n, or held[v]."""
        return g.scaled(self.growth, scales, held)

    def ray_theta(self, moving: Sequence[str]) -> str:
        """The growth in one scale when the variables in `moving` grow together and the others are held.

        The scale is named λ where several move, else by the variable's own name.
        """
        name = moving[0] if len(moving) == 1 else "λ"
        return show_growth(self.ray(moving, name))

    def ray(self, moving: Sequence[str], name: str = "n") -> Growth:
        """Like `ray_theta`, as a growth in the variable `name`."""
        weights = dict.fromkeys(moving, Fraction(1))
        return Growth((g.monomial({name: g.growth_along(self.growth, weights)}),), (1.0,))


def _plain(f: Factor) -> dict[str, float]:
    base = to_float(exp_number(f.rate)) if f.rate else 1.0
    values = (base, *(to_float(x) for x in (f.power, f.log, f.loglog, f.factorial)))
    return dict(
        zip(
            ("exp_base", "power", "log", "loglog", "factorial"),
            (int(x) if x.is_integer() and abs(x) < 2**53 else x for x in values),
            strict=True,
        )
    )


def parse_budget(text: str) -> Budget:
    """Reads a bound or a recurrence, and solves it.

    Raises:
        BoundError: the text is not understood, or its growth could not be established by proof.
    """
    if not isinstance(text, str):
        raise BoundError(f"a bound must be text, not {type(text).__name__}", str(text)[:80])
    return _parse(text)


@lru_cache(maxsize=512)
def _parse(text: str) -> Budget:
    try:
        found = read(text)
        if isinstance(found, Recurrence):
            return from_recurrence(found, text)
        _check_range(found)
        theta = show_growth(found)
        steps = () if theta == text.strip() else (f"the part that grows fastest, without constant factors: {theta}",)
        return Budget(text, "bound", found.variables(), theta, "", steps, found)
    except Unsolved as reason:
        raise BoundError(str(reason), text, 0, len(text), reason.hint) from None
    except Undecidable as reason:
        raise BoundError(str(reason), text, 0, len(text), "no answer is given without a proof") from None
    except (OverflowError, ZeroDivisionError, RecursionError):
        raise BoundError("a number here is too large", text, 0, len(text)) from None


def from_recurrence(recurrence: Recurrence, text: str = "") -> Budget:
    """The budget of a recurrence that was built from numbers or text.

    Raises:
        derivation.Unsolved: no theorem covers it.
        exact.Undecidable: two numbers are too close for a proof.
    """
    derivation = solve(recurrence)
    solved = Growth((g.monomial({recurrence.variable: derivation.growth}),), (1.0,))
    _check_range(solved)
    variables = (recurrence.variable,)
    theta = show_growth(solved)
    return Budget(
        text,
        "recurrence",
        variables,
        theta,
        derivation.theorem,
        derivation.steps,
        solved,
        recurrence,
        derivation,
    )


def _check_range(growth: Growth) -> None:
    for m in growth.monomials:
        for _, f in m:
            sizes = [abs(to_float(x)) for x in f.parts()]
            if sizes[1] > 690.0 or max(sizes) > 1e6 or any(is_large(x, 450) for x in f.parts()):
                raise OverflowError


def compare(a: str | Budget, b: str | Budget) -> Relation:
    """a's growth against b's: "slower", "same" or "faster", by proof.

    Sizes of the same name are the same size; sizes of different names grow independently.

    Raises:
        BoundError: an input is at fault, or the growths are incomparable, or no proof of their order was found.
    """
    left = parse_budget(a) if isinstance(a, str) else a
    right = parse_budget(b) if isinstance(b, str) else b
    try:
        found = g.relation(left.growth, right.growth)
    except Undecidable as reason:
        raise BoundError(
            str(reason), f"{left.text} / {right.text}", hint="no answer is given without a proof"
        ) from None
    if found is None:
        raise BoundError(
            "the two growths are incomparable: which is larger depends on how the sizes grow together",
            f"{left.text} / {right.text}",
        )
    return found


def describe(budget: Budget) -> dict[str, Any]:
    """The answer of `explain`, as builtins."""
    return {
        "input": budget.text,
        "kind": budget.kind,
        "theta": budget.theta,
        "terms": budget.terms(),
        "theorem": budget.theorem,
        "steps": list(budget.steps),
    }
