"""`explain` and `compare` for a terminal: text for people, JSON lines for programs."""

from __future__ import annotations

import json
import re
import sys
from collections.abc import Callable, Iterable, Sequence
from typing import Any, TextIO

from pytest_growthbudget.bounds.budget import Budget, compare, describe, parse_budget
from pytest_growthbudget.bounds.language import BoundError

EXPLAIN_USAGE = "usage: python -m pytest_growthbudget explain [--json] TEXT | -"
COMPARE_USAGE = "usage: python -m pytest_growthbudget compare [--json] A B | -"
_EXPLAIN_ABOUT = "Show the growth of the bound or recurrence TEXT, and how it was derived."
_COMPARE_ABOUT = "Say which of two bounds or recurrences grows the slower, by proof."
_OPTIONS_HELP = """Exit code: 0 fine, 2 an input is at fault.

options:
  --json  answer with a JSON object
  -       read one input a line, and answer each with a JSON object
"""
_BETWEEN = (r"\t+", r"\s\|\|?\s", r"\svs\.?\s", r"\s{2,}", r"\s*;\s*", r"\s*,\s*")


def explain(arguments: Sequence[str], out: TextIO, error: TextIO) -> int:
    """Explains one bound or recurrence, or one a line with `-`. Returns 0, or 2 if an input is at fault."""
    if _asks_for_help(arguments):
        out.write(f"{EXPLAIN_USAGE}\n\n{_EXPLAIN_ABOUT}\n{_OPTIONS_HELP}")
        return 0
    as_json, texts = _options(arguments)
    if len(texts) != 1:
        error.write(EXPLAIN_USAGE + "\n")
        return 2
    if texts[0] == "-":
        return _each_line(lambda line: _explained(_one_text(line)), out)
    if as_json:
        answer = _explained(texts[0])
        out.write(json.dumps(answer) + "\n")
        return 2 if "error" in answer else 0
    try:
        budget = parse_budget(texts[0])
    except BoundError as fault:
        error.write(f"{fault}\n")
        return 2
    from pytest_growthbudget.bounds.tables import report

    out.write(report(budget) + "\n")
    return 0


def compare_command(arguments: Sequence[str], out: TextIO, error: TextIO) -> int:
    """Compares two growths, or two a line with `-`. Returns 0, or 2 if an input is at fault."""
    if _asks_for_help(arguments):
        out.write(f"{COMPARE_USAGE}\n\n{_COMPARE_ABOUT}\n{_OPTIONS_HELP}")
        return 0
    as_json, texts = _options(arguments)
    if texts == ["-"]:
        return _each_line(_compared_line, out)
    if len(texts) != 2:
        error.write(COMPARE_USAGE + "\n")
        return 2
    if as_json:
        answer = _compared(texts[0], texts[1])
        out.write(json.dumps(answer) + "\n")
        return 2 if "error" in answer else 0
    try:
        left, right = parse_budget(texts[0]), parse_budget(texts[1])
        relation = compare(left, right)
    except BoundError as fault:
        error.write(f"{fault}\n")
        return 2
    words = {"slower": "grows slower than", "same": "grows like", "faster": "grows faster than"}
    out.write(f"{left.theta} {words[relation]} {right.theta}\n")
    return 0


def _asks_for_help(arguments: Sequence[str]) -> bool:
    return any(argument in ("-h", "--help") for argument in arguments)


def _options(arguments: Sequence[str]) -> tuple[bool, list[str]]:
    return "--json" in arguments, [a for a in arguments if a != "--json"]


def _each_line(answer: Callable[[str], dict[str, Any]], out: TextIO) -> int:
    code = 0
    for line in _lines():
        found = answer(line)
        if "error" in found:
            code = 2
        out.write(json.dumps(found) + "\n")
        out.flush()
    return code


def _lines() -> Iterable[str]:
    """Lines of standard input as text, whatever its encoding; undecodable bytes are replaced."""
    stream = getattr(sys.stdin, "buffer", None)
    if stream is None:
        for line in sys.stdin:
            yield line.rstrip("\r\n")
        return
    for raw in stream:
        yield raw.decode("utf-8", "replace").rstrip("\r\n").lstrip("\ufeff")


def _one_text(line: str) -> str:
    """The input on a line: plain text, a JSON string, or a JSON object with "input"."""
    if line.lstrip()[:1] in ('"', "{"):
        try:
            found = json.loads(line)
        except (ValueError, RecursionError):
            return line
        if isinstance(found, str):
            return found
        if isinstance(found, dict):
            for key in ("input", "text", "bound"):
                if isinstance(found.get(key), str):
                    return str(found[key])
    return line


def _fault(fault: BoundError) -> dict[str, Any]:
    return {"message": fault.message, "position": fault.position, "end": fault.end, "hint": fault.hint}


def _explained(text: str) -> dict[str, Any]:
    try:
        return describe(parse_budget(text))
    except BoundError as fault:
        return {"input": text, "error": _fault(fault)}


def _compared(a: str, b: str) -> dict[str, Any]:
    answer: dict[str, Any] = {"a": a, "b": b}
    side = "a"
    try:
        left: Budget = parse_budget(a)
        side = "b"
        right = parse_budget(b)
        side = "both"
        return {**answer, "relation": compare(left, right)}
    except BoundError as fault:
        return {**answer, "error": {**_fault(fault), "in": side}}


def _compared_line(line: str) -> dict[str, Any]:
    pair = _two_texts(line)
    if pair is None:
        message = "expected two growths on a line, as a JSON list or parted by a tab"
        return {"a": line, "b": "", "error": {"message": message, "position": 0}}
    return _compared(*pair)


def _two_texts(line: str) -> tuple[str, str] | None:
    """The two inputs on a line: a JSON list, a JSON object with "a" and "b", or text with a separator."""
    if line.lstrip()[:1] in ("[", "{"):
        try:
            found = json.loads(line)
        except (ValueError, RecursionError):
            found = None
        if isinstance(found, dict) and isinstance(found.get("a"), str) and isinstance(found.get("b"), str):
            return found["a"], found["b"]
        if isinstance(found, list) and len(found) == 2 and all(isinstance(x, str) for x in found):
            return found[0], found[1]
    for pattern in _BETWEEN:
        parts = re.split(pattern, line.strip())
        if len(parts) == 2:
            return parts[0], parts[1]
    return None
