"""Drift against accepted records: what counts as a rise, and the ratchet in a whole run."""

from __future__ import annotations

import json
from pathlib import Path
from types import SimpleNamespace
from typing import Any

import pytest

from pytest_growthbudget.__main__ import main
from pytest_growthbudget.reporting import drift, risen
from pytest_growthbudget.reporting.accepted import load_accepted, to_accept
from pytest_growthbudget.reporting.environment import environment
from pytest_growthbudget.reporting.records import read_records
from pytest_growthbudget.running import ratchet
from pytest_growthbudget.settings import Ratchet
from tests.reporting.samples import ENVIRONMENT, SIZES, judgement, real_records, record, write

OTHER = {**ENVIRONMENT, "processor": "Harbour 2"}


def against(before: float, now: float, **how: Any) -> dict[str, Any]:
    environment = how.pop("environment", ENVIRONMENT)
    margin = how.pop("margin", None)
    return drift.against(record(before, seed=1), judgement(now, seed=2, **how), environment, margin)


# ------------------------------------------------------------------ what counts as a rise


@pytest.mark.parametrize("seed", range(20))
def test_the_same_growth_has_not_risen(seed: int) -> None:
    facts = drift.against(record(1.1, seed=seed, noise=0.05), judgement(1.1, seed=seed + 100, noise=0.05), ENVIRONMENT)
    assert facts["risen"] is False


def test_a_plain_rise() -> None:
    facts = against(1.0, 1.25)
    assert facts["risen"] is True
    assert facts["accepted"]["estimate"] == pytest.approx(1.0, abs=0.02)
    assert facts["now"]["estimate"] == pytest.approx(1.25, abs=0.02)


def test_a_fall_is_no_rise() -> None:
    assert against(1.25, 1.0)["risen"] is False


def test_a_sure_rise_below_the_margin_does_not_count_unless_the_margin_is_smaller() -> None:
    assert against(1.0, 1.06, noise=0.001)["risen"] is False
    assert against(1.0, 1.06, noise=0.001, margin=0.02)["risen"] is True


def test_a_rise_that_the_intervals_do_not_tell_does_not_count() -> None:
    assert against(1.0, 1.2, noise=0.5)["risen"] is False


def test_counts_have_a_smaller_margin() -> None:
    exact = record(1.0, noise=0.0, meter="steps", scale=1000.0)
    assert drift.against(exact, judgement(1.05, noise=0.0, meter="steps"), ENVIRONMENT)["risen"] is True
    assert drift.against(exact, judgement(1.02, noise=0.0, meter="steps"), ENVIRONMENT)["risen"] is False


def test_a_run_that_reaches_further_is_compared_over_the_sizes_in_common() -> None:
    """A constant part that fades makes the exponent rise with the size, though the code is the same."""

    def run(sizes: tuple[int, ...]) -> dict[str, Any]:
        made = judgement(1.0, sizes=sizes, noise=0.0)
        for row in made["sizes"]:
            row["cost"] = 100.0 * row["size"] + 2.0 * row["size"] ** 1.5
        return made

    near, far = run(SIZES[:10]), run(tuple(round(32 * 2 ** (step / 2)) for step in range(24)))
    facts = drift.against({**record(1.0), "judgement": near}, far, ENVIRONMENT)
    assert facts["over"] == [SIZES[0], SIZES[9]]
    assert facts["risen"] is False
    assert facts["now"]["estimate"] == pytest.approx(facts["accepted"]["estimate"], abs=1e-9)


def test_too_few_sizes_in_common() -> None:
    facts = drift.against(
        record(1.0, sizes=SIZES[:7]), judgement(1.5, sizes=tuple(size * 20 for size in SIZES[:7])), ENVIRONMENT
    )
    assert facts["risen"] is None
    assert facts["why"] == "fewer than 5 sizes in common"


