"""Trend: what is marked as a change over runs, and what is not."""

from __future__ import annotations

import itertools
import json
from pathlib import Path
from typing import Any

import pytest

from pytest_growthbudget.__main__ import main
from pytest_growthbudget.reporting.records import Record
from pytest_growthbudget.reporting.trend import trends
from tests.reporting.samples import ENVIRONMENT, SIZES, real_records, record, write


def runs(exponents: list[float], **how: Any) -> list[Record]:
    """One budget over several runs, a day each, with noise of its own in each."""
    return [
        record(exponent, run=f"run{day:02d}", time=f"2026-03-{day:02d}T08:00:00Z", seed=day, **how)
        for day, exponent in enumerate(exponents, 1)
    ]


def changes(records: list[Record]) -> list[str]:
    (trend,) = trends(records)
    return [step.change for step in trend.steps]


def test_the_same_growth_is_never_marked() -> None:
    (trend,) = trends(runs([1.1] * 28, noise=0.03))
    assert not trend.changed
    assert trend.over == (SIZES[0], SIZES[-1])
    assert trend.at == 2800


def test_a_step_is_marked_once() -> None:
    assert changes(runs([1.0, 1.0, 1.4, 1.4, 1.4])) == ["", "", "rose", "", ""]
    assert changes(runs([1.4, 1.4, 1.0, 1.0])) == ["", "", "fell", ""]


def test_a_drift_too_slow_for_any_two_runs_is_marked() -> None:
    slow = runs([1.0 + 0.02 * day for day in range(12)], noise=0.03)
    (trend,) = trends(slow)
    neighbours = [trends(pair)[0].changed for pair in itertools.pairwise(slow)]
    assert not any(neighbours)
    assert "rose" in [step.change for step in trend.steps]


def test_a_dearer_constant_is_a_change_of_cost_alone() -> None:
    records = [*runs([1.0, 1.0]), record(1.0, scale=300.0, run="c", time="2026-04-01T00:00:00Z", seed=9)]
    (trend,) = trends(records)
    assert [step.cost_change for step in trend.steps] == ["", "", "rose"]
    assert [step.change for step in trend.steps] == ["", "", ""]


def test_costs_of_another_machine_are_not_compared_but_exponents_are() -> None:
    other = {**ENVIRONMENT, "processor": "Harbour 2"}
    moved = record(1.4, scale=900.0, run="c", time="2026-04-01T00:00:00Z", seed=9, environment=other)
    (trend,) = trends([*runs([1.0, 1.0]), moved])
    assert [step.elsewhere for step in trend.steps] == [False, False, True]
    assert [step.cost_change for step in trend.steps] == ["", "", ""]
    assert [step.change for step in trend.steps] == ["", "", "rose"]


def test_counts_of_another_machine_are_compared() -> None:
    other = {**ENVIRONMENT, "processor": "Harbour 2"}
    records = [
        record(1.0, run="a", time="2026-03-01T00:00:00Z", meter="steps", noise=0.0),
        record(1.0, run="b", time="2026-03-02T00:00:00Z", meter="steps", noise=0.0, scale=101.0, environment=other),
    ]
    (trend,) = trends(records)
    assert [step.cost_change for step in trend.steps] == ["", "rose"]


def test_runs_that_share_too_few_sizes_are_shown_and_not_compared() -> None:
    near = record(1.0, run="a", time="2026-03-01T00:00:00Z", sizes=SIZES[:6])
    far = record(1.5, run="b", time="2026-03-02T00:00:00Z", sizes=tuple(50 * size for size in SIZES[:6]))
    (trend,) = trends([near, far])
    assert trend.over is None
    assert not trend.changed
    assert [round(step.growth["estimate"], 1) for step in trend.steps if step.growth] == [1.0, 1.5]


def test_order_is_by_time_whatever_the_files_order() -> None:
    records = runs([1.0, 1.0, 1.5])
    assert changes(records[::-1]) == ["", "", "rose"]


def test_a_run_that_is_there_twice_counts_once() -> None:
    records = runs([1.0, 1.0])
    (trend,) = trends(records + records)
    assert len(trend.steps) == 2


