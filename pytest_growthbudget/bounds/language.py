"""Tokens of bounds and recurrences, and the error that shows the place at fault."""

from __future__ import annotations

import re
import unicodedata
from dataclasses import dataclass
from fractions import Fraction

MAX_LENGTH = 1000
_MAX_DIGITS = 150
_WIDTH = 72


class BoundError(ValueError):
    """A bound or recurrence that is not understood, or not solved.

    Attributes: `message` says what is wrong, `text` is the whole input, `position` and `end` delimit the place
    (0-based; None where the whole is meant), `hint` says how to mend it ("" where there is nothing to add).
    """

    def __init__(
        self, message: str, text: str, position: int | None = None, end: int | None = None, hint: str = ""
    ) -> None:
        super().__init__(message)
        self.message = message
        self.text = text
        self.position = position
        self.end = position + 1 if position is not None and end is None else end
        self.hint = hint

    def __str__(self) -> str:
        lines = [self.message, *_caret_lines(self.text, self.position, self.end)]
        if self.hint:
            lines.append(f"hint: {self.hint}")
        return "\n".join(lines)

    def __reduce__(self) -> tuple[type[BoundError], tuple[object, ...]]:
        return type(self), (self.message, self.text, self.position, self.end, self.hint)


def _caret_lines(text: str, position: int | None, end: int | None) -> list[str]:
    """The text, cut around the place where it is long, and a line that points at the place."""
    shown = "".join(c if c.isprintable() else " " for c in text)
    if position is None or end is None:
        return [f"  {shown if len(shown) <= _WIDTH else shown[: _WIDTH - 3] + '...'}"]
    position = min(position, len(shown))
    end = max(min(end, len(shown) + 1), position + 1)
    start = 0
    if len(shown) > _WIDTH:
        start = max(0, min(position - _WIDTH // 3, len(shown) - _WIDTH + 6))
    window = shown[start : start + _WIDTH - (3 if start else 0)]
    lead = "..." if start else ""
    tail = "..." if start + len(window) < len(shown) else ""
    length = min(end - position, max(1, len(window) - (position - start)))
    marker = "~" * (length - 1) + "^"
    return [f"  {lead}{window}{tail}", "  " + " " * (len(lead) + position - start) + marker]


@dataclass(frozen=True, slots=True)
class Token:
    """`kind` is "number", "name", "power" (a superscript) or the sign itself; `value` is its meaning."""

    kind: str
    value: str
    start: int
    end: int


_SIGNS = {
    "**": "^", "^": "^", "//": "//", "*": "*", "·": "*", "×": "*", "⋅": "*", "∙": "*", "/": "/", "÷": "/",
    "+": "+", "-": "-", "−": "-", "–": "-", "(": "(", ")": ")", "{": "{", "}": "}", "!": "!", ",": ",", ";": ";",
    "\n": ";", ":=": "=", "==": "=", "=": "=", "<=": "<=", "≤": "<=", ">=": ">=", "≥": ">=", "<": "<", ">": ">",
    ":": ":", "√": "sqrt", "⌈": "⌈", "⌉": "⌉", "⌊": "⌊", "⌋": "⌋", "|": "|",
}  # fmt: skip
SUPERSCRIPTS = dict(zip("⁰¹²³⁴⁵⁶⁷⁸⁹⁻ⁿ", "0123456789-n", strict=True))
_SUBSCRIPTS = str.maketrans("₀₁₂₃₄₅₆₇₈₉", "0123456789")
_TOKEN = re.compile(
    r"(?P<space>[ \t\r\u00a0\u2009]+)"
    r"|(?P<number>(?:[0-9]+(?:\.[0-9]+)?|\.[0-9]+)(?:[eE][+-]?[0-9]+)?)"
    r"|(?P<name>[A-Za-z][A-Za-z0-9_₀-₉]*)"
    r"|(?P<power>[⁰¹²³⁴⁵⁶⁷⁸⁹⁻ⁿ]+)"
    r"|(?P<theta>[Θθ])"
    r"|(?P<sign>\*\*|//|:=|==|<=|>=|[\^*·×⋅∙/÷+\-−–(){}!,;\n=≤≥<>:√⌈⌉⌊⌋|])"
)


def tokenize(text: str) -> list[Token]:
    """All tokens of a text, with a closing token of kind "end".

    Raises:
        BoundError: the text is too long, empty, or holds a character that has no meaning here.
    """
    if len(text) > MAX_LENGTH:
        raise BoundError(
            f"the text is too long: {len(text)} characters, at most {MAX_LENGTH} are read", text, MAX_LENGTH
        )
    tokens: list[Token] = []
    at = 0
    while at < len(text):
        match = _TOKEN.match(text, at)
        if match is None:
            raise _unknown_character(text, at)
        kind = match.lastgroup or ""
        value = match.group()
        end = match.end()
        if kind == "number":
            _check_number(text, value, at, end)
            tokens.append(Token("number", value, at, end))
        elif kind == "name":
            tokens.append(Token("name", value.translate(_SUBSCRIPTS), at, end))
        elif kind == "theta":
            tokens.append(Token("name", "Theta", at, end))
        elif kind == "power":
            tokens.append(Token("power", "".join(SUPERSCRIPTS[c] for c in value), at, end))
        elif kind == "sign":
            tokens.append(Token(_SIGNS[value], value, at, end))
        at = end
    if not tokens:
        raise BoundError("the text is empty: a bound or a recurrence was expected", text, 0)
    tokens.append(Token("end", "", len(text), len(text) + 1))
    return tokens


def _check_number(text: str, value: str, at: int, end: int) -> None:
    mantissa, _, exponent = value.lower().partition("e")
    if len(mantissa) > _MAX_DIGITS or (exponent and abs(int(exponent[:6])) > 200):
        raise BoundError("this number is too long or too large", text, at, end)
    if end < len(text) and text[end] == ".":
        raise BoundError("a number cannot end in a point here", text, end, hint="write 2 or 2.0, and n^2 for powers")


def number_value(value: str) -> Fraction:
    """The exact value of a decimal number."""
    return Fraction(value)


_REASONS = {
    "Ω": "Ω(…) is a lower bound; a budget promises an upper bound",
    "ω": "ω(…) is a strict lower bound; a budget promises an upper bound",
    "∞": "infinity is no size and no number here",
    "Õ": "a bound that hides its logarithms is not precise enough for a budget",
    "[": "square brackets and indexing have no meaning here",
    "]": "square brackets and indexing have no meaning here",
    ".": "a point has a meaning only inside a number",
    "∑": "sums over an index are not read",
    "Σ": "sums over an index are not read",
    "%": "remainders and percentages are not read",
}
_MENDS = {
    "Ω": "write O(…), Θ(…) or the bare expression",
    "ω": "write O(…), Θ(…) or the bare expression",
    "[": "write round brackets",
    "]": "write round brackets",
    "∑": "write the closed form of the sum",
    "Σ": "write the closed form of the sum",
    "Õ": "write the logarithms out",
}


def _unknown_character(text: str, at: int) -> BoundError:
    char = text[at]
    if char in _REASONS:
        return BoundError(_REASONS[char], text, at, hint=_MENDS.get(char, ""))
    name = unicodedata.name(char, f"U+{ord(char):04X}")
    if char.isalpha() or unicodedata.category(char).startswith(("L", "N")):
        return BoundError(
            f"the character {char!r} ({name}) is not a plain letter or digit",
            text,
            at,
            hint="names use the letters A to Z and a to z, digits and underscores; some other letters look the same",
        )
    shown = repr(char) if char.isprintable() else name
    return BoundError(f"the character {shown} has no meaning in a bound", text, at)
