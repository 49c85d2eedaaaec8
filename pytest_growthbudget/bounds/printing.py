"""Growths as text that the language reads back to the same growth."""

from __future__ import annotations

from fractions import Fraction
from functools import lru_cache

from pytest_growthbudget.bounds.enclosure import to_float
from pytest_growthbudget.bounds.exact import Mono, Number, Poly, Real, Symbol, common_measure, exp_number
from pytest_growthbudget.bounds.growth import Factor, Growth, Monomial
from pytest_growthbudget.bounds.roots import Equation


def show_fraction(x: Fraction) -> str:
    """A rational as an integer, a short decimal, or a quotient; all three read back exactly."""
    if x.denominator == 1:
        return str(x.numerator)
    rest = x.denominator
    for p in (2, 5):
        while rest % p == 0:
            rest //= p
    if rest == 1 and x.denominator <= 10**8:
        digits = 0
        while (x * 10**digits).denominator != 1:
            digits += 1
        if digits <= 8:
            whole = abs(x * 10**digits).numerator
            text = str(whole).rjust(digits + 1, "0")
            return f"{'-' if x < 0 else ''}{text[:-digits]}.{text[-digits:]}"
    return f"{x.numerator}/{x.denominator}"


def _show_symbol(sym: Symbol) -> str:
    if sym.kind == "ln":
        return f"ln({sym.payload})"
    if sym.kind == "rad":
        return str(sym.payload)
    if sym.kind == "e":
        return "exp(1)"
    if sym.kind == "root":
        return show_root(sym.payload)
    if sym.kind in ("lnof", "exp"):
        return f"{'ln' if sym.kind == 'lnof' else 'exp'}({show_number(sym.payload)})"
    raise ValueError(sym.kind)


def show_root(equation: Equation) -> str:
    """`{p: …}` for a critical exponent, `ln(…)` of a characteristic root: a surd, or `{x: …}`."""
    weights = [w for _, w in equation.terms]
    if all(isinstance(w, Fraction) for w in weights):
        base = _show_characteristic(equation)
        return f"ln{base}" if base.startswith("(") else f"ln({base})"
    parts = []
    for a, w in equation.terms:
        ratio = exp_number(-w)
        coefficient = "" if a == 1 else f"{_wrapped(show_fraction(a))}*"
        parts.append(f"{coefficient}({show_number(ratio)})^p")
    return "{p: " + " + ".join(parts) + " = 1}"


def _show_characteristic(equation: Equation) -> str:
    terms = [(a, int(w)) for a, w in equation.terms]  # type: ignore[arg-type]
    degree = max(k for _, k in terms)
    if [k for _, k in terms] == [1, 2] and all(a.denominator == 1 for a, _ in terms):
        (u, _), (v, _) = terms
        return f"(({u} + sqrt({u * u + 4 * v}))/2)"
    parts = []
    for a, k in sorted(terms, key=lambda t: t[1]):
        coefficient = "" if a == 1 else f"{_wrapped(show_fraction(a))}*"
        power = degree - k
        x = "1" if power == 0 else "x" if power == 1 else f"x^{power}"
        parts.append(show_fraction(a) if power == 0 else coefficient + x)
    return f"{{x: x^{degree} = {' + '.join(parts)}}}"


def _wrapped(text: str) -> str:
    return f"({text})" if any(c in text for c in "/- +*") else text


def _show_mono(mono: Mono, coefficient: Fraction) -> str:
    top: list[str] = []
    bottom: list[str] = []
    if abs(coefficient.numerator) != 1:
        top.append(str(abs(coefficient.numerator)))
    if coefficient.denominator != 1:
        bottom.append(str(coefficient.denominator))
    for sym, exponent in mono:
        text = _show_symbol(sym)
        size = abs(exponent)
        shown = text if size == 1 else f"sqrt({text})" if 2 * size == 1 else f"{text}^({show_fraction(size)})"
        (top if exponent > 0 else bottom).append(shown)
    head = "*".join(top) or "1"
    if not bottom:
        return head
    return f"{head}/{bottom[0]}" if len(bottom) == 1 else f"{head}/({'*'.join(bottom)})"


def _show_poly(poly: Poly) -> str:
    ordered = sorted(poly.items(), key=lambda item: (item[1] < 0, item[0]))
    out = ""
    for mono, coefficient in ordered:
        text = _show_mono(mono, coefficient) if mono else show_fraction(abs(coefficient))
        if not out:
            out = f"-{text}" if coefficient < 0 else text
        else:
            out += (" - " if coefficient < 0 else " + ") + text
    return out


def _as_log(x: Real) -> str | None:
    """`log2(7)` or `log(3, 1.5)` where x is a quotient of two logarithms of rationals."""
    clear: dict[Symbol, Fraction] = {}
    for mono in (*x.num, *x.den):
        for sym, exponent in mono:
            clear[sym] = min(clear.get(sym, exponent), exponent)
    top = _argument(x.num, clear)
    bottom = _argument(x.den, clear)
    if top is None or bottom is None or bottom[1] == 1 or top[1] == 1:
        return None
    (r, a), (q, b) = top, bottom
    ratio = r / q
    if ratio < 0:
        ratio, a = -ratio, 1 / a
    if max(ratio.numerator, ratio.denominator) > 6:
        return None
    a, b = a**ratio.numerator, b**ratio.denominator
    if b < 1:
        a, b = 1 / a, 1 / b
    if max(a.numerator, a.denominator, b.numerator, b.denominator) > 10**12:
        return None
    if b.denominator == 1 and b < 10**6:
        return f"log{b}({show_fraction(a)})"
    return f"log({show_fraction(a)}, {show_fraction(b)})"


