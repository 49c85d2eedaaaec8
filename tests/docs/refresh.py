"""Fills the outputs in the README and the guide in: `python -m tests.docs.refresh [FILE.md ...]`.

A comment `<!-- report: FILE -->` stands before the report of that faulty twin of the sample project,
`<!-- command: ARGUMENTS -->` before what `python ARGUMENTS` prints, and between `<!-- names: TABLE -->` and
`<!-- end -->` stands a table of `names.py`. The block after `<!-- script -->` is run, its output is the next block.
"""

from __future__ import annotations

import re
import shlex
import subprocess
import sys
from collections.abc import Callable
from pathlib import Path

from tests.docs.names import TABLES

ROOT = Path(__file__).parents[2]
NAMES = re.compile(r"(<!-- names: (\w+) -->\n).*?(<!-- end -->)", re.S)
COMMAND = re.compile(r"(<!-- command: (.*?) -->\n```\n).*?(```\n)", re.S)
REPORT = re.compile(r"(<!-- report: (.*?) -->\n```\n).*?(```\n)", re.S)
SCRIPT = re.compile(r"(<!-- script -->\n```python\n(.*?)```\n\n```\n).*?(```\n)", re.S)


def python(*arguments: str, folder: Path = ROOT) -> str:
    done = subprocess.run(
        [sys.executable, *arguments], cwd=folder, capture_output=True, text=True, check=False, env={"COLUMNS": "80"}
    )
    return done.stdout


def report(name: str) -> str:
    """The report of the first failure in one file of the faulty twins."""
    output = python("-m", "pytest", "-p", "no:cacheprovider", f"sample_project/faulty_twins/{name}")
    found = re.search(r"^-+ growth budget -+\n(.*?)^(?:-{10}|={10})", output, re.S | re.M)
    assert found, output
    return found.group(1)


def settled(text: str) -> str:
    """The text with all that is the same on every machine: tables of names, and what commands print."""
    text = NAMES.sub(lambda place: f"{place[1]}\n{TABLES[place[2]]()}\n\n{place[3]}", text)
    return filled(text, COMMAND, lambda arguments: python(*shlex.split(arguments)))


def refreshed(text: str) -> str:
    """The text with that, and with what was measured anew."""
    text = filled(settled(text), REPORT, report)
    return filled(text, SCRIPT, lambda code: python("-c", code, folder=ROOT / "sample_project"))


def filled(text: str, block: re.Pattern[str], by: Callable[[str], str]) -> str:
    return block.sub(lambda found: found[1] + by(found[2]).rstrip() + "\n" + found[3], text)


def main() -> None:
    chosen = [Path(name).resolve() for name in sys.argv[1:]]
    for path in chosen or [ROOT / "README.md", *sorted((ROOT / "pytest_growthbudget" / "guide").glob("*.md"))]:
        before = path.read_text()
        after = refreshed(before)
        if after != before:
            path.write_text(after)
            print(f"refreshed {path.relative_to(ROOT)}")


if __name__ == "__main__":
    main()
