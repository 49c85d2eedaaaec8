"""Which names are functions, which are sizes, and which are refused because they may be read in two ways."""

from __future__ import annotations

import re

from pytest_growthbudget.bounds.language import BoundError, Token

WRAPPERS = ("O", "Theta")
BRACKETS_NEEDED = ("O", "Theta", "max", "exp", "floor", "ceil", "pow", "factorial", "cbrt")
KNOWN = "log, log2, log10, lg, ln, sqrt, cbrt, exp, floor, ceil, max, pow, O and Θ"

_PLAIN = {
    "log": "log", "lg": "log2", "ln": "ln", "sqrt": "sqrt", "cbrt": "cbrt", "exp": "exp", "floor": "floor",
    "ceil": "ceil", "ceiling": "ceil", "max": "max", "loglog": "loglog", "pow": "pow", "factorial": "factorial",
}  # fmt: skip
_LOG = re.compile(r"log_?([0-9]{1,6})\Z")
_GLUED = re.compile(r"[A-Za-z]?(?:(?:log_?[0-9]*|lg|ln|sqrt)[A-Za-z]?)+\Z", re.IGNORECASE)
_GLUED_PRODUCT = re.compile(r"[A-Za-z]{2}\Z|[nmkNMK]{2,4}\Z")
_DIGIT_ENDED = re.compile(r"([A-Za-z])([0-9]+)\Z")

_LOWER = "is a lower bound; a budget promises an upper bound"
_REFUSED = {
    "Omega": f"Omega(…) {_LOWER}",
    "omega": f"omega(…) is a strict form: it {_LOWER}",
    "o": "o(…) is a strict upper bound: it names no growth that could be held to",
    "min": "the smaller of two sizes is not a sum of products, so its growth is outside the class",
    "sum": "sums over an index are not read",
    "mod": "remainders are not read",
    "nan": "NaN is no number",
    "inf": "infinity is no number",
    "infinity": "infinity is no number",
    "sin": "an oscillating factor has no growth",
    "cos": "an oscillating factor has no growth",
    "polylog": "polylog names no power of the logarithm",
    "poly": "poly names no power",
}
_ALWAYS = ("nan", "inf", "infinity", "omega", "mod")
_PROSE = (
    "for if with where and or not in is when else then lambda import from while def class return yield del pass "
    "try raise exec eval open print true false none async await global "
    "time space memory steps operations comparisons amortized amortised expected average worst best case per of the "
    "choose over times plus minus div divided squared cubed square cube root power to by factorial "
    "constant linear linearithmic quadratic cubic logarithmic exponential polynomial"
)
_WORDS = frozenset(_PROSE.split())


def function(name: str) -> str:
    """The canonical name of a known function, with `log3` and `log_3` kept apart by base; "" if unknown."""
    if name in WRAPPERS or name == "theta":
        return "Theta" if name == "theta" else name
    lowered = name.lower()
    if lowered in _PLAIN:
        return _PLAIN[lowered]
    match = _LOG.match(lowered)
    return f"log{int(match.group(1))}" if match else ""


def is_log(name: str) -> bool:
    return name in ("ln", "lg", "loglog", "log_power") or function(name).startswith(("log", "ln"))


def refuse_function(text: str, token: Token, bracketed: bool) -> None:
    """Raises BoundError for names of things that are known, but are no upper bounds or no numbers."""
    name = token.value
    lowered = name.lower()
    if name in _REFUSED or lowered in _ALWAYS:
        reason = _REFUSED[name if name in _REFUSED else lowered]
        if bracketed or lowered in _ALWAYS or name == "Omega":
            hint = "write O(…), Θ(…) or the bare expression" if "bound" in reason else ""
            raise BoundError(reason, text, token.start, token.end, hint)
    if lowered in _WORDS and not (bracketed and lowered in _PLAIN):
        raise BoundError(
            f"{name!r} is a word of prose or code, not a size",
            text,
            token.start,
            token.end,
            "write the bound alone, as in n log n; a size needs another name",
        )


def checked_size(text: str, token: Token, others: set[str]) -> str:
    """The name of a size, refused where it may be a product written without spaces.

    `others`: all names of the text that do not stand before a bracket.

    Raises:
        BoundError: the name is glued together, too long, or differs from another one by case alone.
    """
    name = token.value
    place = (text, token.start, token.end)
    if name in ("O", "Theta", "theta"):
        raise BoundError(f"{name} needs brackets", *place, f"write {name}(…)")
    if len(name) > 40 or "__" in name or name.endswith("_"):
        raise BoundError("this is not a usable name of a size", *place)
    if _GLUED.match(name):
        raise BoundError(f"{name!r} is no known name", *place, "leave spaces, as in n log n")
    if _GLUED_PRODUCT.match(name):
        parts = " * ".join(name)
        raise BoundError(
            f"{name!r} can be one size or a product", *place, f"write {parts}, or give the size a longer name"
        )
    match = _DIGIT_ENDED.match(name)
    if match:
        letter = match.group(1)
        family = [o for o in others if o != name and _DIGIT_ENDED.match(o) and o[0] == letter]
        if not family:
            raise BoundError(
                f"{name!r} can be a size, a power or a product",
                *place,
                f"write {letter}^{match.group(2)} or {match.group(2)} {letter}, or give the size another name",
            )
    for other in others:
        if other != name and other.lower() == name.lower() and not function(other):
            raise BoundError(f"{name!r} and {other!r} differ by case alone", *place, "use one spelling")
    return name


def check_count(text: str, name: str, token: Token, count: int, end: int) -> None:
    """Raises BoundError where a function has too many or too few arguments."""
    allowed = {"log": (1, 2), "max": (1, 12), "pow": (2, 2)}.get(name, (1, 1))
    if not allowed[0] <= count <= allowed[1]:
        many = "1 argument" if count == 1 else f"{count} arguments"
        raise BoundError(f"{token.value} does not take {many}", text, token.start, end)
