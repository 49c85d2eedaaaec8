"""`judge`: costs that were measured elsewhere, such as in production logs, against a bound."""

from __future__ import annotations

import json
import sys
from argparse import Namespace
from collections.abc import Iterable, Sequence
from pathlib import Path
from typing import Any, TextIO

from pytest_growthbudget.commands.costs_file import CostsError, read_costs
from pytest_growthbudget.commands.options import BadUsage, Options

ABOUT = (
    "Judge costs measured elsewhere against a bound. FILE.csv has a column of sizes and one or more of costs; a size "
    "may be in several rows. With - each line of standard input is an input: the name of such a file, or a JSON "
    'object {"sizes": [...], "costs": [...]} with "bound", "confidence" and "slack" as it likes. '
    "Exit code: 0 fine, 1 exceeded, 2 the input is at fault."
)
#: What the JSON answer holds of a judgement.
ANSWER = (
    "verdict",
    "reason",
    "bound",
    "theta",
    "excess",
    "exponent",
    "resolution",
    "nearest",
    "sizes",
    "allowed",
    "forecast",
    "bends_at",
    "slack",
    "confidence",
    "notes",
)


class InputError(Exception):
    """An input that cannot be judged. `position`: where in the bound's text, None where it is not there."""

    def __init__(self, message: str, whole: str = "", position: int | None = None) -> None:
        super().__init__(message)
        self.whole = whole or message
        self.position = position


def judge_command(arguments: Sequence[str], out: TextIO, error: TextIO) -> int:
    """Judge a file, or one input a line with `-`. Returns 0, 1 where a bound is exceeded, 2 for a faulty input."""
    options = Options("judge", ABOUT, out, error)
    options.add_argument("file", metavar="FILE.csv", help="a file of columns, or - to read one input a line")
    options.add_argument("--bound", metavar="TEXT", help="the bound or recurrence, such as 'n log n'")
    options.add_argument("--size-column", metavar="NAME", help="name or number of the column of sizes (the first)")
    options.add_argument(
        "--cost-column", metavar="NAME", action="append", help="name or number of a column of costs (all others)"
    )
    options.add_argument("--confidence", type=float, default=0.95, metavar="SHARE", help="of the intervals (0.95)")
    options.add_argument("--slack", type=float, default=0.15, metavar="EXPONENT", help="excess tolerated (0.15)")
    options.add_argument("--json", action="store_true", help="answer as a JSON object")
    try:
        given = options.parse(arguments)
        if given.file == "-":
            return _each_line(given, out)
        if given.bound is None:
            options.error("say what the costs are held to, such as --bound 'n log n'")
    except BadUsage as usage:
        return usage.code
    try:
        judged = _judge_file(given.file, given)
    except InputError as fault:
        if given.json:
            out.write(json.dumps({"input": given.file, "error": _fault(fault)}) + "\n")
        else:
            error.write(fault.whole + "\n")
        return 2
    if given.json:
        out.write(json.dumps(_answer(given.file, judged)) + "\n")
    else:
        from pytest_growthbudget.reporting.failure import describe

        out.write(describe(judged) + "\n")
    return _code(judged)


def _each_line(given: Namespace, out: TextIO) -> int:
    codes = [0]
    for line in _lines():
        if not line.strip():
            continue
        try:
            judged = _judge_line(line, given)
        except InputError as fault:
            answer: dict[str, Any] = {"input": line, "error": _fault(fault)}
            codes.append(2)
        else:
            answer = _answer(line, judged)
            codes.append(_code(judged))
        out.write(json.dumps(answer) + "\n")
        out.flush()
    return max(codes)


def _lines() -> Iterable[str]:
    stream = getattr(sys.stdin, "buffer", None)
    for line in stream if stream is not None else sys.stdin:
        text = line.decode("utf-8", "replace") if isinstance(line, bytes) else line
        yield text.rstrip("\r\n").removeprefix("\ufeff")


def _judge_line(line: str, given: Namespace) -> dict[str, Any]:
    if line.lstrip()[:1] not in ("{", "["):
        return _judge_file(line.strip(), given)
    try:
        entry = json.loads(line)
    except (ValueError, RecursionError) as error:
        raise InputError(f"not JSON: {error}") from None
    if not isinstance(entry, dict) or "sizes" not in entry or "costs" not in entry:
        raise InputError('expected a JSON object with "sizes" and "costs"')
    settings = {
        "bound": entry.get("bound", entry.get("budget", given.bound)),
        "confidence": entry.get("confidence", given.confidence),
        "slack": entry.get("slack", given.slack),
    }
    return _judge(entry["sizes"], entry["costs"], **settings)


def _judge_file(file: str, given: Namespace) -> dict[str, Any]:
    try:
        read = read_costs(Path(file), size_column=given.size_column, cost_columns=given.cost_column or ())
    except CostsError as error:
        raise InputError(str(error)) from None
    try:
        return _judge(read.sizes, read.costs, given.bound, given.confidence, given.slack)
    except InputError as fault:
        if fault.position is None:
            raise InputError(f"{file}: {fault}") from None
        raise


def _judge(sizes: Any, costs: Any, bound: Any, confidence: Any, slack: Any) -> dict[str, Any]:
    from pytest_growthbudget.bounds.language import BoundError
    from pytest_growthbudget.fitting.judge import ReadingsError, judge
    from pytest_growthbudget.reporting.wire import to_wire

    if bound is None:
        raise InputError('no bound: give --bound TEXT, or "bound" in the line')
    if not isinstance(bound, str):
        raise InputError(f'the bound must be text, such as "n log n"; got {bound!r}')
    for name, value in (("confidence", confidence), ("slack", slack)):
        if isinstance(value, bool) or not isinstance(value, (int, float)):
            raise InputError(f"{name} must be a number; got {value!r}")
    try:
        judged = judge(sizes, costs, bound, confidence=confidence, slack=slack)
    except BoundError as error:
        raise InputError(error.message, str(error), error.position) from None
    except ReadingsError as error:
        raise InputError(str(error)) from None
    return to_wire(judged, undecided="warn")


def _answer(given: str, judged: dict[str, Any]) -> dict[str, Any]:
    return {"input": given, **{name: judged[name] for name in ANSWER}}


def _fault(fault: InputError) -> dict[str, Any]:
    return {"message": str(fault), "position": fault.position}


def _code(judged: dict[str, Any]) -> int:
    return 1 if judged["verdict"] == "exceeded" else 0
