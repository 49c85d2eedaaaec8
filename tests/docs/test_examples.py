"""Every example in the docs runs, with the outcome that is noted beside it.

`<!-- file: NAME; outcome: passed=1 -->` stands before a test file, `<!-- file: NAME -->` before a file that stands
beside the next one, `<!-- script -->` before code that is run by itself and prints the block after it. Any other block
of Python is markers, which are read.
"""

from __future__ import annotations

import re
import subprocess
import sys
from pathlib import Path

import pytest

from pytest_growthbudget.plans import plan_of
from pytest_growthbudget.settings import Settings
from tests.docs.refresh import settled

ROOT = Path(__file__).parents[2]
SAMPLE = ROOT / "sample_project"
PAGES = [ROOT / "README.md", *sorted((ROOT / "pytest_growthbudget" / "guide").glob("*.md"))]
BLOCK = re.compile(
    r"(?:<!-- (?P<what>file|script)(?:: (?P<name>\S+?)(?:; outcome: (?P<outcome>.*?))?)? -->\n)?"
    r"```python\n(?P<code>.*?)```\n(?:\n```\n(?P<printed>.*?)```\n)?",
    re.S,
)
LINK = re.compile(r"\]\(([^)#:]*)(?:#([^)]*))?\)")


def blocks(what: str | None) -> list[tuple[Path, re.Match[str]]]:
    return [(path, found) for path in PAGES for found in BLOCK.finditer(path.read_text()) if found["what"] == what]


def examples() -> list[object]:
    """Each test file with the files beside it, by name, and its outcome."""
    found, files = [], {}
    for path, block in blocks("file"):
        files[block["name"]] = block["code"]
        if block["outcome"]:
            outcome = {key: int(value) for key, value in re.findall(r"(\w+)=(\d+)", block["outcome"])}
            found.append(pytest.param(files, outcome, id=f"{path.stem}-{block['name']}"))
            files = {}
    return found


@pytest.mark.parametrize(("files", "outcome"), examples())
def test_an_example_runs(pytester: pytest.Pytester, files: dict[str, str], outcome: dict[str, int]) -> None:
    pytester.syspathinsert(SAMPLE)
    for name, code in files.items():
        (pytester.path / name).write_text(code)
    pytester.runpytest("-W", "default").assert_outcomes(**outcome)


@pytest.mark.parametrize("path", PAGES, ids=lambda path: path.name)
def test_names_and_what_commands_print_are_up_to_date(path: Path) -> None:
    text = path.read_text()
    assert settled(text) == text, "python -m tests.docs.refresh brings it up to date"


def test_a_script_prints_what_the_docs_show() -> None:
    for path, block in blocks("script"):
        run = [sys.executable, "-c", block["code"]]
        done = subprocess.run(run, cwd=SAMPLE, capture_output=True, text=True, check=False)
        # Further lines have figures that differ between versions of Python.
        assert done.stdout.splitlines()[:1] == block["printed"].splitlines()[:1], (path.name, done.stderr)


def test_any_other_block_of_python_is_markers_that_are_accepted(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.syspath_prepend(SAMPLE)
    from harbour.arrivals import merge_manifests

    for _, block in blocks(None):
        known = {"pytest": pytest, "merge_manifests": merge_manifests}
        exec(f"{block['code']}def test(): pass", known)
        for mark in known["test"].pytestmark:
            plan_of(mark.args, mark.kwargs, Settings(), "the docs")


@pytest.mark.parametrize("path", [*PAGES, ROOT / "DEVELOPERS.md"], ids=lambda path: path.name)
def test_every_link_between_the_docs_leads_somewhere(path: Path) -> None:
    for target, place in LINK.findall(path.read_text()):
        page = path.parent / target if target else path
        assert page.exists(), target
        assert not place or place in anchors(page), f"{target}#{place}"


def test_every_file_that_developers_are_sent_to_is_there() -> None:
    named = re.findall(r"`([\w/.]+/[\w.]*)`", (ROOT / "DEVELOPERS.md").read_text())
    assert len(named) > 20
    assert [name for name in named if "NAME" not in name and not is_there(name)] == []


def is_there(name: str) -> bool:
    """Whether it is a folder, a file or a module, from the root or in the package."""
    folders = (ROOT, ROOT / "pytest_growthbudget")
    return any((folder / name).exists() or (folder / f"{name}.py").exists() for folder in folders)


def anchors(page: Path) -> set[str]:
    """What the headings of a page are linked by."""
    headings = re.findall(r"^#+ (.*)$", page.read_text(), re.M)
    return {re.sub(r"[^\w\- ]", "", heading.lower()).replace(" ", "-") for heading in headings}


def test_the_readme_is_short_and_leads_to_every_page() -> None:
    text = (ROOT / "README.md").read_text()
    assert len(text.splitlines()) <= 220
    assert [path.name for path in PAGES if f"guide/{path.name})" not in text and path.name != "README.md"] == []
