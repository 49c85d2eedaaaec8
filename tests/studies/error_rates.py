# ruff: noqa: E402 - the thread pools must be told their size before numpy is imported
"""How often the verdict is wrong, and how long it takes, on the functions of the corpus.

    python -m tests.studies.error_rates [--load] [--half choose|hold|all] [--repeats K] [--only NAME]
        [--jobs N] [--minutes M] [--json FILE] [--markdown FILE]

Run from the repository root. Every function is held to its true growth, to a looser budget and to each that is one
class too tight; all are measured live. With `--meter steps`, functions whose lines tell their growth are held to
their true growth, to a looser budget and to one that is too tight by a log factor. `--json FILE` takes one line a
case; a run given the same file goes on where the last one stopped, and `--minutes 0` only prints what the file has.
Each quiet figure is as quiet as the machine was: the number of runnable processes is noted beside it.
"""

from __future__ import annotations

import os

for _pool in ("OMP_NUM_THREADS", "OPENBLAS_NUM_THREADS", "MKL_NUM_THREADS"):
    os.environ.setdefault(_pool, "1")  # CPU time adds up over threads

import argparse
import gc
import json
import sys
import time
from collections.abc import Iterator, Sequence
from concurrent.futures import FIRST_COMPLETED, Future, ProcessPoolExecutor, wait
from dataclasses import asdict
from functools import partial
from multiprocessing import get_context
from pathlib import Path

from pytest_growthbudget.workloads.repeat import collector_spared
from tests.studies.corpus import CORPUS
from tests.studies.figures import as_markdown, as_text, in_full
from tests.studies.one_case import Case, Outcome, cases_of, judge_case, memory_curve
from tests.studies.surroundings import describe, every_core_busy


def arguments(given: Sequence[str] | None = None) -> argparse.Namespace:
    parser = argparse.ArgumentParser(prog="python -m tests.studies.error_rates", description=__doc__.splitlines()[0])
    parser.add_argument("--load", action="store_true", help="keep a busy loop on each core")
    parser.add_argument("--half", choices=("choose", "hold", "all"), default="all", help="half of the corpus")
    parser.add_argument("--repeats", type=int, default=1, metavar="K", help="times that each case is judged")
    parser.add_argument("--only", metavar="NAME", action="append", help="functions whose name holds NAME")
    parser.add_argument("--relation", choices=("true", "loose", "tight"), action="append", help="budgets to hold to")
    parser.add_argument("--meter", choices=("cpu_time", "steps"), default="cpu_time", help="what is read")
    parser.add_argument("--jobs", type=int, default=1, metavar="N", help="processes that measure side by side")
    parser.add_argument("--minutes", type=float, default=float("inf"), metavar="M", help="stop after M minutes")
    parser.add_argument("--seed", type=int, default=1, help="seed of sizes, inputs and order")
    parser.add_argument("--time-limit", type=float, default=10.0, metavar="S", help="seconds for one budget")
    parser.add_argument("--json", type=Path, metavar="FILE", help="one line a case; goes on where FILE ends")
    parser.add_argument("--markdown", type=Path, metavar="FILE", help="write the table")
    return parser.parse_args(given)


def chosen(options: argparse.Namespace) -> list[Case]:
    entries = [
        entry
        for entry in CORPUS
        if options.half in ("all", entry.half)
        and (not options.only or any(part in entry.name for part in options.only))
    ]
    cases = cases_of(entries, options.repeats, options.seed, options.meter)
    return [case for case in cases if not options.relation or case.relation in options.relation]


def kept(path: Path | None) -> list[Outcome]:
    if path is None or not path.exists():
        return []
    return [Outcome(**json.loads(line)) for line in path.read_text().splitlines()]


def key_of(outcome: Outcome) -> tuple[str, bool]:
    case = Case(**{name: getattr(outcome, name) for name in Case.__dataclass_fields__})
    return case.key, outcome.load


def prepare() -> None:
    """In a process of its own: what the session holds already is hidden from the collector, as the plugin does."""
    memory_curve()
    gc.collect()
    gc.freeze()


def judged(cases: Sequence[Case], options: argparse.Namespace) -> Iterator[Outcome]:
    """Outcomes as they come, until the cases or the minutes run out."""
    ends = time.monotonic() + 60 * options.minutes
    judge = partial(judge_case, load=options.load, time_limit=options.time_limit)
    if options.jobs == 1:
        memory_curve()
        with collector_spared():
            for case in cases:
                if time.monotonic() > ends:
                    return
                yield judge(case)
        return
    waiting = iter(cases)
    with ProcessPoolExecutor(options.jobs, get_context("spawn"), initializer=prepare) as pool:
        running: set[Future[Outcome]] = set()
        while True:
            while len(running) < options.jobs and time.monotonic() < ends:
                upcoming = next(waiting, None)
                if upcoming is None:
                    break
                running.add(pool.submit(judge, upcoming))
            if not running:
                return
            done, running = wait(running, return_when=FIRST_COMPLETED)
            for future in done:
                yield future.result()


def main(given: Sequence[str] | None = None) -> int:
    options = arguments(given)
    outcomes = kept(options.json)
    known = {key_of(outcome) for outcome in outcomes}
    cases = [case for case in chosen(options) if (case.key, options.load) not in known]
    with every_core_busy(options.load and bool(cases) and options.minutes > 0):
        for outcome in judged(cases, options) if options.minutes > 0 else ():
            outcomes.append(outcome)
            if not outcome.right:
                print(in_full(outcome), flush=True)
            if options.json:
                with options.json.open("a") as file:
                    file.write(json.dumps(asdict(outcome)) + "\n")
    print(as_text(outcomes))
    if options.markdown:
        command = "python -m tests.studies.error_rates " + " ".join(sys.argv[1:] if given is None else given)
        options.markdown.write_text(as_markdown(outcomes, machine=describe(), command=command.strip()))
    return 0


if __name__ == "__main__":
    sys.exit(main())
