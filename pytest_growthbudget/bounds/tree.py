"""The tree that grammar.py builds: what was written, and where."""

from __future__ import annotations

from dataclasses import dataclass
from fractions import Fraction


@dataclass(frozen=True, slots=True)
class Num:
    value: Fraction
    start: int
    end: int
    recursive: bool = False


@dataclass(frozen=True, slots=True)
class Name:
    name: str
    start: int
    end: int
    recursive: bool = False


@dataclass(frozen=True, slots=True)
class Sum:
    """`items`: (sign +1 or -1, node)."""

    items: tuple[tuple[int, Node], ...]
    start: int
    end: int
    recursive: bool


@dataclass(frozen=True, slots=True)
class Product:
    """`items`: ("*", "/" or "//", node), read from left to right; the first one's sign is "*"."""

    items: tuple[tuple[str, Node], ...]
    start: int
    end: int
    recursive: bool


@dataclass(frozen=True, slots=True)
class Power:
    base: Node
    exponent: Node
    start: int
    end: int
    recursive: bool


@dataclass(frozen=True, slots=True)
class Factorial:
    argument: Node
    start: int
    end: int
    recursive: bool


@dataclass(frozen=True, slots=True)
class Apply:
    """A known function. `bare`: its argument stands without brackets."""

    function: str
    arguments: tuple[Node, ...]
    start: int
    end: int
    recursive: bool
    bare: bool = False


@dataclass(frozen=True, slots=True)
class Call:
    """A call of the recurrence's own function."""

    argument: Node
    start: int
    end: int
    recursive: bool = True


@dataclass(frozen=True, slots=True)
class RootOf:
    """`unknown` is "p" (an exponent) or "x" (a base); `left` = `right` defines it."""

    unknown: str
    left: Node
    right: Node
    start: int
    end: int
    recursive: bool = False


Node = Num | Name | Sum | Product | Power | Factorial | Apply | Call | RootOf