def test_on_another_processor_only_what_fits_its_caches_is_compared() -> None:
    """Past 1 MiB the cost bends away, as on a processor with a smaller cache."""
    now = judgement(1.0, footprint=1024.0, seed=2)
    for row in now["sizes"]:
        row["cost"] *= max(1.0, row["footprint"] / 2**20) ** 0.6
    before = record(1.0, footprint=1024.0)
    facts = drift.against(before, now, OTHER)
    assert facts["risen"] is False
    assert facts["over"][1] <= 1024
    slow = judgement(1.4, footprint=1024.0, seed=2)
    assert drift.against(before, slow, OTHER)["risen"] is True


def test_on_another_processor_sizes_that_all_leave_the_caches_are_not_compared() -> None:
    facts = drift.against(record(1.0, footprint=1e6), judgement(1.5, footprint=1e6), OTHER)
    assert facts["risen"] is None
    assert facts["why"] == "fewer than 5 sizes in common that fit the caches of both machines"


def test_counts_are_compared_on_any_processor() -> None:
    before = record(1.0, meter="steps", footprint=1e6)
    assert drift.against(before, judgement(1.5, meter="steps", footprint=1e6), OTHER)["risen"] is True


def test_exponential_budgets_are_compared_by_their_excess() -> None:
    (before,) = [r for r in real_records() if r["judgement"]["exponent"] is None]
    now = json.loads(json.dumps(before["judgement"]))
    assert drift.against(before, now, before["environment"])["risen"] is False
    for end in now["excess"]:
        now["excess"][end] += 0.5
    facts = drift.against(before, now, before["environment"])
    assert facts["risen"] is True
    assert risen.first_line({**now, "drift": facts}).startswith("growth has drifted: cpu_time has an excess of 0.")
    now["theta"] = "3^n"
    assert drift.against(before, now, before["environment"])["why"] == "its bound was changed"


def test_what_could_not_be_measured_is_not_compared() -> None:
    now = {**judgement(1.0), "excess": None, "exponent": None}
    assert drift.against(record(1.0), now, ENVIRONMENT)["why"] == "it could not be measured"


def test_what_is_said() -> None:
    now = judgement(1.25, noise=0.0)
    now["drift"] = drift.against(record(1.0, noise=0.0), now, ENVIRONMENT)
    assert risen.first_line(now) == "growth has drifted: cpu_time grows as n^1.25 where n^1.00 was accepted"
    assert risen.fact(now).startswith("exponent 1.25 (1.2")
    assert "over n = 32 to 2,896; accepted on 2026-03-01: 1.00 (" in risen.fact(now)


# ------------------------------------------------------------------ the ratchet in a whole run


SUITE = """
import pytest

@pytest.mark.growth_budget("n^2", meter="tally:lines", largest=100)
def test_manifest(problem_size, tally):
    tally.add("lines", round(100 * problem_size ** {power}))

@pytest.mark.growth_budget("n", meter="tally:lines", largest=100)
def test_berths(problem_size, tally):
    tally.add("lines", problem_size)
"""

PYPROJECT = """
[tool.growthbudget.ratchet]
accepted = "growth-accepted.jsonl"
"""


@pytest.fixture
def suite(pytester: pytest.Pytester, monkeypatch: pytest.MonkeyPatch) -> pytest.Pytester:
    (pytester.path / "pyproject.toml").write_text(PYPROJECT)
    monkeypatch.chdir(pytester.path)
    return pytester


def grow(suite: pytest.Pytester, power: float, *arguments: str) -> pytest.RunResult:
    suite.makepyfile(test_harbour=SUITE.format(power=power))
    return suite.runpytest_subprocess("--growth-records", "records.jsonl", *arguments)


