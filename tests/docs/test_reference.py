"""The reference has every public name, and what it says of them is what the code says."""

from __future__ import annotations

import re
from importlib import metadata
from pathlib import Path
from typing import get_args

import pytest

import pytest_growthbudget
from pytest_growthbudget import checks, hookspecs, plans, plugin, pyproject
from pytest_growthbudget.__main__ import COMMANDS
from pytest_growthbudget.fitting.judgement import VerdictName
from pytest_growthbudget.meters.registry import _BUILT_IN
from pytest_growthbudget.reporting.properties import properties_of
from pytest_growthbudget.settings import DEFAULT_SLACK
from pytest_growthbudget.workloads import shapes

GUIDE = Path(pytest_growthbudget.__file__).parent / "guide"
REFERENCE = GUIDE / "reference.md"
JUDGED = {"meter": "METER", "verdict": "within", "theta": "n", "excess": {"estimate": 0.0, "low": 0.0, "high": 0.0}}


@pytest.mark.parametrize(
    ("what", "names"),
    [
        ("arguments of the marker", plans.marker_arguments()),
        ("keys of pyproject.toml", pyproject._TABLE_KEYS),
        ("fixtures", plugin.__all__),
        ("hooks", [name for name in vars(hookspecs) if name.startswith("pytest_")]),
        ("Python names", pytest_growthbudget.__all__),
        ("verdicts", get_args(VerdictName)),
        ("policies", checks.POLICIES),
        ("meters", _BUILT_IN),
        ("properties", [name for name, _ in properties_of([JUDGED])]),
    ],
)
def test_every_public_name_is_in_the_reference(what: str, names: list[str]) -> None:
    text = REFERENCE.read_text(encoding="utf-8")
    assert [name for name in names if not re.search(rf"`{re.escape(name)}\b", text)] == []


def test_every_option_of_pytest_is_in_the_reference(pytester: pytest.Pytester) -> None:
    offered = set(re.findall(r"--growth[-\w]*", pytester.runpytest("--help").stdout.str()))
    assert offered - set(re.findall(r"--growth[-\w]*", REFERENCE.read_text(encoding="utf-8"))) == set()
    assert len(offered) >= 6


def test_every_command_and_extra_is_in_the_reference() -> None:
    text = REFERENCE.read_text(encoding="utf-8")
    assert [name for name in COMMANDS if f"-m pytest_growthbudget {name} --help" not in text] == []
    extras = metadata.metadata("pytest_growthbudget").get_all("Provides-Extra") or []
    assert [name for name in extras if f"[{name}]" not in text and f"`{name}`" not in text] == []


@pytest.mark.parametrize(("meter", "slack"), DEFAULT_SLACK.items())
def test_the_guide_to_meters_has_every_meter_with_its_slack(meter: str, slack: float) -> None:
    rows = re.findall(rf"^\| `{meter}(?::NAME)?` .* \| (\S+) \|$", (GUIDE / "meters.md").read_text("utf-8"), re.M)
    assert rows == [str(slack)]


def test_every_shape_is_in_the_guide() -> None:
    text = (GUIDE / "tasks.md").read_text(encoding="utf-8")
    assert [name for name in shapes.SHAPES if f"`{name}`" not in text] == []


def test_every_environment_variable_that_is_read_is_in_the_reference() -> None:
    package = Path(pytest_growthbudget.__file__).parent
    code = "".join(path.read_text(encoding="utf-8") for path in package.rglob("*.py"))
    read = set(re.findall(r"""(?:environ(?:\.get\(|\[)|getenv\()["'](\w+)""", code))
    assert read
    assert [name for name in read if f"`{name}`" not in REFERENCE.read_text(encoding="utf-8")] == []
