"""What is audited, and where the size of a call comes from."""

from __future__ import annotations

import functools
from typing import Any

import pytest

from pytest_growthbudget.auditing.target import TargetError, inner, resolve, sizer


class Crane:
    def lift(self, load: int) -> int:
        return load

    @staticmethod
    def lower(load: int) -> int:
        return load

    @classmethod
    def built(cls, parts: list[int]) -> int:
        return len(parts)


def berths(quays: list[int]) -> int:
    def count(low: int, high: int) -> int:
        def step(at: int) -> int:
            return at

        return step(high - low)

    return count(0, len(quays))


@functools.lru_cache
def tide(hour: int) -> int:
    return hour


def logged(function: Any) -> Any:
    @functools.wraps(function)
    def wrapper(*args: Any) -> Any:
        return function(*args)

    return wrapper


@logged
def moored(ships: list[int]) -> int:
    return len(ships)


async def awaited(n: int) -> int:
    return n


@pytest.mark.parametrize(
    ("target", "name"),
    [
        (berths, "berths"),
        (Crane.lift, "Crane.lift"),
        (Crane().lift, "Crane.lift"),
        (Crane.lower, "Crane.lower"),
        (Crane.built, "Crane.built"),
        (vars(Crane)["lower"], "Crane.lower"),
        (vars(Crane)["built"], "Crane.built"),
        (functools.partial(berths, []), "berths"),
        (tide, "tide"),
        (moored, "moored"),
    ],
)
def test_functions_methods_and_what_wraps_them_are_looked_through(target: Any, name: str) -> None:
    found = resolve(target)
    assert found.name == name
    assert found.code.co_name == name.rpartition(".")[2]
    assert found.code.co_filename == __file__


@pytest.mark.parametrize(
    ("path", "line_of"),
    [
        ("berths", "def berths"),
        ("berths.count", "def count"),
        ("berths.<locals>.count", "def count"),
        ("berths.count.step", "def step"),
        ("Crane.lift", "def lift"),
        ("tide", "@functools.lru_cache"),
    ],
)
def test_text_names_functions_methods_and_functions_inside_them(path: str, line_of: str) -> None:
    code = resolve(f"{__name__}:{path}").code
    with open(__file__) as file:
        assert line_of in file.read().splitlines()[code.co_firstlineno - 1]


@pytest.mark.parametrize(
    ("target", "message"),
    [
        (
            len,
            (
                "audit=len has no Python code whose calls could be watched; "
                'give a Python function, a method, or text such as "package.module:function"'
            ),
        ),
        (
            3,
            (
                "audit=3 has no Python code whose calls could be watched; "
                'give a Python function, a method, or text such as "package.module:function"'
            ),
        ),
        ("berths", "audit='berths' is no target; write \"package.module:function\", or give the function itself"),
        (
            "no.such.module:berths",
            "audit='no.such.module:berths': the module 'no.such.module' cannot be imported (No module named 'no')",
        ),
        ("math:sqrt", "audit='math:sqrt' names no Python function"),
        ("heapq:merge.nothing", "audit='heapq:merge.nothing': heapq.merge has nothing named 'nothing'"),
        (awaited, "awaited is async, and the calls of async functions cannot be audited yet"),
    ],
)
def test_what_cannot_be_audited_is_refused_with_the_reason(target: Any, message: str) -> None:
    with pytest.raises(TargetError) as caught:
        resolve(target)
    assert str(caught.value) == message


def test_inner_functions_are_found_at_any_depth() -> None:
    step = inner(berths.__code__, "step")
    assert step is not None
    assert step.co_name == "step"
    assert inner(berths.__code__, "nowhere") is None


def hanoi(discs: int, source: str, goal: str) -> None: ...


def grown(items: list[int], low: int = 0, *, high: int = 9) -> None: ...


def unsized(thing: object) -> None: ...


def bare() -> None: ...


def ends(low: int, high: int) -> int:
    return high - low


@pytest.mark.parametrize(
    ("function", "size_of", "arguments", "size"),
    [
        (hanoi, None, {"discs": 7, "source": "A", "goal": "B"}, 7),
        (grown, None, {"items": [1, 2], "low": 0, "high": 9}, 2),
        (grown, None, {"items": None, "low": True, "high": 9}, 9),
        (Crane.lift, None, {"self": [1, 2, 3], "load": 8}, 8),
        (grown, len, {"items": [1, 2], "low": 0, "high": 9}, 2),
        (grown, lambda any_name: len(any_name) + 1, {"items": [1, 2], "low": 0, "high": 9}, 3),
        (grown, ends, {"items": [1, 2], "low": 4, "high": 9}, 5),
        (grown, lambda low: low, {"items": [1, 2], "low": 4, "high": 9}, 4),
        (grown, lambda a, b, c: len(a) + b + c, {"items": [1, 2], "low": 4, "high": 9}, 15),
        (Crane.lift, lambda weight: weight / 2, {"self": None, "load": 8}, 4),
        (Crane.lift, lambda self, load: len(self) + load, {"self": [1], "load": 8}, 9),
        (grown, f"{__name__}:ends", {"items": [1, 2], "low": 4, "high": 9}, 5),
    ],
)
def test_the_size_of_a_call(function: Any, size_of: Any, arguments: dict[str, Any], size: float) -> None:
    found = sizer(resolve(function), size_of)(arguments)
    assert type(found) is float
    assert found == size


@pytest.mark.parametrize(
    ("function", "size_of", "message"),
    [
        (bare, None, "bare takes no arguments, so that its calls have no size"),
        (bare, len, "bare takes no arguments, so that its calls have no size"),
        (grown, 4, "size_of must be a function of the call's arguments, such as len; got 4"),
        (grown, "ends", "size_of='ends' is no function; write \"package.module:function\""),
        (grown, "math:nothing", "size_of='math:nothing' cannot be had: module 'math' has no attribute 'nothing'"),
        (
            grown,
            lambda items, most: 1,
            (
                "size_of takes items, most, but grown has the arguments items, low, high; "
                "name its parameters after those it needs"
            ),
        ),
    ],
)
def test_a_size_that_cannot_be_had_is_refused_with_the_remedy(function: Any, size_of: Any, message: str) -> None:
    with pytest.raises(TargetError) as caught:
        sizer(resolve(function), size_of)
    assert str(caught.value) == message


def test_an_argument_without_a_size_is_told_when_it_comes() -> None:
    with pytest.raises(TargetError, match="no argument of unsized has a length or is a whole number; give size_of="):
        sizer(resolve(unsized))({"thing": object()})
