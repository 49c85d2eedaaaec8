"""Refusals: the place, the reason, the whole message, and the time they take."""

from __future__ import annotations

import json
import pickle
import sys
from pathlib import Path
from typing import Any

import pytest

from pytest_growthbudget.bounds.budget import compare, parse_budget
from pytest_growthbudget.bounds.language import BoundError

FAULTS = json.loads((Path(__file__).parent / "invalid" / "faults.json").read_text("utf-8"))


@pytest.mark.parametrize("entry", FAULTS, ids=[ascii(e["input"][:60]) for e in FAULTS])
def test_refused_at_the_right_place(entry: dict[str, Any]) -> None:
    """Each fault is found where it stands, with its reason and what to write instead, to the letter."""
    with pytest.raises(BoundError) as caught:
        parse_budget(entry["input"])
    fault = caught.value
    assert (fault.text, fault.position, fault.end) == (entry["input"], entry["position"], entry["end"])
    assert (fault.message, fault.hint) == (entry["message"], entry.get("hint", ""))


WHOLE = {
    "log n^2": """\
this can mean (log n)^… or log(n^…)
  log n^2
  ~~~~~^
hint: write log^2 n or (log n)^2 for the power, log(n^2) for the other""",
    "T(n) = T(2n) + 1": """\
the argument 2n does not shrink: it must be smaller than n
  T(n) = T(2n) + 1
           ~^
hint: write a part of n, as in n/2, n - 1 or sqrt(n)""",
    "(n log n": """\
this '(' is never closed
  (n log n
  ^""",
    "n log n + Ω(n)": """\
Ω(…) is a lower bound; a budget promises an upper bound
  n log n + Ω(n)
            ^
hint: write O(…), Θ(…) or the bare expression""",
    "T(n) = 2T(n/2) + c": """\
unknown name 'c': the size is 'n'
  T(n) = 2T(n/2) + c
                   ^
hint: leave constant factors out: they do not change the growth""",
}


@pytest.mark.parametrize("text", WHOLE)
def test_whole_message(text: str) -> None:
    """Message, text, marker and hint, to the letter."""
    with pytest.raises(BoundError) as caught:
        parse_budget(text)
    assert str(caught.value) == WHOLE[text]


def test_long_text_is_cut_around_the_place() -> None:
    """80 columns hold the place even of a long input."""
    text = "n + " * 100 + "? + " + "n + " * 60 + "n"
    with pytest.raises(BoundError) as caught:
        parse_budget(text)
    lines = str(caught.value).splitlines()
    assert all(len(line) <= 80 for line in lines)
    assert lines[1][lines[2].index("^")] == "?"


@pytest.mark.parametrize("length", [1, 70, 71, 72, 73, 74, 75, 80, 150, 900])
def test_the_marker_stands_under_the_place(length: int) -> None:
    """At every place of texts that just fit, and of longer ones; what fits is shown whole."""
    text = "".join(chr(ord("a") + i % 26) for i in range(length))
    for position in range(length):
        for end in (position + 1, position + 5, length + 1):
            _, shown, marker = str(BoundError("no", text, position, end)).splitlines()
            start = len(marker) - len(marker.lstrip())
            assert marker.lstrip() == "~" * (len(marker) - start - 1) + "^"
            assert shown[start] == text[position]
            assert max(len(shown), len(marker)) <= 80
            assert shown == f"  {text}" if length <= 72 else shown.strip(" .") in text
            if length <= 72:
                assert len(marker) - start == min(end, length) - position


def test_a_fault_without_a_place_shows_the_text() -> None:
    assert str(BoundError("no", "n" * 72)) == "no\n  " + "n" * 72
    assert str(BoundError("no", "n" * 73, hint="x")) == "no\n  " + "n" * 69 + "...\nhint: x"
    assert str(BoundError("no", "a\tb\n", 1)) == "no\n  a b \n   ^"


