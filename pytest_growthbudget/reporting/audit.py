"""What is said of an audit: the terms declared and found, one below the other, and what they imply."""

from __future__ import annotations

import textwrap
from typing import Any

from pytest_growthbudget.fitting.judgement import two_places
from pytest_growthbudget.reporting import units

WIDTH = 80


def describe(audit: dict[str, Any]) -> str:
    """The report of one audit in wire form, at most 80 columns wide."""
    blocks = [_wrap(first_line(audit))]
    if audit["checks"]:
        blocks.append("\n".join(_check(check) for check in audit["checks"]))
    facts = [*_facts(audit), *(_fact("note", note) for note in audit["notes"])]
    if facts:
        blocks.append("\n".join(facts))
    return "\n\n".join(blocks)


def first_line(audit: dict[str, Any]) -> str:
    """One sentence: what the code follows, or which terms it does not keep."""
    head = f"audit of {audit['function']}:"
    if audit["observed"] is None:
        return f"{head} no recurrence could be told"
    broken = [_NAMES[check["about"]] for check in _broken(_terms(audit))]
    again = "; the same subproblems are solved again and again" if _overlaps(audit) else ""
    if broken:
        named = list(dict.fromkeys(broken))
        verb = "is" if len(named) == 1 else "are"
        return f"{head} {' and '.join(named)} {verb} not as declared, {_consequence(audit)}{again}"
    follows = "follows what was declared" if _terms(audit) else f"seems to follow {audit['observed']}"
    return f"{head} it {follows}{again}"


_NAMES = {
    "subproblems": "the number of subproblems",
    "argument": "the size of a subproblem",
    "toll": "the toll",
}


def _terms(audit: dict[str, Any]) -> list[dict[str, Any]]:
    return [check for check in audit["checks"] if check["about"] != "overlap"]


def _overlaps(audit: dict[str, Any]) -> bool:
    return len(_terms(audit)) < len(audit["checks"])


def _broken(checks: list[dict[str, Any]]) -> list[dict[str, Any]]:
    return [check for check in checks if check["agrees"] is False]


def _consequence(audit: dict[str, Any]) -> str:
    implied = audit["implies"]
    return {
        "faster": f"which leads to {implied}",
        "same": f"though the growth is: {implied}",
        "slower": f"though {implied} grows no faster",
    }.get(audit["relation"], "and the recurrence observed could not be solved")


def blame(audit: dict[str, Any]) -> str:
    """What to look at where the budget is exceeded: the terms that are not kept, as long as what they lead to grows
    faster than what was declared; else "".
    """
    if audit["relation"] != "faster":
        return ""
    return "; ".join(_sentence(check) for check in _broken(audit["checks"]))


def _sentence(check: dict[str, Any]) -> str:
    if check["about"] == "overlap":
        return f"the same subproblem again and again: {check['found']}; a memo table is missing"
    declared = check["declared"]
    promised = {
        "subproblems": f"{declared} subproblem{'' if declared == '1' else 's'}",
        "argument": f"subproblems of {declared}",
        "toll": f"toll {declared}",
    }[check["about"]]
    return (
        f"declared {promised}: found {check['found']}"
        if check["about"] != "toll"
        else (f"declared {promised}: {check['found']}")
    )


def _check(check: dict[str, Any]) -> str:
    word = {True: "agrees", False: "DIFFERS", None: "unclear"}[check["agrees"]]
    if check["about"] == "overlap":
        return _line("  overlap  ", _sentence(check))
    return _line(f"  {word:<8} ", _sentence(check))


def _facts(audit: dict[str, Any]) -> list[str]:
    lines = []
    pattern, toll = audit["pattern"], audit["toll"]
    if audit["observed"] is not None:
        lines.append(_fact("observed", audit["observed"]))
        if audit["unsolved"]:
            lines.append(_fact("implies", f"not solved: {audit['unsolved']}"))
        else:
            by = f" ({audit['theorem']})" if audit["theorem"] else ""
            against = f"; declared: {audit['theta']}" if audit["theta"] else ""
            lines.append(_fact("implies", f"{audit['implies']}{by}{against}"))
    if pattern is not None:
        lines.append(
            _fact(
                "calls",
                f"{units.count(audit['calls'])} in {_runs(audit)}, of which {units.count(pattern['dividing'])} divide; "
                f"depth {pattern['depth']} at size {units.count(pattern['largest'])}; "
                f"base case of size {_range(pattern['base'])}",
            )
        )
        if pattern["at_once"]:
            answered = units.count(pattern["at_once"])
            lines.append(_fact("at once", f"{answered} larger calls were answered without a subproblem"))
    if toll is not None and not _terms(audit):
        unit = "time" if toll["unit"] == "ns" else "steps"
        hidden = ", which steps do not show" if toll["hidden"] else ""
        exponent = toll["exponent"]
        lines.append(
            _fact(
                "own work",
                f"{unit} grow{'s' if unit == 'time' else ''} as n^{two_places(exponent['estimate'])} "
                f"(95 % {exponent['low']:.2f} to {exponent['high']:.2f}){hidden}",
            )
        )
    return lines


def _runs(audit: dict[str, Any]) -> str:
    return "one run" if audit["runs"] == 1 else f"{audit['runs']} runs"


def _range(spread: dict[str, float]) -> str:
    low, high = units.count(spread["low"]), units.count(spread["high"])
    return low if low == high else f"{low} to {high}"


def _fact(name: str, text: str) -> str:
    return _line(f"  {name:<11}", text)


def _line(head: str, text: str) -> str:
    return textwrap.fill(text, WIDTH, initial_indent=head, subsequent_indent=" " * len(head), break_on_hyphens=False)


def _wrap(text: str) -> str:
    return textwrap.fill(text, WIDTH, subsequent_indent="  ", break_on_hyphens=False)
