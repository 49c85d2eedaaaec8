"""From text to a bound's growth or a recurrence: clauses, sides, base cases."""

from __future__ import annotations

from dataclasses import dataclass
from fractions import Fraction
from itertools import pairwise

from pytest_growthbudget.bounds import names
from pytest_growthbudget.bounds import value as v
from pytest_growthbudget.bounds.enclosure import sign
from pytest_growthbudget.bounds.exact import common_measure, depends_on
from pytest_growthbudget.bounds.grammar import Parser
from pytest_growthbudget.bounds.growth import CONSTANT, Factor, Growth
from pytest_growthbudget.bounds.language import BoundError, Token, number_value, tokenize
from pytest_growthbudget.bounds.meaning import Meaning
from pytest_growthbudget.bounds.recurrence import Argument, Decrease, Recurrence, Term, read_term
from pytest_growthbudget.bounds.tree import Call, Node
from pytest_growthbudget.bounds.value import Outside, Value

_OPEN = {"(": 1, "{": 1, "⌈": 1, "⌊": 1, ")": -1, "}": -1, "⌉": -1, "⌋": -1}
MAX_CALLS = 16
_SEPARATORS = ("with", "where", "and", "for", "if", "when")
_ORDERS = ("=", "<=", ">=", "<", ">")


@dataclass(frozen=True, slots=True)
class _LeftSide:
    """The left side `function(argument)`; `argument` is a name or a number."""

    function: Token
    argument: Token


def read(text: str) -> Growth | Recurrence:
    """A bound's growth, or a recurrence.

    Raises:
        BoundError: the text is not understood; position, reason and hint say why.
    """
    tokens = tokenize(text)
    if _relation(tokens) is None:
        return _bound(text, tokens)
    return _recurrence(text, tokens)


def _relation(tokens: list[Token]) -> Token | None:
    depth = 0
    for token in tokens:
        depth += _OPEN.get(token.kind, 0)
        if depth <= 0 and token.kind in _ORDERS:
            return token
    return None


def _parsed(text: str, tokens: list[Token], function: str = "") -> Node:
    parser = Parser(text, tokens, function)
    node = parser.sum()
    parser.finish()
    return node


def _bound(text: str, tokens: list[Token]) -> Growth:
    node = _parsed(text, tokens)
    meaning = Meaning(text)
    return meaning.growth(meaning.of(node), node)


def _clauses(tokens: list[Token]) -> list[list[Token]]:
    """The tokens cut at top-level separators, each piece with its own end token."""
    pieces: list[list[Token]] = [[]]
    depth = 0
    for token in tokens[:-1]:
        depth += _OPEN.get(token.kind, 0)
        word = token.kind == "name" and token.value in _SEPARATORS
        if depth == 0 and (token.kind in (",", ";") or word):
            pieces.append([])
            if word and token.value in ("for", "if", "when"):
                pieces[-1].append(token)
            continue
        pieces[-1].append(token)
    return [[*p, Token("end", "", p[-1].end, p[-1].end + 1)] for p in pieces if p]


def _left(text: str, piece: list[Token]) -> _LeftSide | None:
    kinds = [t.kind for t in piece[:5]]
    if (
        len(piece) > 4
        and kinds[:2] == ["name", "("]
        and kinds[3] == ")"
        and kinds[4] in _ORDERS
        and kinds[2] in ("name", "number")
    ):
        return _LeftSide(piece[0], piece[2])
    return None


def _recurrence(text: str, tokens: list[Token]) -> Recurrence:
    pieces = _clauses(tokens)
    mains: list[tuple[_LeftSide, list[Token]]] = []
    bases: list[tuple[_LeftSide, list[Token]]] = []
    for i, piece in enumerate(pieces):
        if piece[0].kind == "name" and piece[0].value in ("for", "if", "when"):
            _condition(text, piece[1:])
            continue
        left = _left(text, piece)
        if left is None:
            if i > 0 and len(piece) > 1 and _is_condition(piece):
                _condition(text, piece)
                continue
            raise _left_fault(text, piece)
        if left.argument.kind == "name":
            conditional = i + 1 < len(pieces) and pieces[i + 1][0].value in ("for", "if", "when")
            calls = any(a.value == left.function.value and b.kind == "(" for a, b in pairwise(piece[5:]))
            (mains if calls or not conditional else bases).append((left, piece))
        else:
            bases.append((left, piece))
    if not mains:
        raise BoundError("no recurrence was found: only base cases are given", text, 0, len(text))
    if len(mains) > 1:
        second = mains[1][0].function
        raise BoundError("two recurrences in one text", text, second.start, second.end, "give one at a time")
    return _main(text, mains[0][0], mains[0][1], bases)


def _is_condition(piece: list[Token]) -> bool:
    return len(piece) in (4, 6) and piece[0].kind in ("name", "number") and piece[1].kind in _ORDERS


def _condition(text: str, piece: list[Token]) -> None:
    """`n > 1`, `n >= 2`, `1 < n`, `n = 1`: read, and of no consequence for the growth."""
    kinds = [t.kind for t in piece[:-1]]
    fine = len(kinds) in (3, 5) and all(k in _ORDERS if i % 2 else k in ("name", "number") for i, k in enumerate(kinds))
    if not fine:
        start = piece[0].start
        raise BoundError("expected a condition such as n > 1", text, start, max(piece[-1].start, start + 1))