def test_budgets_by_test_and_meter() -> None:
    records = [record(1.0), record(1.0, meter="steps"), record(1.0, test="t.py::other")]
    assert [(trend.test, trend.meter) for trend in trends(records)] == [
        ("tests/test_berths.py::test_every_ship_has_a_berth", "cpu_time"),
        ("tests/test_berths.py::test_every_ship_has_a_berth", "steps"),
        ("t.py::other", "cpu_time"),
    ]


def test_every_kind_of_record_has_a_trend() -> None:
    found = trends(real_records())
    assert len(found) == 8
    assert [trend.of for trend in found].count("excess") == 1


def test_a_run_that_could_not_be_measured_is_shown_without_numbers() -> None:
    records = runs([1.0, 1.0])
    records[1]["judgement"].update(excess=None, exponent=None, verdict="unmeasured", sizes=[], allowed=[])
    (trend,) = trends(records)
    assert trend.steps[1].growth is None
    assert trend.steps[1].cost is None
    assert trend.over == (SIZES[0], SIZES[-1])


# ------------------------------------------------------------------ the command


def test_text(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    path = write(tmp_path / "records.jsonl", runs([1.0, 1.0, 1.5], noise=0.0))
    assert main(["trend", str(path)]) == 0
    assert capsys.readouterr().out == (
        "tests/test_berths.py::test_every_ship_has_a_berth\n"
        "  cpu_time against n, over n = 32 to 2,896\n"
        "  run (UTC)         exponent               cost at n = 2,800\n"
        "  2026-03-01 08:00  1.00 (1.00 to 1.00)    280 us (225 us to 348 us)\n"
        "  2026-03-02 08:00  1.00 (1.00 to 1.00)    280 us (225 us to 348 us)\n"
        "  2026-03-03 08:00  1.50 (1.50 to 1.50)    14.8 ms (11.9 ms to 18.4 ms)\n"
        "                    exceeded, ! the exponent rose, ! the cost rose\n"
        "\n"
        "1 budget in 3 records: 1 changed beyond the intervals\n"
    )


def test_only_the_last_runs_and_the_marked_ones_are_written(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    path = write(tmp_path / "records.jsonl", runs([1.0] * 8 + [1.5] * 12, noise=0.0))
    assert main(["trend", str(path), "--last", "2"]) == 0
    lines = capsys.readouterr().out.splitlines()
    shown = [line.split()[0] for line in lines if line.startswith("  2026")]
    assert shown == ["2026-03-01", "2026-03-09", "2026-03-19", "2026-03-20"]
    assert "  (7 more)" in lines
    assert "  (9 more)" in lines


def test_json(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    path = write(tmp_path / "records.jsonl", [*runs([1.0, 1.5]), record(1.0, test="t.py::still")])
    assert main(["trend", "--json", str(path)]) == 0
    answers = [json.loads(line) for line in capsys.readouterr().out.splitlines()]
    assert [answer["test"] for answer in answers] == [
        "tests/test_berths.py::test_every_ship_has_a_berth",
        "t.py::still",
    ]
    assert [step["change"] for step in answers[0]["steps"]] == ["", "rose"]
    assert main(["trend", "--json", "--changed", str(path)]) == 0
    assert len(capsys.readouterr().out.splitlines()) == 1
    assert main(["trend", "--json", "--test", "t.py::*", str(path)]) == 0
    assert json.loads(capsys.readouterr().out)["test"] == "t.py::still"


def test_faults_are_said_with_file_and_line(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    path = write(tmp_path / "records.jsonl", [record(1.0)])
    path.write_bytes(path.read_bytes() + b"\n{}\n")
    assert main(["trend", str(path), str(tmp_path / "none")]) == 2
    captured = capsys.readouterr()
    assert "1 budget in 1 records" in captured.out
    assert (
        captured.err == f"{path}:3: not a record: schema is missing\n{tmp_path / 'none'}: no such file or directory\n"
    )


def test_nothing_to_tell(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    (tmp_path / "records.jsonl").touch()
    assert main(["trend", str(tmp_path / "records.jsonl")]) == 0
    assert capsys.readouterr().out == "no records\n"
    assert main(["trend"]) == 2
    assert "RECORDS" in capsys.readouterr().err
