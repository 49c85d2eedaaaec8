"""Records and page of whole runs, alone and under xdist; whatever cannot be written costs no verdict."""

from __future__ import annotations

import json
import os
import signal
import subprocess
import sys
import time
from pathlib import Path

import jsonschema
import pytest

from pytest_growthbudget.reporting.records import read_records
from pytest_growthbudget.reporting.schema import schema

SUITE = """
import pytest

@pytest.mark.growth_budget("n", meter="tally:lines", largest=100)
@pytest.mark.parametrize("power", [1, 2], ids=["kept", "größe"])
def test_manifest(problem_size, tally, power):
    tally.add("lines", 100 * problem_size ** power)

def test_plain():
    pass
"""
VERDICTS = "2 growth budgets: 1 within, 1 exceeded*"


@pytest.fixture
def suite(pytester: pytest.Pytester, monkeypatch: pytest.MonkeyPatch) -> pytest.Pytester:
    (pytester.path / "elsewhere").mkdir()
    monkeypatch.setenv("TMPDIR", str(pytester.path / "elsewhere"))
    pytester.makepyfile(test_harbour=SUITE)
    return pytester


@pytest.mark.parametrize("arguments", [(), ("-n", "2")], ids=["alone", "xdist"])
def test_records_and_page(suite: pytest.Pytester, arguments: tuple[str, ...]) -> None:
    pytest.importorskip("matplotlib", reason="the page needs the extra [page]")
    result = suite.runpytest_subprocess("--growth-records=r.jsonl", "--growth-page=p.html", *arguments)
    result.assert_outcomes(passed=2, failed=1)
    result.stdout.fnmatch_lines([VERDICTS, "growth records: 2 added to *r.jsonl", "growth page: *p.html"])
    kept = read_records([suite.path / "r.jsonl"])
    assert kept.faults == ()
    validator = jsonschema.Draft202012Validator(schema())
    for record in kept.records:
        validator.validate(record)
    assert {record["test"]: record["judgement"]["verdict"] for record in kept.records} == {
        "test_harbour.py::test_manifest[kept]": "within",
        "test_harbour.py::test_manifest[gr\\xf6\\xdfe]": "exceeded",
    }
    assert {record["run"]["workers"] for record in kept.records} == {2 if arguments else 0}
    assert len({record["run"]["id"] for record in kept.records}) == 1
    assert "test_harbour.py" in (suite.path / "p.html").read_text(encoding="utf-8")
    again = suite.runpytest_subprocess("--growth-records=r.jsonl", "-k", "kept", *arguments)
    again.stdout.fnmatch_lines(["growth records: 1 added to *r.jsonl"])
    assert len(read_records([suite.path / "r.jsonl"]).records) == 3
    assert sorted(path.name for path in suite.path.iterdir() if path.suffix in (".jsonl", ".unfinished", ".part")) == [
        "r.jsonl"
    ]


def test_nothing_is_written_without_being_asked_for(suite: pytest.Pytester) -> None:
    suite.runpytest_subprocess("-k", "kept")
    suite.runpytest_subprocess("--growth=off", "--growth-records=r.jsonl", "--growth-page=p.html")
    suite.runpytest_subprocess("--collect-only", "--growth-records=r.jsonl", "--growth-page=p.html")
    assert [path.name for path in suite.path.iterdir() if path.suffix in (".jsonl", ".html")] == []


FAULTS = {
    "no directory": ("--growth-records=none/r.jsonl", "*there is no directory *none", "*no such file or directory*"),
    "a directory": ("--growth-records=.", "*is a directory", "growth records not written to *: is a directory; *"),
    "page, no directory": (
        "--growth-page=none/p.html",
        "*there is no directory *none",
        "growth page not written to *p.html: no such file or directory",
    ),
}


@pytest.mark.parametrize("name", FAULTS)
def test_paths_that_cannot_be_written(suite: pytest.Pytester, name: str) -> None:
    option, warned, told = FAULTS[name]
    if "page" in name:
        pytest.importorskip("matplotlib", reason="the page needs the extra [page]")
    result = suite.runpytest_subprocess(option, "-k", "kept or plain")
    result.assert_outcomes(passed=2, deselected=1)
    result.stdout.fnmatch_lines([warned, "1 growth budget: 1 within*", told])
    assert result.ret == pytest.ExitCode.TESTS_FAILED, "what was asked for and is not there fails a green run"
    assert suite.runpytest_subprocess(option, "-k", "manifest").ret == pytest.ExitCode.TESTS_FAILED


