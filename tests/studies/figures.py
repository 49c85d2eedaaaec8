"""Error rates out of outcomes, as text for a terminal and as a table for the guide."""

from __future__ import annotations

from collections.abc import Callable, Sequence

import numpy as np

from tests.studies.one_case import RECIPE_THRESHOLD, Outcome
from tests.studies.rate import Rate

MB = 2.0**20


def rate(outcomes: Sequence[Outcome], hit: Callable[[Outcome], bool]) -> Rate:
    return Rate(hits=sum(map(hit, outcomes)), tries=len(outcomes))


def seconds(values: Sequence[float]) -> str:
    if not values:
        return "none"
    middle, high = np.quantile(values, (0.5, 0.95))
    return f"{middle:.2f} / {high:.2f} / {max(values):.2f}"


def recipe_exceeds(outcome: Outcome) -> bool:
    return outcome.recipe is not None and outcome.recipe > RECIPE_THRESHOLD


def covers(outcome: Outcome) -> bool:
    assert outcome.interval is not None
    assert outcome.again is not None
    return outcome.interval[0] <= outcome.again <= outcome.interval[2]


def figures_of(outcomes: Sequence[Outcome]) -> dict[str, str]:
    """The study's figures by name, for the outcomes of one condition."""
    sound = [each for each in outcomes if each.relation != "tight"]
    true = [each for each in outcomes if each.relation == "true"]
    tight = [each for each in outcomes if each.relation == "tight"]
    plain = [each for each in tight if each.dominates]
    repeated = [each for each in true if each.interval is not None and each.again is not None]
    false = rate(sound, lambda each: each.verdict == "exceeded")
    return {
        "judged budgets": str(len(outcomes)),
        "false exceeded": f"{false}, at most {100 * false.at_most:.2f} %" if sound else "none",
        "true growth undecided": str(rate(true, lambda each: each.verdict == "undecided")),
        "loose budgets undecided": str(
            rate([s for s in sound if s.relation == "loose"], lambda e: e.verdict == "undecided")
        ),
        "sound unmeasured": str(rate(sound, lambda each: each.verdict == "unmeasured")),
        "too tight reported": str(rate(tight, lambda each: each.verdict == "exceeded")),
        "too tight reported, faster term dominates": str(rate(plain, lambda each: each.verdict == "exceeded")),
        "too tight missed (within)": str(rate(tight, lambda each: each.verdict == "within")),
        "too tight undecided": str(rate(tight, lambda each: each.verdict in ("undecided", "unmeasured"))),
        "interval holds a second estimate": str(rate(repeated, covers)),
        "wall seconds, median / 95 % / most": seconds([each.wall for each in outcomes]),
        "CPU seconds, median / 95 % / most": seconds([each.cpu for each in outcomes]),
        "hand recipe: false exceeded": str(rate(sound, recipe_exceeds)),
        "hand recipe: too tight reported": str(rate(tight, recipe_exceeds)),
        "hand recipe: the same, faster term dominates": str(rate(plain, recipe_exceeds)),
        "runnable processes, median": f"{np.median([each.busy for each in outcomes]):.1f}" if outcomes else "",
    }


def conditions(outcomes: Sequence[Outcome]) -> dict[str, list[Outcome]]:
    """Outcomes by condition and half; empty groups left out."""
    groups = {
        f"{'every core busy' if load else 'quiet'}, {half}": [
            each for each in outcomes if each.load == load and each.half == half
        ]
        for load in (False, True)
        for half in ("choose", "hold")
    }
    return {name: group for name, group in groups.items() if group}


def as_text(outcomes: Sequence[Outcome]) -> str:
    lines = []
    for name, group in conditions(outcomes).items():
        lines += [name, *(f"  {label:48} {value}" for label, value in figures_of(group).items())]
    return "\n".join(lines)


def as_markdown(outcomes: Sequence[Outcome], *, machine: str, command: str) -> str:
    """A table with one column a condition and half, and below it every sound body reported."""
    groups = {name: figures_of(group) for name, group in conditions(outcomes).items()}
    lines = [
        f"Measured on {machine}, by `{command}`.",
        "",
        "| figure | " + " | ".join(groups) + " |",
        "| --- |" + " --- |" * len(groups),
    ]
    labels = list(next(iter(groups.values()), {}))
    lines += [f"| {label} | " + " | ".join(group[label] for group in groups.values()) + " |" for label in labels]
    lines += ["", "Bodies whose verdict was wrong or wanting, with the number of times:", ""]
    lines += [f"- {line}" for line in tallied(outcomes)] or ["- none"]
    return "\n".join(lines) + "\n"


def tallied(outcomes: Sequence[Outcome]) -> list[str]:
    """Each wrong pair of body and budget with how often it went wrong, the worst kind first."""
    pairs: dict[tuple[str, str, str], list[Outcome]] = {}
    for each in outcomes:
        pairs.setdefault((each.name, each.relation, each.bound), []).append(each)
    found = []
    for (name, relation, bound), group in pairs.items():
        for verdict in ("exceeded", "within", "undecided", "unmeasured"):
            wrong = [each for each in group if each.verdict == verdict and not each.right]
            if wrong:
                badness = 0 if verdict == "exceeded" else 1 if relation == "true" else 2 if relation == "tight" else 3
                found.append(
                    (badness, name, f"{name} against {relation} `{bound}`: {verdict} {len(wrong)} of {len(group)}")
                )
    return [line for _, _, line in sorted(found)]


def in_full(outcome: Outcome) -> str:
    """One wrong or undecided case with its numbers."""
    head = (
        f"{outcome.verdict.upper()} {outcome.name} against {outcome.relation} `{outcome.bound}`"
        f" [stage {outcome.stage or '-'}{', loaded' if outcome.load else ''}, turn {outcome.repeat}]"
    )
    details = []
    if outcome.excess:
        low, middle, high = outcome.excess
        details.append(f"excess {middle:+.2f} [{low:+.2f}, {high:+.2f}]")
    if outcome.recipe is not None:
        details.append(f"by hand {outcome.recipe:+.2f}")
    if outcome.rows:
        first, last = outcome.rows[0], outcome.rows[-1]
        details.append(
            f"{len(outcome.rows)} sizes {first[0]:.0f}..{last[0]:.0f}, {first[1] / 1e3:.3g}..{last[1] / 1e3:.3g} us,"
            f" {first[3] / MB:.2g}..{last[3] / MB:.2g} MiB"
        )
    details.append(f"{outcome.wall:.2f} s, curve {'asked' if outcome.curve else 'not asked'}")
    if outcome.ended:
        details.append(f"climb ended by {outcome.ended}")
    if outcome.reason:
        details.append(outcome.reason)
    return head + "\n    " + "; ".join(details)
