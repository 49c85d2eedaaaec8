"""pytest's hooks, and nothing else. Imports pytest and the standard library only: a run without budgets pays nothing.

PYTEST_DONT_REWRITE
"""

from __future__ import annotations

from collections.abc import Generator
from typing import Any

import pytest

from pytest_growthbudget import settings as settings_module
from pytest_growthbudget.checks import SettingsError
from pytest_growthbudget.running.underway import Underway, underway_key
from pytest_growthbudget.workloads import collect, internals
from pytest_growthbudget.workloads.fixtures import (
    Shared,
    metered,
    problem_size,
    settings_key,
    shared_key,
    tally,
    workload_rng,
)
from pytest_growthbudget.workloads.repeat import GrowthItem

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
    config.addinivalue_line("markers", settings_module.marker_line())
    try:
        settings = settings_module.resolve(config)
    except SettingsError as error:
        raise pytest.UsageError(str(error)) from None
    config.stash[settings_key] = settings
    config.stash[shared_key] = Shared(settings.ordinary_size, settings.seed)
    config.pluginmanager.register(Ledger(), "growthbudget-ledger")
    config.stash[underway_key] = Underway(config)
    config.pluginmanager.register(config.stash[underway_key], "growthbudget-underway")
    if config.getoption("--growth-records") or config.getoption("--growth-page") or settings.ratchet:
        from pytest_growthbudget.running import keeping

        if keeping.wanted(config, settings):
            config.pluginmanager.register(keeping.Keeper(config, settings), "growthbudget-keeper")


@pytest.hookimpl(trylast=True)
def pytest_generate_tests(metafunc: pytest.Metafunc) -> None:
    collect.give_sizes(metafunc, metafunc.config.stash[settings_key])


@pytest.hookimpl(wrapper=True, tryfirst=True)
def pytest_pycollect_makeitem(collector: pytest.Collector, name: str, obj: object) -> Generator[None, Any, Any]:
    settings = collector.config.stash[settings_key]
    if settings.enabled:
        collect.refuse_misplaced(collector, name, obj)
    made = yield
    if isinstance(made, list):
        return [collect.reported(item, settings) if isinstance(item, pytest.Function) else item for item in made]
    if made is not None and settings.enabled and internals.is_test_case(made):
        collect.refuse_test_case(made, settings)
    return made


def pytest_runtest_setup(item: pytest.Item) -> None:
    if "workload_rng" in getattr(item, "fixturenames", ()):
        item.config.stash[shared_key].reseed(item.nodeid, item.config.stash[settings_key].ordinary_size, 0)


@pytest.hookimpl(wrapper=True)
def pytest_runtest_makereport(item: pytest.Item) -> Generator[None, Any, Any]:
    report = yield
    if report.when == "call" and isinstance(item, GrowthItem):
        from pytest_growthbudget.reporting.failure import sections
        from pytest_growthbudget.reporting.properties import properties_of

        report.growth_judgements = [{"test": item.nodeid, **judgement} for judgement in item.judgements]
        report.sections.extend(sections(item.judgements, item.failed_at))
        # What the body recorded itself, it recorded once a reading.
        properties = [*dict(item.template.user_properties).items(), *properties_of(item.judgements)]
        item.user_properties.extend(properties)
        report.user_properties.extend(properties)
    return report


def pytest_enter_pdb(config: pytest.Config) -> None:
    # Whoever debugs a body takes the time that it takes.
    watch = config.stash[shared_key].watch
    if watch is not None:
        watch.stand_back()


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
        if not internals.is_rerun(report):
            self.judged.extend(getattr(report, "growth_judgements", ()))

    def pytest_terminal_summary(self, terminalreporter: Any) -> None:
        if self.judged:
            from pytest_growthbudget.reporting.summary import write_summary

            write_summary(terminalreporter, self.judged)