@pytest.mark.parametrize("arguments", [(), ("-n", "2")], ids=["alone", "xdist"])
def test_the_ratchet(suite: pytest.Pytester, arguments: tuple[str, ...], capsys: pytest.CaptureFixture[str]) -> None:
    result = grow(suite, 1.0, *arguments)
    result.assert_outcomes(passed=2)
    result.stdout.fnmatch_lines(
        [
            "growth budgets: accepted records: growth-accepted.jsonl (no such file yet)",
            "growth records: 2 added to *records.jsonl",
            "against accepted records: 2 not accepted yet",
        ]
    )
    assert main(["accept", "records.jsonl"]) == 0

    result = grow(suite, 1.0, *arguments)
    result.assert_outcomes(passed=2)
    result.stdout.fnmatch_lines(["against accepted records: 2 not risen"])

    result = grow(suite, 1.3, *arguments)
    result.assert_outcomes(passed=1, failed=1)
    line = "growth has drifted: tally:lines grows as n^1.30 where n^1.00 was accepted"
    result.stdout.fnmatch_lines(
        [
            f"*{line}",
            "  drift      exponent 1.30 (1.30 to 1.30) over n = *",
            "*: 1.00 (1.00 to 1.00); a second measurement agrees.*",
            "against accepted records: 1 not risen, 1 risen",
            "FAILED test_harbour.py::test_manifest*",
        ]
    )
    assert result.ret == 1
    last = read_records([suite.path / "records.jsonl"]).records[-2:]
    (told,) = [r["judgement"] for r in last if r["test"].endswith("manifest")]
    assert told["verdict"] == "within", "the budget itself is kept: n^1.3 under n^2"
    assert told["drift"]["risen"] is True

    capsys.readouterr()
    assert main(["accept", "records.jsonl", "--test", "*manifest"]) == 0
    out = capsys.readouterr().out.splitlines()
    assert out[0] == "test_harbour.py::test_manifest (tally:lines): exponent 1.00 -> exponent 1.30"
    grow(suite, 1.3, *arguments).assert_outcomes(passed=2)


def test_a_test_that_is_renamed_is_new(suite: pytest.Pytester) -> None:
    grow(suite, 1.0)
    assert main(["accept", "records.jsonl"]) == 0
    suite.makepyfile(test_harbour=SUITE.replace("test_manifest", "test_lines").format(power=1.5))
    result = suite.runpytest_subprocess()
    result.assert_outcomes(passed=2)
    result.stdout.fnmatch_lines(["against accepted records: 1 not accepted yet, 1 not risen"])


@pytest.mark.parametrize(("second", "expected"), [(1.0, False), (1.3, True)])
def test_a_rise_counts_only_if_a_second_measurement_shows_it(tmp_path: Path, second: float, expected: bool) -> None:
    write(tmp_path / "accepted.jsonl", [record(1.0, test="t.py::a", environment=environment())])
    config = SimpleNamespace(stash=pytest.Stash(), rootpath=tmp_path)
    item: Any = SimpleNamespace(nodeid="t.py::a", config=config)
    calls = []

    def again() -> dict[str, Any]:
        calls.append(1)
        return judgement(second, seed=3)

    told = ratchet.held(item, Ratchet(accepted="accepted.jsonl"), judgement(1.3, bound="n^2", seed=2), again)
    assert calls == [1]
    assert told["drift"]["risen"] is expected
    assert risen.fails(told) is expected
    assert ("a second measurement did not agree" in risen.fact(told)) is not expected
    quiet = ratchet.held(item, Ratchet(accepted="accepted.jsonl"), judgement(1.0, seed=2), again)
    assert quiet["drift"]["risen"] is False
    assert calls == [1], "what has not risen is measured once"
    over = {**judgement(1.3, seed=2), "verdict": "exceeded"}
    assert ratchet.held(item, Ratchet(accepted="accepted.jsonl"), over, again)["drift"]["risen"] is True
    assert calls == [1], "what fails anyway is measured once"


