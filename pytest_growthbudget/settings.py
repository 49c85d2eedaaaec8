"""Settings of a whole run: command line before pyproject.toml before default; every fault names its source.

Nothing is read lazily: pyproject.toml is checked whole when pytest is configured, a marker when its test is
collected (`plans`). A run with neither pays for no more than this module.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field, replace
from fnmatch import fnmatchcase
from typing import TYPE_CHECKING, Any

if TYPE_CHECKING:
    from pathlib import Path

    import pytest

MARKER = "growth_budget"
#: The line under which `pytest --markers` shows the marker.
MARKER_LINE = (
    "growth_budget(bound, *, yardstick=None, meter='cpu_time', vary=None, smallest=None, largest=None, slack=None, "
    "confidence=None, time_limit=None, undecided=None, at=None, cost=None, scout=None, audit=None, size_of=None): "
    "the cost of the test's body may grow no faster than the bound or recurrence."
)
#: The slack that a meter's noise asks for; a meter of the user's own gets the first or the last of them.
DEFAULT_SLACK = {"cpu_time": 0.15, "wall_time": 0.25, "steps": 0.05, "peak_memory": 0.05, "tally": 0.05}


class SettingsError(Exception):
    """A setting that cannot be used. The message is whole: source, what is wrong, what was expected."""


@dataclass(frozen=True, slots=True, kw_only=True)
class PlacedBudget:
    """A budget that pyproject.toml puts on the tests whose node ids match the glob `test`."""

    test: str
    arguments: Mapping[str, Any]
    source: str

    def may_match(self, base: str) -> bool:
        """Whether a test with the node id `base`, parameters left out, may match."""
        return fnmatchcase(base, self.test) or fnmatchcase(base, self.test.partition("[")[0])

    def matches(self, nodeid: str) -> bool:
        # Brackets in a node id are parameters, not a set of characters.
        return (
            nodeid == self.test
            or fnmatchcase(nodeid, self.test.replace("[", "[[]"))
            or fnmatchcase(nodeid.partition("[")[0], self.test)
        )


@dataclass(frozen=True, slots=True, kw_only=True)
class Ratchet:
    """No test may grow faster than its accepted record.

    Attributes:
        accepted: The file of accepted records, from the project's root.
        margin: The smallest rise of an exponent that fails (0.10 for clocks, 0.03 for counts).
    """

    accepted: str
    margin: float | None = None


@dataclass(frozen=True, slots=True, kw_only=True)
class Settings:
    """What holds for the whole run.

    Attributes:
        confidence: The confidence of the intervals.
        time_limit: Seconds that each budget of a test may take.
        session_time_limit: Seconds of measuring in the whole run, under xdist in each worker (no limit).
        undecided: What becomes of a test whose budget is undecided or unmeasured.
        seed: The seed of sizes and workloads.
        ordinary_size: `problem_size` in a test without a budget.
        scout: Try each new size in a child process first (POSIX).
        slack: The excess that is tolerated, by meter or kind of meter (`tally`).
        budgets: Budgets put on tests by node id.
        ratchet: The accepted records that no test may outgrow.
    """

    enabled: bool = True
    confidence: float = 0.95
    time_limit: float = 10.0
    undecided: str = "warn"
    seed: int = 1
    ordinary_size: int = 100
    scout: bool = False
    slack: Mapping[str, float] = field(default_factory=dict)
    budgets: tuple[PlacedBudget, ...] = ()
    ratchet: Ratchet | None = None
    session_time_limit: float | None = None
    from_command_line: frozenset[str] = frozenset()

    def slack_of(self, meter: str, *, deterministic: bool = False) -> float:
        kind = meter.partition(":")[0]
        fallback = DEFAULT_SLACK["steps" if deterministic else "cpu_time"]
        return self.slack.get(meter, self.slack.get(kind, DEFAULT_SLACK.get(kind, fallback)))


def read_pyproject(path: Path) -> Settings:
    """The settings in the table `[tool.growthbudget]` of `path`; the defaults where there is none.

    Raises `SettingsError` for an unknown key or a value of the wrong kind.
    """
    try:
        raw = path.read_bytes()
    except OSError:
        return Settings()
    if b"growthbudget" not in raw:
        return Settings()
    from pytest_growthbudget.pyproject import settings_in

    return settings_in(raw, path.name)


def resolve(config: pytest.Config) -> Settings:
    """The settings of the run: command line before pyproject.toml before default."""
    settings = read_pyproject(config.rootpath / "pyproject.toml")
    given: dict[str, Any] = {"enabled": config.getoption("--growth") == "on"}
    options = {
        "--growth-seed": "seed",
        "--growth-time-limit": "time_limit",
        "--growth-session-time-limit": "session_time_limit",
    }
    for option, name in options.items():
        value = config.getoption(option)
        if value is not None:
            from pytest_growthbudget.checks import checked

            given[name] = checked(name, value, option)
    return replace(settings, from_command_line=frozenset(given), **given)