def _left_fault(text: str, piece: list[Token]) -> BoundError:
    start, end = piece[0].start, piece[-1].start
    for i, token in enumerate(piece):
        if token.kind in _ORDERS:
            end = token.start
            if i > 3 and piece[0].kind == "name" and piece[1].kind == "(":
                return BoundError(
                    "the left side must be the function at the size itself",
                    text,
                    start,
                    end,
                    "write T(n) = …, and shift the calls on the right instead",
                )
            break
    return BoundError(
        "expected the form T(n) = …", text, start, max(end, start + 1), "a bound alone needs no left side"
    )


def _check_relation(text: str, relation: Token) -> None:
    if relation.kind in (">=", ">"):
        raise BoundError(
            "this states a lower bound; a budget promises an upper bound",
            text,
            relation.start,
            relation.end,
            "write T(n) = …",
        )
    if relation.kind == "<":
        raise BoundError("a strict inequality names no growth", text, relation.start, relation.end, "write T(n) = …")


def _main(text: str, left: _LeftSide, piece: list[Token], bases: list[tuple[_LeftSide, list[Token]]]) -> Recurrence:
    function, variable = left.function.value, left.argument.value
    if names.function(function) or function == variable:
        raise BoundError(f"{function!r} cannot name a recurrence", text, left.function.start, left.function.end)
    names.refuse_function(text, left.function, True)
    names.refuse_function(text, left.argument, False)
    plain = {t.value for t, after in pairwise(piece[4:]) if t.kind == "name" and after.kind != "("}
    names.checked_size(text, left.argument, plain)
    _check_relation(text, piece[4])
    body = piece[5:]
    for token in body:
        if token.kind in _ORDERS and _relation(body) is token:
            raise BoundError("a second relation in one clause", text, token.start, token.end, "put ; between clauses")
    for token in body:
        if token.kind == "name" and token.value.endswith(function) and token.value[: -len(function)] == variable:
            raise BoundError(
                f"{token.value!r} is no known name",
                text,
                token.start,
                token.end,
                f"leave a space: {variable} {function}(…)",
            )
    node = _parsed(text, body, function)
    meaning = Meaning(text)
    _check_names(text, body, function, variable)
    if not node.recursive:
        raise BoundError(
            f"the right side does not call {function}",
            text,
            node.start,
            node.end,
            "write a bound without its left side",
        )
    try:
        toll, calls = meaning.linear(node)
    except Outside as reason:
        raise BoundError(str(reason), text, node.start, node.end) from None
    terms = _merged(meaning, calls, variable)
    silent = [_base_is_zero(text, function, variable, base) for base in bases]
    toll_factor: Factor | None = None
    if toll.terms or toll.errors:
        try:
            ((m, _),) = v.leading(toll)
        except Outside as reason:
            raise BoundError(
                f"the toll: {reason}", text, node.start, node.end, "the toll must be positive for large sizes"
            ) from None
        toll_factor = dict(m).get(variable, CONSTANT)
    return Recurrence(terms, toll_factor, variable, function, _is_silent(silent, terms))


def _merged(meaning: Meaning, calls: list[tuple[Value, Call]], variable: str) -> tuple[Term, ...]:
    """One term for each argument, each coefficient checked before they are added."""
    found: dict[Argument, tuple[Value, Call]] = {}
    terms: dict[Argument, Term] = {}
    for coefficient, call in calls:
        term = read_term(meaning, coefficient, call, variable)
        argument = term.argument
        if argument in found:
            coefficient = v.add([(1, found[argument][0]), (1, coefficient)])
            term = read_term(meaning, coefficient, call, variable)
        found[argument] = (coefficient, call)
        terms[argument] = term
        if len(terms) > MAX_CALLS:
            meaning.fail(f"more than {MAX_CALLS} different calls are not solved", call)
    return tuple(terms.values())


def _is_silent(zeros: list[bool], terms: tuple[Term, ...]) -> bool:
    """Whether zero base cases leave T at zero on some sizes: all are zero, or one is and the steps skip sizes."""
    if not any(zeros):
        return False
    steps = [t.argument.by for t in terms if isinstance(t.argument, Decrease)]
    return all(zeros) or (len(steps) == len(terms) and common_measure(steps) != 1)


def _check_names(text: str, body: list[Token], function: str, variable: str) -> None:
    inside = 0
    for token, after in pairwise(body):
        inside += {"{": 1, "}": -1}.get(token.kind, 0)
        if inside or token.kind != "name" or token.value in (function, variable) or names.function(token.value):
            continue
        if after.kind == "(":
            raise BoundError(
                f"unknown function {token.value!r}",
                text,
                token.start,
                token.end,
                f"known are {names.KNOWN} and {function}",
            )
        if token.value == "e" and after.kind == "^":
            continue
        raise BoundError(
            f"unknown name {token.value!r}: the size is {variable!r}",
            text,
            token.start,
            token.end,
            "leave constant factors out: they do not change the growth",
        )


def _base_is_zero(text: str, function: str, variable: str, base: tuple[_LeftSide, list[Token]]) -> bool:
    left, piece = base
    if left.function.value != function:
        raise BoundError(
            f"a base case of {left.function.value!r}, but the recurrence is for {function!r}",
            text,
            left.function.start,
            left.function.end,
        )
    _check_relation(text, piece[4])
    start = 5
    while len(piece) > start + 5 and piece[start].value == function and piece[start + 4].kind == "=":
        start += 5
    body = piece[start:]
    if len(body) == 2 and body[0].kind == "name" and body[0].value not in (function, variable):
        return False
    node = _parsed(text, body)
    value = Meaning(text).of(node).constant()
    if value is None:
        raise BoundError("a base case must be a constant", text, node.start, node.end)
    if depends_on(value, ("base", "some")):
        return False
    if sign(value) < 0:
        raise BoundError("a base case must not be negative", text, node.start, node.end)
    return value == Fraction(0)


__all__ = ["number_value", "read"]
