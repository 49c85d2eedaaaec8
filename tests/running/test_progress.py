"""The line that says what is being read: on a person's terminal, and nowhere else."""

from __future__ import annotations

import os
import re
import subprocess
import sys
from types import SimpleNamespace
from typing import Any

import pytest

from pytest_growthbudget.running import progress
from pytest_growthbudget.running.progress import Display

pty = pytest.importorskip("pty")

#: Reads for long enough to be shown, by showing at once.
CONFTEST = """
    import pytest
    from pytest_growthbudget.running import progress

    progress.PATIENCE = progress.APART = 0.0
"""
TEST = """
    import pytest

    @pytest.mark.growth_budget("n", meter="tally:looks", largest=64)
    def test_looks(problem_size, tally):
        print("the body says so")
        tally.add("looks", problem_size)

    def test_next():
        pass
"""
LINE = re.compile(r"\ngrowth budget: reading tally:looks at n = \d+, 0 s of at most about 10 s\x1b\[K")


@pytest.fixture
def suite(pytester: pytest.Pytester) -> pytest.Pytester:
    pytester.makeconftest(CONFTEST)
    pytester.makepyfile(test_it=TEST)
    return pytester


def on_a_terminal(*arguments: str, term: str = "xterm") -> str:
    """What a run of pytest sends to its terminal."""
    outer, inner = pty.openpty()
    environment = {**os.environ, "TERM": term, "COLUMNS": "80"}
    process = subprocess.Popen(
        [sys.executable, "-m", "pytest", "-p", "no:cacheprovider", *arguments],
        stdin=inner, stdout=inner, stderr=inner, env=environment,
    )  # fmt: skip
    os.close(inner)
    parts = []
    try:
        while data := os.read(outer, 65536):
            parts.append(data)
    except OSError:  # how Linux says that the other end is closed
        pass
    finally:
        os.close(outer)
    assert process.wait(timeout=60) == 0
    return b"".join(parts).decode().replace("\r\n", "\n")


class Screen:
    """As much of a terminal as the line needs: cursor, new line, erase in line."""

    def __init__(self) -> None:
        self.rows, self.row, self.column = [""], 0, 0

    def feed(self, text: str) -> None:
        for part in re.findall(r"\x1b\[\d*[A-Za-z]|\x1b\[[\d;]*m|[\n\r]|[^\x1b\n\r]+", text):
            if part == "\n":
                self.row, self.column = self.row + 1, 0
                self.rows += [""] * (self.row - len(self.rows) + 1)
            elif part == "\r":
                self.column = 0
            elif part == "\x1b[K":
                self.rows[self.row] = self.rows[self.row][: self.column]
            elif part == "\x1b[A":
                self.row -= 1
            elif part.endswith("C") and part.startswith("\x1b"):
                self.column += int(part[2:-1])
            elif not part.startswith("\x1b"):
                old = self.rows[self.row].ljust(self.column)
                self.rows[self.row] = old[: self.column] + part + old[self.column + len(part) :]
                self.column += len(part)


@pytest.mark.parametrize("arguments", [(), ("-v",), ("--capture=sys",)], ids=["plain", "verbose", "sys"])
def test_a_terminal_shows_it_and_is_left_as_if_it_had_not(suite: pytest.Pytester, arguments: tuple[str, ...]) -> None:
    sent = on_a_terminal(*arguments)
    assert LINE.search(sent), sent
    assert "the body says so" not in sent
    screen = Screen()
    screen.feed(sent)
    left = "\n".join(row.rstrip() for row in screen.rows)
    assert "reading tally:looks" not in left
    if "-v" in arguments:
        assert re.search(r"^test_it.py::test_looks PASSED +\[ 50%\]\n", left, re.M), left
    else:
        assert re.search(r"^test_it.py \.\. +\[100%\]$", left, re.M), left


@pytest.mark.parametrize(
    ("arguments", "term"),
    [(("-q",), "xterm"), (("-s",), "xterm"), (("-o", "log_cli=true"), "xterm"), (("-n", "1"), "xterm"), ((), "dumb")],
    ids=["quiet", "uncaptured", "live log", "xdist", "dumb"],
)
def test_it_keeps_out_of_the_way(suite: pytest.Pytester, arguments: tuple[str, ...], term: str) -> None:
    assert "growth budget: reading" not in on_a_terminal(*arguments, term=term)


def test_no_log_bears_it(suite: pytest.Pytester) -> None:
    done = subprocess.run(
        [sys.executable, "-m", "pytest", "-p", "no:cacheprovider"],
        capture_output=True, text=True, check=True, env={**os.environ, "TERM": "xterm"},
    )  # fmt: skip
    assert "growth budget: reading" not in done.stdout + done.stderr
    assert "\x1b" not in done.stdout


def test_short_measurements_are_not_shown(monkeypatch: pytest.MonkeyPatch) -> None:
    asked: list[Any] = []
    monkeypatch.setattr(progress, "reporter_to_use", lambda config: asked.append(config))
    display = Display(SimpleNamespace())  # type: ignore[arg-type]
    display.show(0.9, "reading")
    assert not asked
    display.show(1.1, "reading")
    assert asked
    display.clear()
