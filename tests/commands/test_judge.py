"""`judge`: costs from a file or from standard input, against a bound; every fault names its place."""

from __future__ import annotations

import io
import json
import os
import subprocess
import sys
from collections.abc import Callable
from pathlib import Path
from types import SimpleNamespace
from typing import Any

import jsonschema
import pytest

from pytest_growthbudget.__main__ import main
from pytest_growthbudget.commands.costs_file import CostsError, read_costs

SIZES = [2**k for k in range(4, 13)]
Told = Callable[..., tuple[int, str, str]]


@pytest.fixture
def told(capsys: pytest.CaptureFixture[str], monkeypatch: pytest.MonkeyPatch, tmp_path: Path) -> Told:
    """Runs the command in an empty directory: exit code, output, errors."""
    monkeypatch.chdir(tmp_path)

    def run(*arguments: str, given: str = "") -> tuple[int, str, str]:
        monkeypatch.setattr(sys, "stdin", SimpleNamespace(buffer=io.BytesIO(given.encode())))
        code = main(["judge", *arguments])
        captured = capsys.readouterr()
        return code, captured.out, captured.err

    return run


def costs(power: float, header: str = "rows,ms\n") -> str:
    return header + "".join(f"{size},{size**power / 1000!r}\n" for size in SIZES)


# ------------------------------------------------------------------ verdicts and answers


def test_within_and_exceeded(told: Told, tmp_path: Path) -> None:
    (tmp_path / "c.csv").write_text(costs(2))
    code, out, err = told("c.csv", "--bound", "n^2")
    assert (code, err) == (0, "")
    assert out.startswith("growth budget kept: the given cost grows as n^2.00 where n^2 is allowed\n")
    code, out, err = told("c.csv", "--bound", "T(n) = 2 T(n/2) + n")
    assert (code, err) == (1, "")
    assert out.startswith("growth budget exceeded: the given cost grows as n^2.00 where n log n is allowed\n")
    assert "repeat" not in out, "there is nothing to run again"
    assert max(map(len, out.splitlines())) <= 80


INTERVAL = {"type": "object", "required": ["estimate", "low", "high"]}
ANSWER = {
    "type": "object",
    "required": ["verdict", "excess", "exponent", "resolution", "nearest", "sizes", "forecast"],
    "properties": {
        "verdict": {"enum": ["within", "exceeded", "undecided"]},
        "excess": INTERVAL,
        "exponent": INTERVAL,
        "resolution": {"type": "number"},
        "nearest": {"type": ["string", "null"]},
        "sizes": {"type": "array", "minItems": 5},
        "forecast": {"type": "array", "minItems": 1},
    },
}


def test_json(told: Told, tmp_path: Path) -> None:
    (tmp_path / "c.csv").write_text(costs(2))
    code, out, _ = told("c.csv", "--bound", "n log n", "--json")
    answer = json.loads(out)
    jsonschema.validate(answer, ANSWER)
    assert code == 1
    assert answer["verdict"] == "exceeded"
    assert answer["nearest"] == "n^2"
    assert answer["exponent"]["estimate"] == pytest.approx(2, abs=0.02)


def test_slack_and_confidence(told: Told, tmp_path: Path) -> None:
    (tmp_path / "c.csv").write_text(costs(1.3))
    assert told("c.csv", "--bound", "n", "--slack", "0.1")[0] == 1
    assert told("c.csv", "--bound", "n", "--slack", "0.5")[0] == 0
    code, out, _ = told("c.csv", "--bound", "n", "--confidence", "0.8", "--json")
    assert json.loads(out)["confidence"] == 0.8
    code, _, err = told("c.csv", "--bound", "n", "--confidence", "2")
    assert (code, err) == (2, "c.csv: confidence must lie between 0 and 1, not at 2.0.\n")
    code, _, err = told("c.csv", "--bound", "n", "--slack", "much")
    assert code == 2
    assert err.endswith("argument --slack: invalid float value: 'much'\n")


# ------------------------------------------------------------------ columns


