"""Checks of single values: what a setting or a marker's argument may be, whoever gives it."""

from __future__ import annotations

import difflib
import math
from collections.abc import Callable, Iterable, Mapping
from typing import Any

from pytest_growthbudget.settings import SettingsError

POLICIES = ("warn", "fail", "pass")


def nearest(name: str, known: Iterable[str]) -> str:
    """A hint that names the nearest known name, or all of them."""
    choices = sorted(known)
    close = difflib.get_close_matches(name, choices, 1, 0.6)
    return f"did you mean {close[0]!r}?" if close else "known: " + ", ".join(choices)


def _number(low: float, high: float, what: str) -> Callable[[Any], float]:
    def check(value: Any) -> float:
        if (
            isinstance(value, bool)
            or not isinstance(value, (int, float))
            or not math.isfinite(value)
            or not low < value < high
        ):
            raise ValueError(what)
        return float(value)

    return check


def _whole(low: int, what: str) -> Callable[[Any], int]:
    def check(value: Any) -> int:
        if isinstance(value, bool) or not isinstance(value, int) or value < low:
            raise ValueError(what)
        return value

    return check


def _policy(value: Any) -> str:
    if value not in POLICIES:
        raise ValueError("one of " + ", ".join(map(repr, POLICIES)))
    return str(value)


def _text(value: Any) -> str:
    if not isinstance(value, str) or not value.strip():
        raise ValueError("text")
    return value


def _vary(value: Any) -> dict[str, str]:
    if (
        not isinstance(value, Mapping)
        or not value
        or not all(isinstance(part, str) for pair in value.items() for part in pair)
    ):
        raise ValueError('a table of variable to fixture or argument name, such as {"V": "vertex_count"}')
    return dict(value)


def _function(value: Any) -> Any:
    if not callable(value):
        raise ValueError("a function that takes the test's arguments")
    return value


def _audited(value: Any) -> Any:
    if not callable(value) and not (isinstance(value, str) and ":" in value):
        raise ValueError('a function, or text such as "package.module:function"')
    return value


def _switch(value: Any) -> bool:
    if not isinstance(value, bool):
        raise ValueError("true or false")
    return value


#: The units in which a ceiling may be given, in the units of the meters.
_UNITS = {"ns": 1.0, "us": 1e3, "ms": 1e6, "s": 1e9, "min": 60e9, "h": 3600e9}
_UNITS |= {"B": 1.0, "kB": 1e3, "MB": 1e6, "GB": 1e9, "KiB": 2.0**10, "MiB": 2.0**20, "GiB": 2.0**30}


def _cost(value: Any) -> float:
    """A ceiling: a number in the meter's own unit, or text such as `2 s` or `64 MiB`."""
    what = 'a positive number, or text with a unit such as "2 s" or "64 MiB"'
    if isinstance(value, str):
        amount, _, unit = value.strip().partition(" ")
        try:
            value = float(amount) * _UNITS[unit.strip()]
        except (ValueError, KeyError):
            raise ValueError(what) from None
    return _number(0, math.inf, what)(value)


_CHECKS: dict[str, Callable[[Any], Any]] = {
    "confidence": _number(0.5, 1, "a number above 0.5 and below 1"),
    "time_limit": _number(0, math.inf, "a positive number of seconds"),
    "session_time_limit": _number(0, math.inf, "a positive number of seconds"),
    "undecided": _policy,
    "seed": _whole(0, "a whole number of at least 0"),
    "ordinary_size": _whole(1, "a whole number of at least 1"),
    "slack": _number(0, 10, "a positive exponent below 10"),
    "meter": _text,
    "vary": _vary,
    "smallest": _whole(1, "a whole number of at least 1"),
    "largest": _whole(2, "a whole number of at least 2"),
    "at": _whole(2, "a whole number of at least 2"),
    "yardstick": _function,
    "cost": _cost,
    "scout": _switch,
    "accepted": _text,
    "audit": _audited,
    "size_of": _audited,
    "margin": _number(0, 10, "a positive exponent below 10"),
}


def checked(name: str, value: Any, source: str) -> Any:
    try:
        return _CHECKS[name](value)
    except ValueError as error:
        raise SettingsError(f"{source}: {name} must be {error}; got {value!r}") from None