def test_a_broken_file_of_accepted_records_is_said_and_fails_the_run(suite: pytest.Pytester) -> None:
    grow(suite, 1.0)
    assert main(["accept", "records.jsonl"]) == 0
    path = suite.path / "growth-accepted.jsonl"
    path.write_text("<<<<<<< HEAD\n" + path.read_text())
    result = suite.runpytest_subprocess()
    result.assert_outcomes(passed=2)
    result.stdout.fnmatch_lines(
        [
            "2 growth budgets: 2 within*",
            "against accepted records: 2 not risen",
            "accepted records: *growth-accepted.jsonl:1: not JSON: expecting value at column 1",
        ]
    )
    assert result.ret == 1


@pytest.mark.parametrize(
    ("table", "message"),
    [
        ("", '*ratchet?: needs accepted = "file of accepted records", from the project\'s root'),
        ('accepted = "a.jsonl"\nmargins = 1', "*unknown key 'margins'; did you mean 'margin'?"),
        ('accepted = "a.jsonl"\nmargin = -1', "*margin must be a positive exponent below 10; got -1"),
        ("accepted = 3", "*accepted must be text; got 3"),
    ],
)
def test_faults_of_the_table(suite: pytest.Pytester, table: str, message: str) -> None:
    (suite.path / "pyproject.toml").write_text(f"[tool.growthbudget.ratchet]\n{table}\n")
    result = suite.runpytest_subprocess()
    assert result.ret == pytest.ExitCode.USAGE_ERROR
    result.stderr.fnmatch_lines([message])


# ------------------------------------------------------------------ accepting


def test_accept_takes_the_newest_and_leaves_the_rest(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    accepted = write(tmp_path / "accepted.jsonl", [record(1.0, test="t.py::old"), record(1.0, test="t.py::a")])
    new = write(
        tmp_path / "records.jsonl",
        [
            record(1.4, test="t.py::a", time="2026-03-03T00:00:00Z"),
            record(1.2, test="t.py::a", time="2026-03-02T00:00:00Z"),
            record(1.1, test="t.py::b"),
        ],
    )
    assert main(["accept", str(new), "--file", str(accepted)]) == 0
    assert capsys.readouterr().out.splitlines() == [
        "t.py::a (cpu_time): exponent 1.00 -> exponent 1.40",
        "t.py::b (cpu_time): exponent 1.10, new",
        f"{accepted}: 3 budgets accepted",
    ]
    lines = accepted.read_text().splitlines()
    assert [json.loads(line)["test"] for line in lines] == ["t.py::a", "t.py::b", "t.py::old"]
    assert main(["accept", str(new), "--file", str(accepted), "--prune"]) == 0
    assert "t.py::old (cpu_time): dropped" in capsys.readouterr().out
    assert len(load_accepted(accepted).by_budget) == 2


def test_accept_refuses_faulty_records(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    accepted = tmp_path / "accepted.jsonl"
    new = write(tmp_path / "records.jsonl", [record(1.0)])
    new.write_bytes(new.read_bytes() + b"{}\n")
    assert main(["accept", str(new), "--file", str(accepted)]) == 2
    assert capsys.readouterr().err == f"{new}:2: not a record: schema is missing\nnothing was accepted\n"
    assert not accepted.exists()


def test_accept_without_a_file_says_how_to_name_one(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> None:
    monkeypatch.chdir(tmp_path)
    write(tmp_path / "records.jsonl", [record(1.0)])
    assert main(["accept", "records.jsonl"]) == 2
    assert "[tool.growthbudget.ratchet]" in capsys.readouterr().err
    assert main(["accept", "records.jsonl", "--file", "none/accepted.jsonl"]) == 2
    assert capsys.readouterr().err == "none/accepted.jsonl: no such file or directory\n"


def test_what_could_not_be_measured_is_not_accepted() -> None:
    unmeasured = record(1.0)
    unmeasured["judgement"].update(excess=None, exponent=None, verdict="unmeasured")
    assert to_accept([unmeasured]) == {}
