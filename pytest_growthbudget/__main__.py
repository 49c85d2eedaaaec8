"""`python -m pytest_growthbudget COMMAND …`: each command's module is imported when it is asked for."""

from __future__ import annotations

import importlib
import sys
from collections.abc import Callable, Sequence
from typing import TextIO

Command = Callable[[Sequence[str], TextIO, TextIO], int]

# name: (module, function, what it does). A command takes its arguments, standard output and standard error, and
# returns the exit code: 0 fine, 1 exceeded, 2 the input is at fault.
COMMANDS = {
    "explain": (
        "pytest_growthbudget.bounds.terminal",
        "explain",
        "the growth of a bound or recurrence, derived",
    ),
    "compare": (
        "pytest_growthbudget.bounds.terminal",
        "compare_command",
        "which of two growths is the slower",
    ),
    "judge": (
        "pytest_growthbudget.commands.judge",
        "judge_command",
        "costs measured elsewhere, against a bound",
    ),
    "trend": (
        "pytest_growthbudget.commands.trend",
        "trend_command",
        "how growth and cost moved over the runs of records files",
    ),
    "accept": (
        "pytest_growthbudget.commands.accept",
        "accept_command",
        "accept what records files say, for the ratchet to hold to",
    ),
    "page": (
        "pytest_growthbudget.commands.page",
        "page_command",
        "draw the page of records files",
    ),
}


def _usage() -> str:
    lines = ["usage: python -m pytest_growthbudget COMMAND ...", "", "commands:"]
    lines += [f"  {name:<10}{about}" for name, (_, _, about) in COMMANDS.items()]
    return "\n".join(lines)


def main(arguments: Sequence[str]) -> int:
    """Runs one command and returns its exit code."""
    if not arguments or arguments[0] in ("-h", "--help"):
        print(_usage(), file=sys.stdout if arguments else sys.stderr)
        return 0 if arguments else 2
    if arguments[0] not in COMMANDS:
        print(f"unknown command {arguments[0]!r}\n\n{_usage()}", file=sys.stderr)
        return 2
    module, function, _ = COMMANDS[arguments[0]]
    command: Command = getattr(importlib.import_module(module), function)
    for stream in (sys.stdout, sys.stderr):
        reconfigure = getattr(stream, "reconfigure", None)
        if reconfigure is not None:
            reconfigure(errors="backslashreplace")
    return command(arguments[1:], sys.stdout, sys.stderr)


if __name__ == "__main__":
    try:
        sys.exit(main(sys.argv[1:]))
    except BrokenPipeError:
        sys.exit(0)
