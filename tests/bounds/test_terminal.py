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
        (b"n,n^2", "slower"),
        (b"n\t\tn^2", "slower"),
        (b"n || n^2", "slower"),
        (b"n vs. n^2", "slower"),
        (b"n   n^2", "slower"),
        (b"n ; n^2", "slower"),
        (b"  n\tn^2  ", "slower"),
        (b"|n|\t|n|^2", "slower"),
        (b"{x: x^2 = x + 1}^n\t2^n", "slower"),
        (b'  ["n^2", "n"]', "faster"),
        (b"T(n) = 2T(n/2) + n; T(1) = 1\tn log n", "same"),
    ],
)
def test_compare_lines(line: bytes, relation: str, monkeypatch: pytest.MonkeyPatch) -> None:
    """Two growths a line, as JSON or parted by a tab or a sign."""
    code, out, _ = _run(["compare", "--json", "-"], monkeypatch, line + b"\n")
    answer = json.loads(out)
    assert (code, answer["relation"]) == (0, relation)
    assert set(answer) == {"a", "b", "relation"}


def test_compare_lines_without_two_growths(monkeypatch: pytest.MonkeyPatch) -> None:
    """Neither JSON of the right form nor two parts; the other lines are answered."""
    lines = ["n", "", "a\tb\tc", '["n"]', '["n", 3]', '{"a": "n", "b": 3}', '{"a": 3, "b": "n"}', '{"a": "n"}', '["n']
    code, out, _ = _run(["compare", "-"], monkeypatch, "\n".join([*lines, "n\tn"]).encode())
    answers = [json.loads(line) for line in out.splitlines()]
    message = "expected two growths on a line, as a JSON list or parted by a tab"
    assert code == 2
    assert answers[0] == {"a": "n", "b": "", "error": {"message": message, "position": 0}}
    assert [a["a"] for a in answers if "error" in a and a["b"] == ""] == [*lines[:4], lines[7], lines[8]]
    assert [a.get("error", {}).get("in") for a in answers] == [None] * 4 + ["a", "a", "a"] + [None] * 3
    assert answers[-1] == {"a": "n", "b": "n", "relation": "same"}


@pytest.mark.parametrize(
    ("line", "text"),
    [
        ("n^2", "n^2"),
        ('"n^2"', "n^2"),
        ('  "n^2"', "n^2"),
        ('{"input": "n^2", "text": "n"}', "n^2"),
        ('{"text": "n^2", "bound": "n"}', "n^2"),
        ('{"bound": "n^2"}', "n^2"),
        ('{"input": 3, "bound": "n^2"}', "n^2"),
        ('{"other": "n^2"}', '{"other": "n^2"}'),
        ('"n^2', '"n^2'),
        ("[1]", "[1]"),
        ("{" * 3000, "{" * 3000),
        ('{"input": ' * 3000, '{"input": ' * 3000),
    ],
)
def test_the_input_of_a_line(line: str, text: str, monkeypatch: pytest.MonkeyPatch) -> None:
    """Plain text, a JSON string, or the first text under a known key; anything else is taken as it stands."""
    code, out, _ = _run(["explain", "-"], monkeypatch, line.encode())
    answer = json.loads(out)
    assert answer["input"] == text
    assert code == (0 if text == "n^2" else 2)
    assert ("error" in answer) == (text != "n^2")


def test_lines_of_a_stream_of_text(monkeypatch: pytest.MonkeyPatch) -> None:
    """A standard input that was replaced by one without bytes; and a byte order mark, and ends of lines."""
    out = io.StringIO()
    monkeypatch.setattr(sys, "stdin", io.StringIO("n\r\nn^2"))
    assert terminal.explain(["-"], out, io.StringIO()) == 0
    assert [json.loads(line)["input"] for line in out.getvalue().splitlines()] == ["n", "n^2"]
    code, text, _ = _run(["explain", "-"], monkeypatch, b"\xef\xbb\xbfn\r\n n \n")
    assert code == 0
    assert [json.loads(line)["input"] for line in text.splitlines()] == ["n", " n "]


def test_one_answer_as_json(monkeypatch: pytest.MonkeyPatch) -> None:
    """`--json` anywhere; a fault has its place, its end, a hint and the side at fault."""
    error = {"message": "unknown function 'foo'", "position": 0, "end": 3}
    code, out, said = _run(["explain", "foo(n)", "--json"], monkeypatch)
    answer = json.loads(out)
    assert (code, said, answer["input"]) == (2, "", "foo(n)")
    assert answer["error"].items() >= error.items()
    assert answer["error"]["hint"].startswith("known are log, ")
    code, out, said = _run(["compare", "n^2", "--json", "n"], monkeypatch)
    assert (code, said, json.loads(out)) == (0, "", {"a": "n^2", "b": "n", "relation": "faster"})
    code, out, said = _run(["compare", "--json", "n", "foo(n)"], monkeypatch)
    answer = json.loads(out)
    assert (code, said, answer["a"], answer["b"]) == (2, "", "n", "foo(n)")
    assert answer["error"].items() >= {**error, "in": "b"}.items()
    code, out, _ = _run(["compare", "--json", "foo(n)", "foo(n)"], monkeypatch)
    assert json.loads(out)["error"].items() >= {**error, "in": "a"}.items()


@pytest.mark.parametrize(
    ("a", "b", "sentence"),
    [
        ("n", "n^2", "n grows slower than n^2"),
        ("2n", "n + 1", "n grows like n"),
        ("n^2", "n", "n^2 grows faster than n"),
    ],
)
def test_a_comparison_is_a_sentence(a: str, b: str, sentence: str, monkeypatch: pytest.MonkeyPatch) -> None:
    assert _run(["compare", a, b], monkeypatch) == (0, sentence + "\n", "")


def test_a_fault_of_a_comparison_goes_to_standard_error(monkeypatch: pytest.MonkeyPatch) -> None:
    code, out, error = _run(["compare", "n", "n log"], monkeypatch)
    assert (code, out) == (2, "")
    assert error == "log needs an argument\n  n log\n    ~~^\n"


@pytest.mark.parametrize(
    ("arguments", "usage"),
    [
        (["explain"], terminal.EXPLAIN_USAGE),
        (["explain", "n", "m"], terminal.EXPLAIN_USAGE),
        (["explain", "--json"], terminal.EXPLAIN_USAGE),
        (["compare", "n"], terminal.COMPARE_USAGE),
        (["compare", "n", "m", "k"], terminal.COMPARE_USAGE),
        (["compare", "n", "-", "k"], terminal.COMPARE_USAGE),
    ],
)
def test_a_wrong_number_of_texts_is_told_the_usage(
    arguments: list[str], usage: str, monkeypatch: pytest.MonkeyPatch
) -> None:
    assert _run(arguments, monkeypatch) == (2, "", usage + "\n")


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
