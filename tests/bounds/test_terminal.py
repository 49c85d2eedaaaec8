"""explain and compare, as a terminal runs them."""

from __future__ import annotations

import io
import json
import subprocess
import sys

import pytest

from pytest_growthbudget import __main__
from pytest_growthbudget.bounds import terminal

FACTOR = {"exp_base": 1, "power": 1, "log": 1, "loglog": 0, "factorial": 0}


def _run(arguments: list[str], monkeypatch: pytest.MonkeyPatch, stdin: bytes = b"") -> tuple[int, str, str]:
    out, error = io.StringIO(), io.StringIO()
    monkeypatch.setattr(sys, "stdin", io.TextIOWrapper(io.BytesIO(stdin), encoding="utf-8"))
    commands = {"explain": terminal.explain, "compare": terminal.compare_command}
    code = commands[arguments[0]](arguments[1:], out, error)
    return code, out.getvalue(), error.getvalue()


def test_explain_json(monkeypatch: pytest.MonkeyPatch) -> None:
    """The form that DESIGN fixes, for a recurrence."""
    code, out, _ = _run(["explain", "--json", "T(n) = 2 T(n/2) + n"], monkeypatch)
    answer = json.loads(out)
    assert code == 0
    assert answer["input"] == "T(n) = 2 T(n/2) + n"
    assert answer["kind"] == "recurrence"
    assert answer["theta"] == "n log n"
    assert answer["terms"] == [{"n": FACTOR}]
    assert answer["theorem"] == "Master theorem, case 2"
    assert all(isinstance(step, str) for step in answer["steps"])


def test_explain_lines(monkeypatch: pytest.MonkeyPatch) -> None:
    """One line of JSON for each line of input, faults, blanks and broken bytes included; exit code 2 for a fault."""
    lines = b'n log n\n\nlog n^2\r\n\xff\xfe\nT(n) = T(2n)\n"n"\n{"input": "2^n"}\n{x: x^2 = x + 1}^n'
    code, out, _ = _run(["explain", "--json", "-"], monkeypatch, lines)
    answers = [json.loads(line) for line in out.splitlines()]
    assert code == 2
    assert [("error" in a) for a in answers] == [False, True, True, True, True, False, False, False]
    assert answers[2]["error"]["position"] == 0
    assert answers[4]["error"]["position"] == 9
    assert answers[4]["input"] == "T(n) = T(2n)"
    assert [a.get("theta") for a in answers[5:]] == ["n", "2^n", "((1 + sqrt(5))/2)^n"]


@pytest.mark.parametrize(
    ("line", "relation"),
    [
        (b'["n", "n log n"]', "slower"),
        (b'{"a": "n^2", "b": "n"}', "faster"),
        (b"n\tn + 1", "same"),
        (b"n vs n^2", "slower"),
        (b"n | n^2", "slower"),
        (b"n , n^2", "slower"),
        (b"T(n) = 2T(n/2) + n; T(1) = 1\tn log n", "same"),
    ],
)
def test_compare_lines(line: bytes, relation: str, monkeypatch: pytest.MonkeyPatch) -> None:
    """Two growths a line, as JSON or parted by a tab or a sign."""
    code, out, _ = _run(["compare", "--json", "-"], monkeypatch, line + b"\n")
    answer = json.loads(out)
    assert (code, answer["relation"]) == (0, relation)
    assert set(answer) == {"a", "b", "relation"}


def test_compare_faults(monkeypatch: pytest.MonkeyPatch) -> None:
    """The answer says which side is at fault."""
    _, out, _ = _run(["compare", "--json", "-"], monkeypatch, b'["n", "foo(n)"]\nn\n["V", "E"]\n')
    answers = [json.loads(line) for line in out.splitlines()]
    assert [a["error"].get("in") for a in answers] == ["b", None, "both"]


def test_explain_for_people(monkeypatch: pytest.MonkeyPatch) -> None:
    """Growth, theorem, steps, doubling and split table within 80 columns."""
    code, out, _ = _run(["explain", "T(n) = T(0.99n) + T(0.01n) + n"], monkeypatch)
    assert code == 0
    lines = out.splitlines()
    assert max(map(len, lines)) <= 80
    assert lines[0] == "input    T(n) = T(0.99n) + T(0.01n) + n"
    assert lines[1] == "growth   Θ(n log n)"
    assert lines[2] == "theorem  Akra-Bazzi theorem"
    assert "growth at 2 n over n" in out
    assert "the deepest branch is about 69 log2 n calls long" in out
    assert "T/growth, even split" in out


@pytest.mark.parametrize("text", ["V + E", "n!", "2^n", "1", "T(n) = T(n-1) + T(n-2)", "n^log2(7) log log n", "1/n"])
def test_reports_fit_80_columns(text: str, monkeypatch: pytest.MonkeyPatch) -> None:
    """Several variables, exponentials and constants have tables too."""
    code, out, _ = _run(["explain", text], monkeypatch)
    assert code == 0
    assert max(map(len, out.splitlines())) <= 80


def test_fault_for_people(monkeypatch: pytest.MonkeyPatch) -> None:
    """The caret goes to standard error, the exit code is 2."""
    code, out, error = _run(["explain", "n log"], monkeypatch)
    assert (code, out) == (2, "")
    assert error.splitlines()[1:] == ["  n log", "    ~~^"]


def test_compare_for_people(monkeypatch: pytest.MonkeyPatch) -> None:
    """A sentence."""
    code, out, _ = _run(["compare", "T(n) = 2T(n/2) + n", "n^2"], monkeypatch)
    assert (code, out) == (0, "n log n grows slower than n^2\n")


@pytest.mark.parametrize("arguments", [[], ["explain"], ["compare", "n"], ["nonsense"], ["explain", "n", "m"]])
def test_usage_is_code_2(arguments: list[str], capsys: pytest.CaptureFixture[str]) -> None:
    """Too few or too many arguments, and unknown commands."""
    assert __main__.main(arguments) == 2
    assert "usage" in capsys.readouterr().err


def test_help_names_the_commands(capsys: pytest.CaptureFixture[str]) -> None:
    """Every command is listed."""
    assert __main__.main(["--help"]) == 0
    out = capsys.readouterr().out
    assert all(name in out for name in __main__.COMMANDS)


@pytest.mark.parametrize("arguments", [["explain", "--help"], ["compare", "-h"]])
def test_a_command_tells_how_it_is_used(arguments: list[str], monkeypatch: pytest.MonkeyPatch) -> None:
    """Help is asked for, not a bound: it goes to standard output, and nothing is at fault."""
    code, out, error = _run(arguments, monkeypatch)
    assert (code, error) == (0, "")
    assert out.startswith(f"usage: python -m pytest_growthbudget {arguments[0]} [--json] ")


def test_explain_imports_neither_numpy_nor_scipy_nor_pytest() -> None:
    """A fresh interpreter that explained a recurrence has none of them loaded."""
    code = (
        "import sys; from pytest_growthbudget.__main__ import main\n"
        "main(['explain', '--json', 'T(n) = T(n/5) + T(7n/10) + n'])\n"
        "print([m for m in ('numpy', 'scipy', 'sympy', 'mpmath', 'pytest') if m in sys.modules])"
    )
    done = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True, timeout=60)
    assert done.stdout.splitlines()[-1] == "[]"