@pytest.mark.skipif(not os.path.exists("/dev/full"), reason="no /dev/full on this system")
def test_a_full_disk(suite: pytest.Pytester) -> None:
    result = suite.runpytest_subprocess("--growth-records=/dev/full", "-k", "kept")
    result.stdout.fnmatch_lines(
        ["1 growth budget: 1 within*", "growth records not written to /dev/full: no space left on device; they are *"]
    )
    assert result.ret == pytest.ExitCode.TESTS_FAILED
    rescued = Path(result.stdout.str().split("they are kept in ")[1].split("\n")[0])
    assert rescued.parent.name == "elsewhere"
    assert len(read_records([rescued]).records) == 1


def test_a_page_without_its_extra(suite: pytest.Pytester) -> None:
    suite.makeconftest(
        """
        import importlib.util
        real = importlib.util.find_spec
        importlib.util.find_spec = lambda name, *rest: None if name == "jinja2" else real(name, *rest)
        """
    )
    result = suite.runpytest_subprocess("--growth-page=p.html", "-k", "kept")
    mend = 'the page needs jinja2, not installed here: pip install "pytest_growthbudget[[]page]"'
    result.stdout.fnmatch_lines(
        [f"growth budgets: warning: {mend}", "1 growth budget: 1 within*", f"growth page not written: {mend}"]
    )
    assert result.ret == pytest.ExitCode.TESTS_FAILED
    assert not (suite.path / "p.html").exists()


def test_a_fault_in_drawing_costs_no_verdict(suite: pytest.Pytester) -> None:
    pytest.importorskip("matplotlib", reason="the page needs the extra [page]")
    suite.makeconftest(
        """
        from pytest_growthbudget.reporting import page

        def render(records):
            raise ZeroDivisionError("no ink")

        page.render = render
        """
    )
    result = suite.runpytest_subprocess("--growth-page=p.html", "-k", "kept")
    result.stdout.fnmatch_lines(["1 growth budget: 1 within*", "growth page not drawn: ZeroDivisionError: no ink"])
    assert result.ret == pytest.ExitCode.TESTS_FAILED


def test_a_terminal_that_is_not_utf_8(suite: pytest.Pytester, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setenv("PYTHONIOENCODING", "ascii")
    (suite.path / "größe").mkdir()
    result = suite.runpytest_subprocess("--growth-records=größe/r.jsonl", "-k", "kept")
    result.stdout.fnmatch_lines(["growth records: 1 added to *r.jsonl"])
    assert result.ret == pytest.ExitCode.OK
    assert len(read_records([suite.path / "größe" / "r.jsonl"]).records) == 1


@pytest.mark.skipif(not hasattr(signal, "SIGKILL"), reason="no SIGKILL on this system")
def test_a_run_that_is_killed_loses_no_judgement(suite: pytest.Pytester) -> None:
    suite.makepyfile(
        test_harbour=SUITE
        + """
def test_never_ends():
    import pathlib, time
    pathlib.Path("waiting").touch()
    time.sleep(600)
"""
    )
    command = [sys.executable, "-m", "pytest", "--growth-records=r.jsonl", "-p", "no:cacheprovider"]
    with subprocess.Popen(command, cwd=suite.path, stdout=subprocess.DEVNULL) as process:
        for _ in range(1200):
            if (suite.path / "waiting").exists() or process.poll() is not None:
                break
            time.sleep(0.05)
        process.kill()
    assert not (suite.path / "r.jsonl").exists()
    suite.makepyfile(test_harbour=SUITE)
    result = suite.runpytest_subprocess("--growth-records=r.jsonl", "-k", "kept")
    result.stdout.fnmatch_lines(["growth records: 1 added to *r.jsonl, and 2 of runs that were cut off"])
    runs = [json.loads(line)["run"]["id"] for line in (suite.path / "r.jsonl").read_text().splitlines()]
    assert len(runs) == 3
    assert len(set(runs)) == 2


def test_an_interrupted_run_writes_what_it_judged(suite: pytest.Pytester) -> None:
    suite.makepyfile(test_harbour=SUITE + "\ndef test_stopped():\n    raise KeyboardInterrupt\n")
    result = suite.runpytest_subprocess("--growth-records=r.jsonl")
    assert result.ret == pytest.ExitCode.INTERRUPTED
    assert len(read_records([suite.path / "r.jsonl"]).records) == 2
