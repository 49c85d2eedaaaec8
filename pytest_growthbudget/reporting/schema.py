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

#: Where in a value a fault is, from the outside in, and what it is.
Fault = tuple[str, str]
#: The first fault of a value, None where it has none. Paths are put together only for a fault: most values have none.
Check = Callable[[Any], "Fault | None"]

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
def _record_check() -> Check:
    whole = schema()
    return compiled(whole, whole)


def fault_of(record: Any) -> str:
    """What is wrong with a record, by the shipped schema; "" where nothing is."""
    return told(_record_check()(record))


def told(fault: Fault | None) -> str:
    """A fault as a sentence; "" for none."""
    if fault is None:
        return ""
    path, message = fault
    return f"{path.removeprefix('.') or 'the record'} {message}"


def compiled(part: Mapping[str, Any], whole: Mapping[str, Any]) -> Check:
    """The check of a value against `part` of the schema `whole`. Raises ValueError for a word that is not known."""
    if "$ref" in part:
        place: Any = whole
        for name in part["$ref"].removeprefix("#/").split("/"):
            place = place[name]
        return compiled(place, whole)
    checks = [_word(word, value, whole) for word, value in part.items() if word not in _COMMENTS]
    if len(checks) == 1:
        return checks[0]

    def check(value: Any) -> Fault | None:
        for each in checks:
            fault = each(value)
            if fault is not None:
                return fault
        return None

    return check


def _word(word: str, value: Any, whole: Mapping[str, Any]) -> Check:
    if word == "type":
        return _type([value] if isinstance(value, str) else value)
    if word in ("const", "enum"):
        return _enum([value] if word == "const" else value)
    if word == "minimum":
        return _minimum(value)
    if word == "pattern":
        return _pattern(value)
    if word == "required":
        return _required(value)
    if word == "properties":
        return _properties({name: compiled(item, whole) for name, item in value.items()})
    if word == "items":
        return _items(compiled(value, whole))
    if word == "anyOf":
        return _any_of([compiled(item, whole) for item in value])
    raise ValueError(f"the schema uses {word!r}, which is not known here")


def _type(names: list[str]) -> Check:
    tests = [_IS[name] for name in names]
    expected = " or ".join(names)

    def check(value: Any) -> Fault | None:
        for test in tests:
            if test(value):
                return None
        return "", f"must be {expected}; got {_shown(value)}"

    return check


def _enum(values: list[Any]) -> Check:
    expected = " or ".join(json.dumps(value) for value in values)

    def check(value: Any) -> Fault | None:
        for known in values:
            # 1 and True are one value to Python and two to JSON.
            if value == known and isinstance(value, bool) == isinstance(known, bool):
                return None
        return "", f"must be {expected}; got {_shown(value)}"

    return check


def _minimum(low: float) -> Check:
    def check(value: Any) -> Fault | None:
        if (type(value) is float or type(value) is int) and value < low:
            return "", f"must be at least {low}; got {value}"
        return None

    return check


def _pattern(text: str) -> Check:
    expression = re.compile(text.removesuffix("$") + r"\Z" if text.endswith("$") else text)

    def check(value: Any) -> Fault | None:
        if type(value) is not str or expression.search(value):
            return None
        return "", f"must look like {text}; got {_shown(value)}"

    return check


def _required(names: list[str]) -> Check:
    def check(value: Any) -> Fault | None:
        if type(value) is dict:
            for name in names:
                if name not in value:
                    return f".{name}", "is missing"
        return None

    return check


def _properties(known: dict[str, Check]) -> Check:
    pairs = tuple(known.items())

    def check(value: Any) -> Fault | None:
        if type(value) is dict:
            for name, each in pairs:
                if name in value:
                    fault = each(value[name])
                    if fault is not None:
                        return f".{name}{fault[0]}", fault[1]
        return None

    return check


def _items(each: Check) -> Check:
    def check(value: Any) -> Fault | None:
        if type(value) is list:
            for index, item in enumerate(value):
                fault = each(item)
                if fault is not None:
                    return f"[{index}]{fault[0]}", fault[1]
        return None

    return check


def _any_of(choices: list[Check]) -> Check:
    def check(value: Any) -> Fault | None:
        fault = None
        for each in choices:
            fault = each(value)
            if fault is None:
                return None
        return fault

    return check


def _shown(value: Any) -> str:
    text = json.dumps(value)
    return text if len(text) <= 40 else text[:37] + "..."
