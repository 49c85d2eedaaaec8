"""Checks a record against the JSON Schema that the package ships, with the standard library alone.

Knows the words that `record.schema.json` uses, with their meaning in JSON Schema (draft 2020-12): `type`, `const`,
`enum`, `required`, `properties`, `items`, `minimum`, `pattern`, `anyOf` and local `$ref`. Any other word in a
schema is refused when it is compiled, so none is passed over. The tests hold it against the jsonschema library.
"""

from __future__ import annotations

import json
import re
from collections.abc import Callable, Mapping
from functools import cache
from importlib import resources
from typing import Any

#: Says what is wrong with a value at a path ("" is fine).
Check = Callable[[Any, str], str]

_COMMENTS = {"$schema", "$defs", "title", "description"}
_IS: dict[str, Callable[[Any], bool]] = {
    "null": lambda value: value is None,
    "boolean": lambda value: value is True or value is False,
    "string": lambda value: type(value) is str,
    "integer": lambda value: type(value) is int or (type(value) is float and value.is_integer()),
    "number": lambda value: type(value) is float or type(value) is int,
    "array": lambda value: type(value) is list,
    "object": lambda value: type(value) is dict,
}


def schema() -> dict[str, Any]:
    """The schema of one record, as shipped."""
    text = resources.files("pytest_growthbudget.reporting").joinpath("record.schema.json").read_text(encoding="utf-8")
    loaded: dict[str, Any] = json.loads(text)
    return loaded


@cache
def record_check() -> Check:
    """The check of one record against the shipped schema."""
    whole = schema()
    return compiled(whole, whole)


def compiled(part: Mapping[str, Any], whole: Mapping[str, Any]) -> Check:
    """The check of a value against `part` of the schema `whole`. Raises ValueError for a word that is not known."""
    if "$ref" in part:
        place: Any = whole
        for name in part["$ref"].removeprefix("#/").split("/"):
            place = place[name]
        return compiled(place, whole)
    checks: list[Check] = []
    for word, value in part.items():
        if word == "type":
            checks.append(_type([value] if isinstance(value, str) else value))
        elif word == "const":
            checks.append(_enum([value]))
        elif word == "enum":
            checks.append(_enum(value))
        elif word == "minimum":
            checks.append(_minimum(value))
        elif word == "pattern":
            checks.append(_pattern(value))
        elif word == "required":
            checks.append(_required(value))
        elif word == "properties":
            checks.append(_properties({name: compiled(item, whole) for name, item in value.items()}))
        elif word == "items":
            checks.append(_items(compiled(value, whole)))
        elif word == "anyOf":
            checks.append(_any_of([compiled(item, whole) for item in value]))
        elif word not in _COMMENTS:
            raise ValueError(f"the schema uses {word!r}, which is not known here")

    def check(value: Any, path: str) -> str:
        for each in checks:
            fault = each(value, path)
            if fault:
                return fault
        return ""

    return check


def _type(names: list[str]) -> Check:
    tests = [_IS[name] for name in names]
    expected = " or ".join(names)

    def check(value: Any, path: str) -> str:
        for test in tests:
            if test(value):
                return ""
        return f"{path or 'the record'} must be {expected}; got {_shown(value)}"

    return check


def _enum(values: list[Any]) -> Check:
    expected = " or ".join(json.dumps(value) for value in values)

    def check(value: Any, path: str) -> str:
        # 1 and True are one value to Python and two to JSON.
        fine = any(value == known and isinstance(value, bool) == isinstance(known, bool) for known in values)
        return "" if fine else f"{path} must be {expected}; got {_shown(value)}"

    return check


def _minimum(low: float) -> Check:
    def check(value: Any, path: str) -> str:
        return f"{path} must be at least {low}; got {value}" if _IS["number"](value) and value < low else ""

    return check


def _pattern(text: str) -> Check:
    expression = re.compile(text.removesuffix("$") + r"\Z" if text.endswith("$") else text)

    def check(value: Any, path: str) -> str:
        fine = type(value) is not str or expression.search(value)
        return "" if fine else f"{path} must look like {text}; got {_shown(value)}"

    return check


def _required(names: list[str]) -> Check:
    def check(value: Any, path: str) -> str:
        if type(value) is dict:
            for name in names:
                if name not in value:
                    return f"{path + '.' if path else ''}{name} is missing"
        return ""

    return check


def _properties(known: dict[str, Check]) -> Check:
    def check(value: Any, path: str) -> str:
        if type(value) is dict:
            stem = path + "." if path else ""
            for name, each in known.items():
                if name in value:
                    fault = each(value[name], stem + name)
                    if fault:
                        return fault
        return ""

    return check


def _items(each: Check) -> Check:
    def check(value: Any, path: str) -> str:
        if type(value) is list:
            for index, item in enumerate(value):
                fault = each(item, f"{path}[{index}]")
                if fault:
                    return fault
        return ""

    return check


def _any_of(choices: list[Check]) -> Check:
    def check(value: Any, path: str) -> str:
        faults = [each(value, path) for each in choices]
        return "" if "" in faults else faults[-1]

    return check


def _shown(value: Any) -> str:
    text = json.dumps(value)
    return text if len(text) <= 40 else text[:37] + "..."
