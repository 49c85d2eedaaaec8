"""Every example file in the docs runs, with the outcome that is noted beside it."""

from __future__ import annotations

import re
from pathlib import Path

import pytest

from pytest_growthbudget.bounds.budget import parse_budget

ROOT = Path(__file__).parents[2]
PAGES = [ROOT / "README.md", *sorted((ROOT / "pytest_growthbudget" / "guide").glob("*.md"))]
EXAMPLE = re.compile(r"<!-- file: (?P<name>\S+); outcome: (?P<outcome>[^>]*?) -->\n```python\n(?P<code>.*?)```", re.S)
MARKER = re.compile(r"growth_budget\(\"([^\"]+)\"")
LINK = re.compile(r"\]\(([^)#:]+)(?:#[^)]*)?\)")


def examples() -> list[tuple[str, str, dict[str, int], str]]:
    return [
        (
            f"{path.name}-{found['name']}",
            found["name"],
            {key: int(value) for key, value in re.findall(r"(\w+)=(\d+)", found["outcome"])},
            found["code"],
        )
        for path in PAGES
        for found in EXAMPLE.finditer(path.read_text())
    ]


@pytest.mark.parametrize(("label", "name", "outcome", "code"), examples(), ids=lambda value: str(value)[:40])
def test_an_example_runs(pytester: pytest.Pytester, label: str, name: str, outcome: dict[str, int], code: str) -> None:
    (pytester.path / name).write_text(code)
    pytester.runpytest("-W", "default").assert_outcomes(**outcome)


@pytest.mark.parametrize("path", PAGES, ids=lambda path: path.name)
def test_every_bound_in_the_docs_is_understood(path: Path) -> None:
    for bound in MARKER.findall(path.read_text()):
        parse_budget(bound)


@pytest.mark.parametrize("path", [*PAGES, ROOT / "DEVELOPERS.md"], ids=lambda path: path.name)
def test_every_link_between_the_docs_leads_somewhere(path: Path) -> None:
    for target in LINK.findall(path.read_text()):
        assert (path.parent / target).exists(), target
