"""What a tree means: a value, or a linear form in the calls of a recurrence."""

from __future__ import annotations

from fractions import Fraction
from typing import NoReturn

from pytest_growthbudget.bounds import value as v
from pytest_growthbudget.bounds.enclosure import sign, to_float
from pytest_growthbudget.bounds.exact import (
    BASE,
    EULER,
    ONE,
    Number,
    Real,
    Undecidable,
    depends_on,
    ln_fraction,
    make,
    power_number,
    symbol,
)
from pytest_growthbudget.bounds.growth import Growth, Monomial
from pytest_growthbudget.bounds.language import BoundError
from pytest_growthbudget.bounds.roots import ln_with_surds, solve
from pytest_growthbudget.bounds.tree import (
    Apply,
    Call,
    Factorial,
    Name,
    Node,
    Num,
    Power,
    Product,
    RootOf,
    Sum,
)
from pytest_growthbudget.bounds.value import Outside, Value

_LN2 = 0.6931471805599453


class Meaning:
    """Evaluates trees of one text; faults point into that text."""

    def __init__(self, text: str) -> None:
        self.text = text

    def fault(self, message: str, node: Node, hint: str = "") -> BoundError:
        return BoundError(message, self.text, node.start, node.end, hint)

    def fail(self, message: str, node: Node, hint: str = "") -> NoReturn:
        raise self.fault(message, node, hint)

    def of(self, node: Node) -> Value:
        """The value of a tree without calls.

        Raises:
            BoundError: the tree has no value in the class.
        """
        try:
            return self._of(node)
        except (Outside, Undecidable) as reason:
            self.fail(str(reason), node)
        except (OverflowError, ZeroDivisionError):
            self.fail("a number here is too large or divides by zero", node)

    def _of(self, node: Node) -> Value:
        if isinstance(node, Num):
            return v.number(node.value)
        if isinstance(node, Name):
            return v.size(node.name)
        if isinstance(node, Sum):
            if len(node.items) == 1 and node.items[0][0] == 1:
                return self.of(node.items[0][1])
            return v.add([(side, self.of(item)) for side, item in node.items])
        if isinstance(node, Product):
            return self._product(node)
        if isinstance(node, Power):
            return self._power(node)
        if isinstance(node, Factorial):
            return v.factorial(self.of(node.argument))
        if isinstance(node, Apply):
            return self._apply(node)
        if isinstance(node, RootOf):
            root = self._root(node)
            return v.number(root) if node.unknown == "p" else v.exp(v.number(root))
        raise self.fault("a recursive call may only be added and multiplied by factors without calls", node)

    def _product(self, node: Product) -> Value:
        out = self.of(node.items[0][1])
        for kind, item in node.items[1:]:
            right = self.of(item)
            if kind == "*":
                out = v.times(out, right)
            else:
                out = v.divide(out, right)
                if kind == "//":
                    out = v.rounded(out, up=False)
        return out

    def _power(self, node: Power) -> Value:
        exponent = self.of(node.exponent)
        fixed = exponent.constant()
        if isinstance(node.base, Name) and node.base.name == "e":
            if fixed is not None:
                self.fail("'e' can be a size or Euler's number here", node.base, "write exp(…) for Euler's number")
            return v.exp(exponent)
        if isinstance(node.base, RootOf) and node.base.unknown == "x":
            return v.exp(v.times(v.number(self._root(node.base)), exponent))
        base = self.of(node.base)
        if fixed is not None:
            if depends_on(fixed, ("base",)):
                self.fail("the base of this logarithm decides", node.exponent, "write log2(…), ln(…) or log(…, 10)")
            if depends_on(fixed, ("some",)):
                self.fail("this exponent is known only up to a constant factor", node.exponent)
            if abs(to_float(fixed)) > 10**15:
                self.fail("this exponent is too large", node.exponent)
            return v.power(base, fixed)
        constant = base.constant()
        if constant is not None and sign(constant) <= 0:
            self.fail("the base of an exponential must be positive", node.base)
        if constant is not None and depends_on(constant, ("base", "some")):
            self.fail("the base of an exponential must be a number that is known exactly", node.base)
        return v.exp(v.times(v.ln(base), exponent))

    def _apply(self, node: Apply) -> Value:
        function = node.function
        if function == "log_power":
            return self._of(node.arguments[0])
        values = [self.of(a) for a in node.arguments]
        first = values[0]
        if function == "sqrt":
            return v.power(first, Fraction(1, 2))
        if function == "cbrt":
            return v.power(first, Fraction(1, 3))
        if function == "exp":
            return v.exp(first)
        if function == "ln":
            return v.ln(first)
        if function == "loglog":
            half = v.times(v.number(symbol(BASE)), v.ln(first))
            return v.times(v.number(symbol(BASE)), v.ln(half))
        if function.startswith("log"):
            return v.times(v.number(self._log_base(node, function, values)), v.ln(first))
        if function in ("floor", "ceil"):
            return v.rounded(first, function == "ceil")
        if function == "factorial":
            return v.factorial(first)
        if function == "pow":
            return self._power(Power(node.arguments[0], node.arguments[1], node.start, node.end, False))
        return v.add([(1, v.loosened(x)) for x in values])

    def _log_base(self, node: Apply, function: str, values: list[Value]) -> Number:
        """1 / ln of the base."""
        if len(values) == 2:
            base = values[1].constant()
            if base is None or depends_on(base, ("base", "some")):
                self.fail("the base of a logarithm must be a number", node.arguments[1])
            if sign(base - 1) <= 0:
                self.fail("the base of a logarithm must be above 1", node.arguments[1])
            return ONE / ln_with_surds(base)
        if function == "log":
            return symbol(BASE)
        digits = int(function[3:])
        if digits < 2:
            self.fail("the base of a logarithm must be above 1", node)
        return ONE / ln_fraction(Fraction(digits))

    def _root(self, node: RootOf) -> Number:
        """p of `{p: …}`; ln x of `{x: …}` when it stands as a base or inside ln."""
        return self._exponent_root(node) if node.unknown == "p" else self._base_root(node)

    def _exponent_root(self, node: RootOf) -> Number:
        if not isinstance(node.right, Num) or node.right.value != 1:
            self.fail("expected = 1", node.right)
        items = node.left.items if isinstance(node.left, Sum) else ((1, node.left),)
        terms: list[tuple[Fraction, Number]] = []
        for side, item in items:
            coefficient = Fraction(side)
            part = item
            if isinstance(item, Product) and len(item.items) == 2:
                given = self.of(item.items[0][1]).constant()
                if not isinstance(given, Fraction) or item.items[1][0] != "*":
                    self.fail("expected a rational coefficient", item)
                coefficient, part = coefficient * given, item.items[1][1]
            if not isinstance(part, Power) or not isinstance(part.exponent, Name) or part.exponent.name != "p":
                self.fail("expected parts such as 2*(1/3)^p", item)
            ratio = self.of(part.base).constant()
            if ratio is None or coefficient <= 0 or sign(ratio) <= 0 or sign(ratio - 1) >= 0:
                self.fail("expected a positive coefficient and a ratio between 0 and 1", item)
            terms.append((coefficient, -ln_with_surds(ratio)))
        return solve(terms)

    def _base_root(self, node: RootOf) -> Number:
        degree = self._coefficients(node.left)
        if len(degree) != 1 or next(iter(degree.values())) != 1:
            self.fail("expected a power of x on the left", node.left)
        top = next(iter(degree))
        terms = []
        for k, a in self._coefficients(node.right).items():
            if k >= top or k < 0 or a <= 0 or top > 10**12:
                self.fail("expected lower powers of x with positive coefficients", node.right)
            terms.append((a, Fraction(top - k)))
        if not terms:
            self.fail("expected lower powers of x with positive coefficients", node.right)
        return solve([(a, w) for a, w in terms])

    def _coefficients(self, node: Node) -> dict[int, Fraction]:
        """Exponent of x → rational coefficient."""
        out: dict[int, Fraction] = {}
        for m, c in self.of(node).terms.items():
            power: Number = Fraction(0)
            if m:
                if len(m) != 1 or m[0][0] != "x" or any(m[0][1].parts()[i] for i in (0, 1, 3, 4)):
                    self.fail("expected powers of x alone", node)
                power = m[0][1].power
            if isinstance(power, Real) or power.denominator != 1 or isinstance(c, Real):
                self.fail("expected whole powers of x with rational coefficients", node)
            out[power.numerator] = out.get(power.numerator, Fraction(0)) + c
        return out

    def linear(self, node: Node) -> tuple[Value, list[tuple[Value, Call]]]:
        """The part without calls, and (coefficient, call) for each call.

        Raises:
            BoundError: the tree is not linear in the calls.
        """
        if not node.recursive:
            return self.of(node), []
        if isinstance(node, Call):
            return v.number(Fraction(0)), [(v.number(ONE), node)]
        if isinstance(node, Sum):
            tolls: list[tuple[int, Value]] = []
            calls: list[tuple[Value, Call]] = []
            for side, item in node.items:
                toll, inner = self.linear(item)
                tolls.append((side, toll))
                calls += [(c if side > 0 else v.times(v.number(Fraction(-1)), c), call) for c, call in inner]
            return v.add(tolls), calls
        if isinstance(node, Product):
            toll, calls = v.number(ONE), []
            for kind, item in node.items:
                if item.recursive:
                    if calls or kind != "*":
                        self.fail("the recurrence is not linear in its calls", item)
                    inner_toll, inner = self.linear(item)
                    calls = [(v.times(toll, c), call) for c, call in inner]
                    toll = v.times(toll, inner_toll)
                    continue
                factor = self.of(item)
                if kind == "//":
                    self.fail("rounding a recursive call is not solved", item)
                combine = v.times if kind == "*" else v.divide
                toll = combine(toll, factor)
                calls = [(combine(c, factor), call) for c, call in calls]
            return toll, calls
        if isinstance(node, Apply) and node.function == "max":
            self.fail(
                "a maximum of recursive calls is not solved",
                node,
                "write the call that costs most, or their sum",
            )
        if isinstance(node, Apply) and node.function in ("O", "Theta"):
            self.fail("a recursive call inside O(…) or Θ(…) is not read", node, "wrap the toll alone")
        raise self.fault("the recurrence is not linear in its calls", node)

    def growth(self, value: Value, node: Node) -> Growth:
        """The leading growth of a value."""
        try:
            parts = v.leading(value)
            return Growth(tuple(m for m, _ in parts), tuple(_weight(c, m) for m, c in parts))
        except (Outside, Undecidable) as reason:
            message = str(reason)
            hint = "a bound must be positive for all large sizes" if "positive" in message or "zero" in message else ""
            self.fail(message, node, hint)


def _weight(coefficient: Number, m: Monomial) -> float:
    """The written constant against logarithms to base 2; 1.0 where it is unknown."""
    if depends_on(coefficient, ("some",)):
        return 1.0
    if depends_on(coefficient, ("base",)):
        coefficient = _with_base_two(coefficient)
    logs = sum(to_float(f.log) for _, f in m)
    weight = to_float(coefficient) * _LN2**logs
    return weight if 1e-300 < weight < 1e300 else 1.0


def _with_base_two(x: Number) -> Number:
    if not isinstance(x, Real):
        return x
    out: list[Number] = []
    for poly in (x.num, x.den):
        total: Number = Fraction(0)
        for mono, c in poly.items():
            part: Number = c
            for sym, exponent in mono:
                if sym == BASE:
                    part = part * power_number(ln_fraction(Fraction(2)), -exponent)
                else:
                    part = part * make({((sym, exponent),): ONE}, {(): ONE})
            total = total + part
        out.append(total)
    return out[0] / out[1]


__all__ = ["EULER", "Meaning"]
