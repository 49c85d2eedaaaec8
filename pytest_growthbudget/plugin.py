"""pytest's hooks for any run, and nothing else. What only a budgeted test needs is imported when one is collected, and
its hooks stand in `running.hooks`: a run without budgets pays next to nothing.

PYTEST_DONT_REWRITE
"""

from __future__ import annotations

from collections.abc import Generator
from typing import Any

import pytest

from pytest_growthbudget.settings import MARKER, MARKER_LINE, SettingsError, resolve
from pytest_growthbudget.workloads.fixtures import (
    Shared,
    metered,
    problem_size,
    settings_key,
    shared_key,
    tally,
    workload_rng,
)

__all__ = ["metered", "problem_size", "tally", "workload_rng"]


def pytest_addhooks(pluginmanager: pytest.PytestPluginManager) -> None:
    from pytest_growthbudget import hookspecs

    pluginmanager.add_hookspecs(hookspecs)


def pytest_addoption(parser: pytest.Parser) -> None:
    # Help texts: a whole sentence in the imperative, the default in brackets at the end.
    group = parser.getgroup("growthbudget", "growth budgets")
    group.addoption(
        "--growth",
        choices=("on", "off"),
        default="on",
        help="Judge growth budgets, or run each budgeted test once as a plain test (on).",
    )
    group.addoption("--growth-seed", type=int, metavar="N", help="Seed the sizes and workloads with this number (1).")
    group.addoption(
        "--growth-time-limit",
        type=float,
        metavar="SECONDS",
        help="Spend at most this long on the budgets of one test, each (10).",
    )
    group.addoption(
        "--growth-session-time-limit",
        type=float,
        metavar="SECONDS",
        help="Spend at most this long on measuring in the whole run, under xdist in each worker (no limit).",
    )
    group.addoption("--growth-records", metavar="FILE", help="Add the judgements of this run to FILE, as JSON Lines.")
    group.addoption("--growth-page", metavar="FILE", help="Draw the judgements of this run as an HTML page in FILE.")


def pytest_configure(config: pytest.Config) -> None:
    config.addinivalue_line("markers", MARKER_LINE)
    try:
        settings = resolve(config)
    except SettingsError as error:
        raise pytest.UsageError(str(error)) from None
    config.stash[settings_key] = settings
    config.stash[shared_key] = Shared(settings.ordinary_size, settings.seed)
    config.pluginmanager.register(Ledger(), "growthbudget-ledger")
    if config.getoption("--growth-records") or config.getoption("--growth-page") or settings.ratchet:
        from pytest_growthbudget.running import keeping

        if keeping.wanted(config, settings):
            config.pluginmanager.register(keeping.Keeper(config, settings), "growthbudget-keeper")


@pytest.hookimpl(trylast=True)
def pytest_generate_tests(metafunc: pytest.Metafunc) -> None:
    settings = metafunc.config.stash[settings_key]
    if settings.budgets or MARKER in metafunc.definition.keywords:
        from pytest_growthbudget.workloads.collect import give_sizes

        give_sizes(metafunc, settings)


@pytest.hookimpl(wrapper=True, tryfirst=True)
def pytest_pycollect_makeitem(collector: pytest.Collector, name: str, obj: object) -> Generator[None, Any, Any]:
    settings = collector.config.stash[settings_key]
    if settings.enabled and _carries_a_budget(obj):
        from pytest_growthbudget.workloads.collect import refuse_misplaced

        refuse_misplaced(collector, name, obj)
    made = yield
    if isinstance(made, list):
        if settings.budgets or any(MARKER in item.keywords for item in made):
            from pytest_growthbudget.running.hooks import register
            from pytest_growthbudget.workloads.collect import reported

            register(collector.config)
            return [reported(item, settings) if isinstance(item, pytest.Function) else item for item in made]
    elif settings.enabled and isinstance(made, pytest.Class):
        from pytest_growthbudget.workloads.internals import is_test_case

        if is_test_case(made):
            from pytest_growthbudget.workloads.collect import refuse_test_case

            refuse_test_case(made, settings)
    return made


def _carries_a_budget(found: object) -> bool:
    """Whether `found` in a module is a marked function or fixture, or the marker itself."""
    if isinstance(found, pytest.MarkDecorator):
        return found.name == MARKER
    marks = getattr(found, "pytestmark", ()) if type(found).__name__ in _MARKED else ()
    return any(mark.name == MARKER for mark in marks)


#: Types whose attributes can be asked for without waking a lazy object of the user's.
_MARKED = ("function", "FixtureFunctionDefinition")


def pytest_runtest_setup(item: pytest.Item) -> None:
    if "workload_rng" in getattr(item, "fixturenames", ()):
        item.config.stash[shared_key].reseed(item.nodeid, item.config.stash[settings_key].ordinary_size, 0)


def pytest_report_header(config: pytest.Config) -> str | None:
    settings = config.stash[settings_key]
    if not settings.enabled:
        return "growth budgets: off"
    return None


# ------------------------------------------------------------------ gathering, on the controller


class Ledger:
    """Gathers the judgements that the reports of all workers carry, and has them summed up at the end."""

    def __init__(self) -> None:
        self.judged: list[dict[str, Any]] = []

    def pytest_runtest_logreport(self, report: pytest.TestReport) -> None:
        judgements = getattr(report, "growth_judgements", ())
        if judgements:
            from pytest_growthbudget.workloads.internals import is_rerun

            if not is_rerun(report):
                self.judged.extend(judgements)

    def pytest_terminal_summary(self, terminalreporter: Any) -> None:
        if self.judged:
            from pytest_growthbudget.reporting.summary import write_summary

            write_summary(terminalreporter, self.judged)
