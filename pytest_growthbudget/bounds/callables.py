"""Budgets whose growth is a function of the user's own: checked to be sane before anything is measured."""

from __future__ import annotations

import inspect
import math
from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass
from typing import Any

from pytest_growthbudget.bounds.language import BoundError

#: Sizes at which a callable bound is tried before it is used.
_TRIED = tuple(2**power for power in range(2, 21))
_STEEP = 1.5


@dataclass(frozen=True)
class CallableGrowth:
    """log g(n) of a function g of one whole number, interpolated between whole numbers."""

    function: Callable[[int], Any]

    def log_value(self, sizes: Mapping[str, float]) -> float:
        """The natural logarithm of the growth. `sizes` has one entry."""
        (n,) = sizes.values()
        below = max(math.floor(n), 1)
        low = self._log(below)
        return low if n <= below else low + (n - below) * (self._log(below + 1) - low)

    def _log(self, n: int) -> float:
        # math.log takes whole numbers of any length, which a float would not hold.
        return math.log(self.function(n))


@dataclass(frozen=True)
class CallableBudget:
    """A promise given as a function of the problem size; the same interface as `bounds.budget.Budget`."""

    text: str
    growth: CallableGrowth
    exponential: bool
    variables: tuple[str, ...] = ("n",)
    theorem: str = ""
    steps: tuple[str, ...] = ()

    @property
    def theta(self) -> str:
        return self.text

    def ray(self, moving: Sequence[str], name: str = "n") -> CallableGrowth:
        """The growth along the only ray that there is."""
        return self.growth


def callable_budget(function: Callable[[int], Any]) -> CallableBudget:
    """The budget whose growth is `function(n)`, for whole n of at least 1.

    Raises BoundError where the function does not take one number, raises, or gives something else than a positive
    number that does not fall from 4 to about a million.
    """
    name = getattr(function, "__name__", type(function).__name__)
    text = f"{name}(n)" if name != "<lambda>" else "a function of n"
    _takes_one(function, text)
    growth = CallableGrowth(function)
    logs = [_tried(growth, n, text) for n in _TRIED]
    for n, before, after in zip(_TRIED[1:], logs, logs[1:], strict=False):
        if after < before - 1e-9:
            raise BoundError(f"{text} falls on the way to n = {n:,}; a bound must not fall as n grows", text)
    early, late = logs[5] - logs[4], logs[9] - logs[8]
    return CallableBudget(text, growth, exponential=late > 4 * math.log(2) and late > _STEEP * early)


def _takes_one(function: Callable[[int], Any], text: str) -> None:
    try:
        inspect.signature(function).bind(1)
    except TypeError:
        raise BoundError(f"{text} must take one argument, the problem size", text) from None
    except ValueError:  # a built-in function that does not tell its signature
        return


def _tried(growth: CallableGrowth, n: int, text: str) -> float:
    try:
        value = growth.function(n)
    except OverflowError:
        raise BoundError(f"{text} overflows at n = {n:,}; compute it with whole numbers", text) from None
    except Exception as error:
        raise BoundError(f"{text} raised {type(error).__name__} at n = {n:,}: {error}", text) from None
    try:
        log = math.log(value)
    except (TypeError, ValueError):
        raise BoundError(f"{text} gave {value!r} at n = {n:,}; a positive number was expected", text) from None
    except OverflowError:
        log = math.inf
    if not math.isfinite(log):
        raise BoundError(f"{text} gave {value!r} at n = {n:,}; a finite number was expected", text)
    return log
