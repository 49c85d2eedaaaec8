"""Fills the outputs in the README in: `python -m tests.docs.refresh`.

A comment `<!-- report: FILE -->` stands before the report of that faulty twin of the sample project,
`<!-- command: ARGUMENTS -->` before what `python ARGUMENTS` prints.
"""

from __future__ import annotations

import re
import shlex
import subprocess
import sys
from collections.abc import Callable
from pathlib import Path

ROOT = Path(__file__).parents[2]
BLOCK = re.compile(r"(<!-- (report|command): (.*?) -->\n```\n)(.*?)(```\n)", re.S)


def python(*arguments: str) -> str:
    done = subprocess.run(
        [sys.executable, *arguments], cwd=ROOT, capture_output=True, text=True, check=False, env={"COLUMNS": "80"}
    )
    return done.stdout


def report(name: str) -> str:
    """The report of the first failure in one file of the faulty twins."""
    output = python("-m", "pytest", "-p", "no:cacheprovider", f"sample_project/faulty_twins/{name}")
    found = re.search(r"^-+ growth budget -+\n(.*?)^(?:-{10}|={10})", output, re.S | re.M)
    assert found, output
    return found.group(1)


def command(arguments: str) -> str:
    return python(*shlex.split(arguments))


FILLED_BY: dict[str, Callable[[str], str]] = {"report": report, "command": command}


def refreshed(text: str) -> str:
    return BLOCK.sub(lambda block: block[1] + FILLED_BY[block[2]](block[3]).rstrip() + "\n" + block[5], text)


def main() -> None:
    for path in [ROOT / "README.md", *sorted((ROOT / "pytest_growthbudget" / "guide").glob("*.md"))]:
        before = path.read_text()
        after = refreshed(before)
        if after != before:
            path.write_text(after)
            print(f"refreshed {path.relative_to(ROOT)}")


if __name__ == "__main__":
    main()
