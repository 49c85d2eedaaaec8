"""One line on a terminal, rewritten in place under the line that pytest is at, and gone when it is done.

It is shown only where nothing can come of it: to a person's terminal, by the process that owns it, and where output of
the tests is captured, so that nothing else writes in between.
"""

from __future__ import annotations

import os
from typing import Any

import pytest
from _pytest.terminal import TerminalReporter

from pytest_growthbudget.meters import clocks

#: Seconds of measuring before the first line, and between two.
PATIENCE = 1.0
APART = 0.2
# Control sequences of ECMA-48: erase in line, cursor up, cursor forward.
ERASE, UP, FORWARD = "\x1b[K", "\x1b[A", "\x1b[{}C"


class Display:
    """Shows a text, or nothing where that would disturb."""

    def __init__(self, config: pytest.Config) -> None:
        self._config = config
        self._reporter: Any = None
        self._decided = False
        self._shown = False
        self._last = 0

    def show(self, elapsed: float, text: str) -> None:
        """Show `text`, `elapsed` seconds after measuring began."""
        now = clocks.wall_time_ns()
        if elapsed < PATIENCE or now - self._last < APART * 1e9:
            return
        if not self._decided:
            self._decided = True
            self._reporter = reporter_to_use(self._config)
        if self._reporter is None:
            return
        self._last = now
        self._write(("\r" if self._shown else "\n") + text[: self._reporter._tw.fullwidth - 1] + ERASE)
        self._shown = True

    def clear(self) -> None:
        """Take the line away and leave the cursor where pytest had it."""
        if self._shown:
            self._shown = False
            column = self._reporter._tw.width_of_current_line
            self._write("\r" + ERASE + UP + (FORWARD.format(column) if column else ""))

    def _write(self, text: str) -> None:
        # Not by the terminal writer itself, which would take the text for a part of pytest's current line.
        file = self._reporter._tw._file
        capturing: Any = self._config.pluginmanager.get_plugin("capturemanager")
        with capturing.global_and_fixture_disabled():
            file.write(text)
            file.flush()


def reporter_to_use(config: pytest.Config) -> Any:
    """The reporter whose terminal may bear the line; None where there must be none."""
    option = config.option
    reporter = config.pluginmanager.get_plugin("terminalreporter")
    capturing = config.pluginmanager.get_plugin("capturemanager")
    if (
        hasattr(config, "workerinput")
        # Another reporter (several plugins bring one) has a screen of its own.
        or type(reporter) is not TerminalReporter
        or not reporter.isatty
        or os.environ.get("TERM", "") in ("", "dumb")
        or option.verbose < 0
        or capturing is None
        or option.capture == "no"
        or config.getini("log_cli")
        or getattr(option, "log_cli_level", None)
    ):
        return None
    return reporter
