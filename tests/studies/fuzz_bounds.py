"""Long fuzz run of bounds and recurrences: python tests/studies/fuzz_bounds.py [COUNT] [SEED].

Three kinds of text: from a grammar, mutations of the corpora, and random characters. Each must be answered, or
refused with BoundError, within 50 ms of processor time; what is answered must print to text that reads back to the
same growth, compare as "same" with itself, and evaluate to a finite or infinite logarithm without an exception.
"""

from __future__ import annotations

import json
import random
import sys
import time
from collections import Counter
from pathlib import Path

from pytest_growthbudget.bounds.budget import compare, parse_budget
from pytest_growthbudget.bounds.language import BoundError

CORPORA = Path(__file__).parent.parent / "bounds"
SIGNS = list("nmVETk0123456789.+-*/^!()[]{},;:=<>|√⌈⌉⌊⌋²³ⁿ·×ΘOo \t_%&'\"\\∞Ωпeπ")
WORDS = [
    "log ",
    "log2(",
    "ln ",
    "lg ",
    "sqrt(",
    "T(n/2)",
    "T(n-1)",
    "T(",
    " = ",
    "O(",
    "max(",
    "exp(",
    "n!",
    "^2",
    "2^n",
]
LIMIT = 0.05


def number(r: random.Random) -> str:
    return r.choice(["1", "2", "3", "7", "10", "0.5", "1.5", "2/3", "0", "1e3", "100", "0.001", "8", "2.0000001"])


def expression(r: random.Random, depth: int = 0, names: str = "n") -> str:
    if depth > 3:
        return r.choice([*names, number(r)])
    kind = r.randrange(14)
    inner = [expression(r, depth + 1, names) for _ in range(2)]
    name = r.choice(names)
    if kind < 3:
        return name
    if kind == 3:
        return number(r)
    if kind == 4:
        return f"{inner[0]} {r.choice('+-')} {inner[1]}"
    if kind == 5:
        return f"{inner[0]} {r.choice(['*', '/', '', '//'])} {inner[1]}"
    if kind == 6:
        return f"({inner[0]})^{r.choice(['2', '(1/2)', '0.3', '-1', '(' + inner[1] + ')', name])}"
    if kind == 7:
        return f"{r.choice(['log', 'log2', 'ln', 'lg', 'log^2', 'log10'])}({inner[0]})"
    if kind == 8:
        return f"log {name}"
    if kind == 9:
        return f"{r.choice(['sqrt', 'floor', 'ceil', 'O', 'exp', 'cbrt'])}({inner[0]})"
    if kind == 10:
        return f"{number(r)}^({inner[0]})"
    if kind == 11:
        return f"{name}{r.choice(['!', '²', ' log ' + name, '^2', '^log2(7)'])}"
    if kind == 12:
        return f"max({inner[0]}, {inner[1]})"
    return f"({inner[0]})"


def argument(r: random.Random) -> str:
    shapes = [
        "n/{}",
        "n - {}",
        "{}n",
        "2n/{}",
        "sqrt(n)",
        "n^(1/{})",
        "ceil(n/{})",
        "floor({}n)",
        "n/{} + 3",
        "n - log n",
    ]
    return r.choice([*shapes, "n/2", "n/2", "n-1", "n-2"]).format(number(r))


def recurrence(r: random.Random) -> str:
    parts = []
    for _ in range(r.choice([1, 1, 1, 2, 2, 3])):
        coefficient = r.choice(["", "", "2 ", "3", "0.5 ", "7/4 ", "n ", "sqrt(n) ", f"({expression(r, 3)}) "])
        parts.append(f"{coefficient}T({argument(r)})")
    if r.random() < 0.85:
        parts.append(expression(r, r.choice([1, 2, 3])))
    return f"T(n) = {' + '.join(parts)}"


def mutated(r: random.Random, texts: list[str]) -> str:
    text = r.choice(texts)
    for _ in range(r.choice([1, 1, 2, 4])):
        at = r.randrange(len(text) + 1)
        what = r.randrange(4)
        if what == 0:
            text = text[:at] + text[at + 1 :]
        elif what == 1:
            text = text[:at] + r.choice(SIGNS) + text[at:]
        elif what == 2:
            text = text[:at] + r.choice(WORDS) + text[at:]
        else:
            other = r.choice(texts)
            text = text[:at] + other[r.randrange(len(other) + 1) :]
    return text


def noise(r: random.Random) -> str:
    return "".join(r.choice([*SIGNS, *WORDS]) for _ in range(r.randrange(1, 60)))


def one(r: random.Random, texts: list[str]) -> str:
    kind = r.randrange(6)
    if kind < 2:
        return expression(r, 0, r.choice(["n", "n", "nm", "VE"]))
    if kind < 4:
        return recurrence(r)
    return mutated(r, texts) if kind == 4 else noise(r)


def check(text: str) -> str:
    """Outcome of one input; anything but BoundError escapes."""
    start = time.process_time()
    try:
        budget = parse_budget(text)
    except BoundError as fault:
        str(fault)
        outcome = "refused"
    else:
        outcome = budget.kind
    if time.process_time() - start > LIMIT:
        outcome = "slow"
    if outcome in ("bound", "recurrence"):
        again = parse_budget(budget.theta)
        if again.theta != budget.theta or again.growth.monomials != budget.growth.monomials:
            return "unstable"
        if compare(budget, again) != "same":
            return "unequal"
        for n in (1, 2, 3, 10, 1e6, 1e300):
            budget.log_growth(dict.fromkeys(budget.variables, n))
        budget.terms()
    return outcome


def main(count: int, seed: int) -> int:
    r = random.Random(seed)
    texts = [
        entry["input"]
        for path in sorted(CORPORA.glob("*alid/*.json"))
        for entry in json.loads(path.read_text("utf-8"))
        if entry.get("input")
    ]
    outcomes: Counter[str] = Counter()
    bad = 0
    for _ in range(count):
        text = one(r, texts)
        try:
            outcome = check(text)
        except Exception as error:
            outcome = f"{type(error).__name__}"
            print(f"{outcome}: {error} from {text!r}")
            bad += 1
        outcomes[outcome] += 1
        if outcome in ("slow", "unstable", "unequal"):
            print(f"{outcome}: {text!r}")
            bad += 1
    print(dict(outcomes))
    return 1 if bad else 0


if __name__ == "__main__":
    sys.exit(main(int(sys.argv[1]) if len(sys.argv) > 1 else 100_000, int(sys.argv[2]) if len(sys.argv) > 2 else 1))