def _argument(poly: Poly, clear: dict[Symbol, Fraction]) -> tuple[Fraction, Fraction] | None:
    """(r, a) with poly = r·ln a, once every constant's least exponent is cleared."""
    exponents: dict[int, Fraction] = {}
    for mono, coefficient in poly.items():
        left = dict(mono)
        rest = [(s, left.get(s, Fraction(0)) - e) for s, e in clear.items() if e < 0]
        rest += [(s, e) for s, e in mono if clear[s] >= 0]
        rest = [(s, e) for s, e in rest if e]
        if len(rest) != 1 or rest[0][0].kind != "ln" or rest[0][1] != 1:
            return None
        exponents[rest[0][0].payload] = coefficient
    measure = common_measure(abs(e) for e in exponents.values())
    argument = Fraction(1)
    for base, e in exponents.items():
        if abs(e / measure) > 40 or base > 10**12:
            return None
        argument *= Fraction(base) ** (e / measure).numerator
    return measure, argument


@lru_cache(maxsize=1024)
def show_number(x: Number) -> str:
    """A number as the language writes it."""
    if not isinstance(x, Real):
        return show_fraction(x)
    short = _as_log(x)
    if short:
        return short
    top = _show_poly(x.num)
    if len(x.den) == 1:
        return top
    return f"({top})/({_show_poly(x.den)})"


def _exponent(x: Number) -> str:
    text = show_number(x)
    simple = isinstance(x, Fraction) and "/" not in text
    bare = isinstance(x, Real) and (
        _as_log(x) is not None or (text.startswith("{") and text.endswith("}") and text.count("{") == 1)
    )
    return text if simple or bare else f"({text})"


def _show_power(name: str, power: Number) -> str:
    if power == 1:
        return name
    if power == Fraction(1, 2):
        return f"sqrt({name})"
    return f"{name}^{_exponent(power)}"


def _show_exponential(name: str, rate: Number) -> str:
    if isinstance(rate, Fraction):
        return f"exp({_times(rate, name)})"
    if len(rate.num) == 1 and len(rate.den) == 1:
        ((mono, coefficient),) = rate.num.items()
        if len(mono) == 1 and mono[0][0].kind == "root" and mono[0][1] == 1:
            equation: Equation = mono[0][0].payload
            if all(isinstance(w, Fraction) for _, w in equation.terms):
                base = _show_characteristic(equation)
                return f"{base}^{name}" if coefficient == 1 else f"{base}^({_times(coefficient, name)})"
    root, base_number = 1, exp_number(rate)
    if isinstance(base_number, Real):
        root = 1
        for mono in rate.num:
            root = max(root, rate.num[mono].denominator)
        base_number = exp_number(rate * root)
    if isinstance(base_number, Fraction) and max(base_number.numerator, base_number.denominator) < 10**40:
        text = show_fraction(base_number)
        return f"{_wrapped(text)}^{name}" if root == 1 else f"{_wrapped(text)}^({name}/{root})"
    return f"exp(({show_number(rate)})*{name})"


def _times(x: Fraction, name: str) -> str:
    if x == 1:
        return name
    if x.numerator == 1:
        return f"{name}/{x.denominator}"
    text = show_fraction(x)
    return f"({text})*{name}" if "/" in text or x < 0 else f"{text}*{name}"


def _show_log(text: str, exponent: Number, plain: bool) -> str:
    if exponent == 1:
        return text
    if plain:
        return f"log^{_exponent(exponent)} {text[4:]}"
    return f"({text})^{_exponent(exponent)}"


def _positive(x: Number) -> bool:
    return to_float(x) > 0


def show_factor(name: str, f: Factor) -> tuple[list[str], list[str]]:
    """Texts of the factors above and below the fraction bar."""
    top: list[str] = []
    bottom: list[str] = []

    def put(x: Number, render: object) -> None:
        if x:
            size = x if _positive(x) else -x
            (top if _positive(x) else bottom).append(render(size))  # type: ignore[operator]

    if f.power == 1:
        top.append(name)
    if f.rate:
        top.append(_show_exponential(name, f.rate))
    put(f.factorial, lambda s: f"{name}!" if s == 1 else f"({name}!)^{_exponent(s)}")
    if f.power != 1:
        put(f.power, lambda s: _show_power(name, s))
    put(f.log, lambda s: _show_log(f"log {name}", s, True))
    put(f.loglog, lambda s: _show_log(f"log log {name}", s, False))
    return top, bottom


def show_monomial(m: Monomial) -> str:
    """One product, `1` for a constant."""
    top: list[str] = []
    bottom: list[str] = []
    for name, f in m:
        up, down = show_factor(name, f)
        top += up
        bottom += down
    # The powers of the single variables come before their logarithms, which take their argument without brackets.
    top.sort(key=lambda t: t.startswith(("log", "(log")))
    bottom.sort(key=lambda t: t.startswith(("log", "(log")))
    head = _joined(top) or "1"
    if not bottom:
        return head
    return f"{head} / {bottom[0]}" if len(bottom) == 1 else f"{head} / ({_joined(bottom)})"


def _joined(parts: list[str]) -> str:
    """The product; a sign stands before brackets, which could be an argument otherwise."""
    out = ""
    for part in parts:
        out += (" * " if part.startswith("(") else " ") + part if out else part
    return out


def show_growth(growth: Growth) -> str:
    """The whole sum."""
    return " + ".join(show_monomial(m) for m in growth.monomials)