HOSTILE = [
    "n" * 10_000, "(" * 5_000, "(" * 400 + "n" + ")" * 400, "-" * 10_000, "+".join("n" * 400), "9**9**9**9",
    "9^9^9^9", "n!" * 400, "log " * 240 + "n", "sqrt(" * 190 + "n", "(n+1)^" * 150 + "2", "n^" * 490 + "n",
    "(" * 25 + "n+1" + ")^2" * 25, "(n+m+k+1)^8", "T(n) = " + "+".join(f"T(n/{i})" for i in range(2, 90)),
    "T(n) = " + "+".join(f"T(n-{i})" for i in range(1, 90)) + " + 1.99999999^n",
    "T(n) = T(n-1000000000) + 1", "T(n) = T(n-1000000000) + T(n-1) + 2^n", "T(n) = T(n-999999999999999999999) + n",
    "T(n) = T(n/10000000000) + T(n/3) + n", "T(n) = T(0.999999999n) + T(0.000000001n) + n",
    "T(n) = T(n/2)+T(n/3)+T(n/5)+T(n/7)+T(n/11)+n^0.999", "n^123456789012345678901234567890", "(10^100)!",
    "123456789012345678901234567890123456789012345678901234567^n", "T(n)=" + "2*" * 400 + "T(n/2)",
    "((((((n+1)^8+1)^8+1)^8+1)^8+1)^8+1)^8", "log(" * 28 + "n" + ")" * 28, "{x: x^99999 = x + 1}^n", "{" * 500,
    "1" + "0" * 59, "n^0." + "0" * 50 + "1", "T(n) = 1.0000000000000000000000001 T(n/2) + 1", ";" * 900,
    "T(n) = T(n/2) " + "; T(1) = 1" * 80, "max(" + ",".join("n" * 12) + ")", "a+b+c+d+f+g+h+i+j+k+l",
    "(a+b)(c+d)(f+g)(h+i)(j+k)(l+p)(q+r)",
]  # fmt: skip


@pytest.mark.parametrize("text", HOSTILE, ids=range(len(HOSTILE)))
def test_hostile_text_is_answered(text: str) -> None:
    """An answer or the package's own error; work is bounded by counts, checked here by steps of the interpreter."""
    calls = 0

    def count(frame: Any, event: str, arg: object) -> None:
        nonlocal calls
        calls += event == "call"

    before = sys.getprofile()
    sys.setprofile(count)
    try:
        parse_budget(text)
    except BoundError as fault:
        message = str(fault)
    else:
        message = "answered"
    finally:
        sys.setprofile(before)
    assert message
    assert calls < 120_000


@pytest.mark.parametrize(
    ("a", "b"),
    [
        ("V", "E"),
        ("V^2 + E", "V + E log V"),
        ("V E^3", "V^2 + E^3"),
        ("V^3 / W", "V^2 + V W / E"),
        # The left side is larger only for E near V^2, V^5 and V^15.
        ("V E", "V^2.2 + E^1.4"),
        ("V E", "V^5 + E^1.15"),
        ("V E", "V^11 + E^1.05"),
        ("a b + c + d + f + g + h + i", "a + b + c^2 + d + f + g + h + i"),
    ],
)
def test_incomparable_growths_are_refused(a: str, b: str) -> None:
    """Sizes that grow independently have no order: each side is the larger one somewhere."""
    for left, right in ((a, b), (b, a)):
        with pytest.raises(BoundError) as caught:
            compare(left, right)
        assert str(caught.value) == (
            "the two growths are incomparable: which is larger depends on how the sizes grow together"
            f"\n  {left} / {right}"
        )


@pytest.mark.parametrize(
    ("a", "b"),
    [
        ("a b c", "a^3 + b^3 + c^3"),
        ("2^E V", "2^V + 2^E E"),
        ("a b + c + d + f + g + h + i + j", "a^2 + b^2 + c + d + f + g + h + i + j"),
    ],
)
def test_an_order_without_proof_is_no_answer(a: str, b: str) -> None:
    """The left side is the smaller one, but not by a theorem that is known here."""
    with pytest.raises(BoundError) as caught:
        compare(a, b)
    assert caught.value.message == "no proof of the order of these two sums was found"
    assert caught.value.hint == "no answer is given without a proof"


def test_error_travels_between_processes() -> None:
    """A worker's error arrives whole."""
    with pytest.raises(BoundError) as caught:
        parse_budget("log n^2")
    copy = pickle.loads(pickle.dumps(caught.value))
    assert str(copy) == str(caught.value)
    assert (copy.position, copy.end, copy.hint) == (0, 6, caught.value.hint)
    assert copy.args == caught.value.args == (caught.value.message,)


def test_not_text_is_refused() -> None:
    """Anything but text is named by its type."""
    with pytest.raises(BoundError, match="must be text, not int"):
        parse_budget(3)  # type: ignore[arg-type]
