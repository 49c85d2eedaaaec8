"""What a run leaves behind: its records and its page, written by the controller; and how the ratchet fared.

None of it may cost the user the verdicts: whatever cannot be written is said after them, and makes a run that
would have been green end with exit code 1.
"""

from __future__ import annotations

from collections import Counter
from pathlib import Path
from typing import Any

import pytest

from pytest_growthbudget.reporting.environment import environment, run_facts
from pytest_growthbudget.reporting.extra import missing_libraries
from pytest_growthbudget.reporting.files import reason, replace_file
from pytest_growthbudget.reporting.records import NotWritten, Record, RecordsFile, record_of
from pytest_growthbudget.running.ratchet import accepted_of
from pytest_growthbudget.settings import Settings
from pytest_growthbudget.workloads import internals

SHOWN_FAULTS = 5


def wanted(config: pytest.Config, settings: Settings) -> bool:
    """Whether this process has anything to keep: xdist's workers send their judgements to the controller."""
    if hasattr(config, "workerinput") or not settings.enabled or config.option.collectonly:
        return False
    return bool(config.getoption("--growth-records") or config.getoption("--growth-page") or settings.ratchet)


class Keeper:
    """Gathers the records of a run, and writes them and the page at its end."""

    def __init__(self, config: pytest.Config, settings: Settings) -> None:
        self.config = config
        self.ratchet = settings.ratchet
        self.run = run_facts(seed=settings.seed, workers=workers(config))
        self.records: list[Record] = []
        self.said: list[str] = []
        self.failed: list[str] = []
        records, page = config.getoption("--growth-records"), config.getoption("--growth-page")
        self.file = RecordsFile(self._path(records), self.run["id"]) if records else None
        self.page = self._path(page) if page else None

    def _path(self, text: str) -> Path:
        return self.config.invocation_params.dir / Path(text).expanduser()

    # ------------------------------------------------------------ before

    def pytest_report_header(self) -> list[str]:
        lines = [f"growth budgets: warning: {fault}" for fault in self._foreseen()]
        if self.ratchet:
            accepted = accepted_of(self.config, self.ratchet)
            count = "no such file yet" if accepted.missing else f"{len(accepted.by_budget)} budgets"
            lines.append(f"growth budgets: accepted records: {self.ratchet.accepted} ({count})")
        return lines

    def _foreseen(self) -> list[str]:
        """What will go wrong at the end, as far as it can be told before anything is measured."""
        faults = []
        for path in (self.file.path if self.file else None, self.page):
            if path is not None and path.is_dir():
                faults.append(f"{path} is a directory")
            elif path is not None and not path.parent.is_dir():
                faults.append(f"there is no directory {path.parent}")
        if self.page and (missing := missing_libraries()):
            faults.append(missing)
        return faults

    # ------------------------------------------------------------ during and after

    def pytest_runtest_logreport(self, report: pytest.TestReport) -> None:
        if internals.is_rerun(report):
            return
        for judged in getattr(report, "growth_judgements", ()):
            record = record_of(judged, self.run, environment())
            self.records.append(record)
            if self.file:
                self.file.keep(record)

    @pytest.hookimpl(tryfirst=True)
    def pytest_sessionfinish(self, session: pytest.Session) -> None:
        if self.file:
            self._write_records(self.file)
        if self.page:
            self._write_page(self.page)
        if self.ratchet:
            self._sum_up_ratchet(accepted_of(self.config, self.ratchet).faults)
        if self.failed and session.exitstatus in (pytest.ExitCode.OK, pytest.ExitCode.NO_TESTS_COLLECTED):
            session.exitstatus = pytest.ExitCode.TESTS_FAILED

    @pytest.hookimpl(trylast=True)
    def pytest_terminal_summary(self, terminalreporter: Any) -> None:
        for line in self.said:
            terminalreporter.write_line(line)
        for line in self.failed:
            terminalreporter.write_line(line, red=True, bold=True)

    # ------------------------------------------------------------ the parts

    def _write_records(self, file: RecordsFile) -> None:
        try:
            file.finish()
        except NotWritten as fault:
            self.failed.append(str(fault))
            return
        adopted = f", and {file.adopted} of runs that were cut off" if file.adopted else ""
        self.said.append(f"growth records: {len(self.records)} added to {file.path}{adopted}")

    def _write_page(self, path: Path) -> None:
        missing = missing_libraries()
        if missing:
            self.failed.append(f"growth page not written: {missing}")
            return
        from pytest_growthbudget.reporting.page import render

        try:
            replace_file(path, render(self.records).encode("utf-8", "backslashreplace"))
        except OSError as error:
            self.failed.append(f"growth page not written to {path}: {reason(error)}")
        except Exception as error:  # the verdicts are worth more than the page
            self.failed.append(f"growth page not drawn: {type(error).__name__}: {error}")
        else:
            self.said.append(f"growth page: {path}")

    def _sum_up_ratchet(self, faults: tuple[Any, ...]) -> None:
        counts: Counter[str] = Counter()
        for record in self.records:
            drift = record["judgement"].get("drift")
            known = {True: "risen", False: "not risen", None: "not comparable"}
            counts[known[drift["risen"]] if drift else "not accepted yet"] += 1
        if counts:
            parts = ", ".join(f"{count} {name}" for name, count in sorted(counts.items()))
            self.said.append(f"against accepted records: {parts}")
        self.failed.extend(f"accepted records: {fault}" for fault in faults[:SHOWN_FAULTS])
        if len(faults) > SHOWN_FAULTS:
            self.failed.append(f"accepted records: and {len(faults) - SHOWN_FAULTS} faults more")


def workers(config: pytest.Config) -> int:
    """The number of xdist's worker processes; 0 where this process runs the tests itself."""
    if getattr(config.option, "dist", "no") == "no":
        return 0
    return len(getattr(config.option, "tx", None) or ())