def test_columns_by_name_and_number(told: Told, tmp_path: Path) -> None:
    lines = ["day,rows,page,ms"] + [f"monday,{size},/list,{size**2}" for size in SIZES]
    (tmp_path / "log.csv").write_text("\n".join(lines))
    code, _, err = told("log.csv", "--bound", "n^2")
    assert (code, err) == (2, "log.csv:2: column 'day': expected a size, got 'monday'\n")
    code, _, err = told("log.csv", "--bound", "n^2", "--size-column", "rows")
    assert code == 2
    assert err == (
        "log.csv:2: column 'day': expected a cost, got 'monday'; choose the columns of costs with --cost-column\n"
    )
    assert told("log.csv", "--bound", "n^2", "--size-column", "rows", "--cost-column", "ms")[0] == 0
    assert told("log.csv", "--bound", "n", "--size-column", "2", "--cost-column", "4")[0] == 1
    code, _, err = told("log.csv", "--bound", "n", "--size-column", "row")
    assert (code, err) == (2, "log.csv: no column 'row'; columns: day, rows, page, ms\n")


def test_several_costs_a_size(tmp_path: Path) -> None:
    path = tmp_path / "c.csv"
    path.write_text("n;first;second\n10;1;2\n20;3;\n\n# a remark\n10;4;5\n5;6\n")
    read = read_costs(path)
    assert read.sizes == (5, 10, 20)
    assert read.costs == ((6.0,), (1.0, 2.0, 4.0, 5.0), (3.0,))
    assert read_costs(path, cost_columns=["second", "first"]).costs[1] == (2.0, 1.0, 5.0, 4.0)


@pytest.mark.parametrize(
    "text",
    ["10,1\n20,2\n", "10\t1\n20\t2\n", "\ufeffn, cost\n10, 1\n20, 2\n", '"n","cost"\r\n"10","1"\r\n"20","2"\r\n'],
    ids=["no heading", "tabs", "byte order mark and blanks", "quotes and carriage returns"],
)
def test_ways_to_write_the_same(text: str, tmp_path: Path) -> None:
    path = tmp_path / "c.csv"
    path.write_bytes(text.encode())
    read = read_costs(path)
    assert (read.sizes, read.costs) == ((10, 20), ((1.0,), (2.0,)))


FAULTS = {
    "n,ms\n10,fast\n": "c.csv:2: column 'ms': expected a cost, got 'fast'; choose the columns of costs with "
    "--cost-column",
    "n;ms\n10;1,5\n": "c.csv:2: column 'ms': expected a cost, got '1,5'; write numbers without separators, with a "
    "point before the decimals",
    'n,ms\n"1,000",3\n': "c.csv:2: column 'n': expected a size, got '1,000'; write numbers without separators, with a "
    "point before the decimals",
    "n,ms\n10,-1\n": "c.csv:2: column 'ms': a cost is a positive number, got '-1'",
    "n,ms\n10,nan\n": "c.csv:2: column 'ms': a cost is a positive number, got 'nan'",
    "n,ms\n1.5,1\n": "c.csv:2: column 'n': a size is a whole number of at least 1, got '1.5'",
    "n,ms\n0,1\n": "c.csv:2: column 'n': a size is a whole number of at least 1, got '0'",
    "n,ms\n\n\n10,\n": "c.csv:4: no cost for the size 10; leave the line out, or fill the cost in",
    "n,ms\n,3\n": "c.csv:2: column 'n': expected a size, got ''",
    "": "c.csv: the file is empty; give a column of sizes and one or more of costs",
    ",,\n": "c.csv: every line is empty; give a column of sizes and one or more of costs",
    "n,ms\n": "c.csv: no line of sizes and costs",
    "n\n10\n": "c.csv: there is one column; give a column of sizes and one or more of costs",
}


@pytest.mark.parametrize("text", FAULTS)
def test_faults_in_a_file(text: str, told: Told, tmp_path: Path) -> None:
    (tmp_path / "c.csv").write_text(text)
    assert told("c.csv", "--bound", "n") == (2, "", FAULTS[text] + "\n")
    code, out, err = told("c.csv", "--bound", "n", "--json")
    assert (code, err) == (2, "")
    assert json.loads(out) == {"input": "c.csv", "error": {"message": FAULTS[text], "position": None}}


