"""What the commands share: options that end in an exit code, and faults said on standard error."""

from __future__ import annotations

import argparse
from collections.abc import Sequence
from typing import NoReturn, TextIO


class BadUsage(Exception):
    """The options cannot be used. `code`: the exit code; 0 where only help was asked for."""

    def __init__(self, code: int) -> None:
        super().__init__(code)
        self.code = code


class Options(argparse.ArgumentParser):
    """An argument parser that writes to the streams of its command and never ends the process."""

    def __init__(self, command: str, about: str, out: TextIO, error: TextIO) -> None:
        super().__init__(prog=f"python -m pytest_growthbudget {command}", description=about, allow_abbrev=False)
        self.out, self.error_stream = out, error

    def parse(self, arguments: Sequence[str]) -> argparse.Namespace:
        """The options. Raises `BadUsage` once the fault or the help has been written."""
        return self.parse_args(list(arguments))

    def print_help(self, file: object = None) -> None:
        self.out.write(self.format_help())

    def exit(self, status: int = 0, message: str | None = None) -> NoReturn:
        if message:
            self.error_stream.write(message)
        raise BadUsage(status)

    def error(self, message: str) -> NoReturn:
        self.error_stream.write(f"{self.format_usage()}{message}\n")
        raise BadUsage(2)
