"""The decision rule on recorded readings: 61 functions in three sessions, each held to budgets it keeps and breaks.

    python -m tests.studies.replay [--plan 4,3,12 ...] [--without-curve] [--climb-costs] [--verdicts]

`--plan B,F,M`: a size is read clip(B ms / cost, F, M) times; all that was recorded where none is given.
`--climb-costs`: the ladder's costs are the smaller of two calls from the second set, as in a live climb, instead of
the lower quartiles of the first set. `--verdicts` names the trials that did not end as they should. The readings
were taken on one machine (two processors, 2 MB of second-level cache each, CPython 3.11); "loaded" has a busy loop
on each processor. Seconds are CPU time inside the bodies.
"""

from __future__ import annotations

import argparse
from collections.abc import Callable, Sequence
from dataclasses import dataclass
from typing import Final

import numpy as np

from pytest_growthbudget.fitting.judgement import Finding
from tests.studies.rate import Rate
from tests.studies.recordings import SESSIONS, Replay, Trial, trials

WANTED: Final = {"sound": "within", "loose": "within", "fault": "exceeded", "narrow": "exceeded"}
Plan = Callable[[float], int]


@dataclass(frozen=True)
class Outcome:
    """How one trial ended."""

    trial: Trial
    finding: Finding
    seconds: float
    curve_asked: bool


def plan_of(text: str) -> Plan:
    """`4,3,12` as a plan: readings of a size by its cost in nanoseconds."""
    budget, fewest, most = (float(part) for part in text.split(","))
    return lambda cost: int(min(max(budget * 1e6 / cost, fewest), most))


def replay(
    sessions: Sequence[str] = SESSIONS,
    *,
    plan: Plan | None = None,
    with_curve: bool = True,
    climb_costs: bool = False,
) -> list[Outcome]:
    """Every trial of the sessions, decided."""
    outcomes = []
    for session in sessions:
        for trial in trials(session):
            replayed = Replay(trial, plan=plan, with_curve=with_curve, climb_costs=climb_costs)
            outcomes.append(Outcome(trial, replayed.decide(), replayed.nanoseconds / 1e9, replayed.curve_asked))
    return outcomes


def share(outcomes: Sequence[Outcome], kind: str, verdict: str) -> Rate:
    """How many of one kind ended in a verdict."""
    of_kind = [outcome for outcome in outcomes if outcome.trial.kind == kind]
    return Rate(hits=sum(outcome.finding.verdict == verdict for outcome in of_kind), tries=len(of_kind))


def row(name: str, outcomes: Sequence[Outcome]) -> str:
    """One line of the table."""
    cells = [
        f"{share(outcomes, kind, verdict).hits:4d}/{share(outcomes, kind, verdict).tries:<4d}"
        for kind, verdict in COLUMNS
    ]
    spent = [outcome.seconds for outcome in outcomes if outcome.trial.kind in ("sound", "fault")]
    middle, high = np.quantile(spent, (0.5, 0.95))
    return f"{name:<18}" + "".join(cells) + f"  {middle:.2f} / {high:.2f} / {max(spent):.2f}"


COLUMNS: Final = (
    ("sound", "exceeded"),
    ("sound", "undecided"),
    ("loose", "exceeded"),
    ("loose", "undecided"),
    ("fault", "exceeded"),
    ("fault", "undecided"),
    ("fault", "within"),
    ("narrow", "exceeded"),
)
HEAD: Final = (
    " " * 18
    + "sound    sound    loose    loose    fault    fault    fault    narrow   seconds\n"
    + " " * 18
    + "exceeded undecid. exceeded undecid. exceeded undecid. within   exceeded median / 95 % / most"
)


def table(name: str, outcomes: Sequence[Outcome]) -> str:
    """All sessions together, then each, with the bound on the rate of false alarms."""
    lines = [name, HEAD, row("all", outcomes)]
    by_session: dict[str, list[Outcome]] = {}
    for outcome in outcomes:
        by_session.setdefault(outcome.trial.recording.session, []).append(outcome)
    lines += [row(session, some) for session, some in by_session.items()]
    sound = [outcome for outcome in outcomes if outcome.trial.kind in ("sound", "loose")]
    false = Rate(hits=sum(outcome.finding.verdict == "exceeded" for outcome in sound), tries=len(sound))
    lines.append(f"false alarms: {false}, at most {100 * false.at_most:.2f} % with 95 % confidence")
    asked = sum(outcome.curve_asked for outcome in sound)
    lines.append(f"the memory curve was asked for in {asked} of {len(sound)} sound trials")
    return "\n".join(lines)


def main(given: Sequence[str] | None = None) -> int:
    parser = argparse.ArgumentParser(prog="python -m tests.studies.replay", description=__doc__.splitlines()[0])
    parser.add_argument("--plan", action="append", default=[], metavar="B,F,M")
    parser.add_argument("--without-curve", action="store_true")
    parser.add_argument("--climb-costs", action="store_true")
    parser.add_argument("--verdicts", action="store_true")
    options = parser.parse_args(given)
    plans: list[tuple[str, Plan | None]] = [(f"plan {text}", plan_of(text)) for text in options.plan]
    for name, plan in plans or [("all readings", None)]:
        outcomes = replay(plan=plan, with_curve=not options.without_curve, climb_costs=options.climb_costs)
        print(table(name, outcomes), end="\n\n")
        if options.verdicts:
            for outcome in outcomes:
                if outcome.finding.verdict != WANTED[outcome.trial.kind]:
                    print(f"{outcome.trial.kind}: {outcome.trial.label}: {outcome.finding.verdict}")
                    print(f"    {outcome.finding.stage}: {outcome.finding.reason}")
    return 0


if __name__ == "__main__":
    raise SystemExit(main())