def test_files_that_are_no_text(told: Told, tmp_path: Path) -> None:
    (tmp_path / "utf16.csv").write_text("n,ms\n1,2\n", encoding="utf-16")
    (tmp_path / "latin.csv").write_bytes(b"n,ms\n1,2\ngr\xfc\xdf,3\n")
    (tmp_path / "nul.csv").write_bytes(b"n,ms\n1\0,2\n")
    assert told("utf16.csv", "--bound", "n")[2] == "utf16.csv: the file is in UTF-16; save it in UTF-8\n"
    assert told("latin.csv", "--bound", "n")[2] == "latin.csv:3: not UTF-8; save the file in UTF-8\n"
    code, out, err = told("nul.csv", "--bound", "n")
    assert (code, out) == (2, "")
    assert err.startswith("nul.csv:2: ")
    assert told("none.csv", "--bound", "n")[2] == "none.csv: no such file or directory\n"
    assert told(".", "--bound", "n")[2] == ".: is a directory\n"


def test_the_same_column_twice(tmp_path: Path) -> None:
    path = tmp_path / "c.csv"
    path.write_text("n,ms\n1,2\n")
    with pytest.raises(CostsError, match="column 'n' cannot be both the size and a cost"):
        read_costs(path, cost_columns=["1"])


def test_few_sizes_and_bad_bounds(told: Told, tmp_path: Path) -> None:
    (tmp_path / "c.csv").write_text("n,ms\n1,2\n2,3\n")
    code, _, err = told("c.csv", "--bound", "n")
    assert code == 2
    assert err.startswith("c.csv: 2 different sizes were given where at least 5 are needed")
    code, _, err = told("c.csv", "--bound", "n log")
    assert code == 2
    assert "\n  n log\n" in err
    assert "^" in err
    code, out, _ = told("c.csv", "--bound", "n log", "--json")
    assert isinstance(json.loads(out)["error"]["position"], int)
    code, _, err = told("c.csv")
    assert code == 2
    assert err.endswith("say what the costs are held to, such as --bound 'n log n'\n")


# ------------------------------------------------------------------ standard input


def test_one_input_a_line(told: Told, tmp_path: Path) -> None:
    (tmp_path / "c.csv").write_text(costs(2))
    pair = {"sizes": SIZES, "costs": [[size, size * 1.01] for size in SIZES]}
    lines: list[Any] = [
        "c.csv",
        "",
        "none.csv",
        json.dumps({**pair, "bound": "n"}),
        json.dumps(pair),
        json.dumps({**pair, "bound": "n ~ 2"}),
        json.dumps({"sizes": [1]}),
        '{"sizes": ',
        json.dumps({**pair, "slack": "wide"}),
        json.dumps({**pair, "bound": 3}),
    ]
    code, out, err = told("-", "--bound", "1", given="\n".join(lines))
    assert (code, err) == (2, "")
    answers = [json.loads(line) for line in out.splitlines()]
    assert len(answers) == len(lines) - 1
    assert [answer.get("verdict") for answer in answers[:4]] == ["exceeded", None, "within", "exceeded"]
    messages = [answer["error"]["message"] for answer in answers if "error" in answer]
    assert messages[0] == "none.csv: no such file or directory"
    assert messages[2:] == [
        'expected a JSON object with "sizes" and "costs"',
        "not JSON: Expecting value: line 1 column 11 (char 10)",
        "slack must be a number; got 'wide'",
        'the bound must be text, such as "n log n"; got 3',
    ]


def test_exit_codes_of_several_inputs(told: Told) -> None:
    line = json.dumps({"sizes": SIZES, "costs": SIZES})
    assert told("-", given=line + "\n")[0] == 2
    assert told("-", "--bound", "n", given=line + "\n")[0] == 0
    assert told("-", "--bound", "1", given=line + "\n" + line)[0] == 1
    assert told("-", "--bound", "n", given="")[0] == 0


def test_a_terminal_that_is_not_utf_8(tmp_path: Path) -> None:
    (tmp_path / "größe.csv").write_text("Größe,ms\nviele,3\n", encoding="utf-8")
    run = subprocess.run(
        [sys.executable, "-m", "pytest_growthbudget", "judge", "größe.csv", "--bound", "n"],
        cwd=tmp_path,
        env={**os.environ, "PYTHONIOENCODING": "ascii", "PYTHONUTF8": "1"},
        capture_output=True,
        text=True,
        check=False,
    )
    assert run.returncode == 2
    assert run.stderr == "gr\\xf6\\xdfe.csv:2: column 'Gr\\xf6\\xdfe': expected a size, got 'viele'\n"
