"""The corpus held to its budgets through pytest itself: `python -m tests.studies.through_pytest FOLDER`.

Writes one test a body and budget into FOLDER, runs them with the plugin, and prints how the verdicts came out. Reusable
bodies get a module-scoped workload, the others a function-scoped one. Whatever else the machine does meanwhile is the
condition; say which it was.
"""

from __future__ import annotations

import argparse
import json
import statistics
import subprocess
import sys
from collections import Counter
from pathlib import Path

from tests.studies.corpus import CORPUS, Entry

ROOT = Path(__file__).parents[2]
HEAD = """
import sys
import pytest

sys.path.insert(0, {root!r})
from tests.studies.corpus import CORPUS

ENTRY = {{entry.name: entry for entry in CORPUS}}
"""
WORKLOAD = """

@pytest.fixture(scope={scope!r})
def for_{name}(problem_size, workload_rng):
    return ENTRY[{name!r}].build(problem_size, workload_rng)
"""
TEST = """

@pytest.mark.growth_budget({bound!r}, smallest={smallest}, largest={largest})
def test_{relation}_{name}(for_{name}):
    ENTRY[{name!r}].body(*for_{name})
"""


def tests_of(entry: Entry) -> str:
    bounds = {"sound": entry.growth, "loose": entry.loose}
    bounds |= {f"tight{number}": bound for number, bound in enumerate(entry.too_tight)}
    scope = "module" if entry.reusable else "function"
    return WORKLOAD.format(scope=scope, name=entry.name) + "".join(
        TEST.format(bound=bound, smallest=entry.smallest, largest=entry.largest, relation=relation, name=entry.name)
        for relation, bound in bounds.items()
    )


def main() -> None:
    parser = argparse.ArgumentParser(description=__doc__.splitlines()[0] if __doc__ else None)
    parser.add_argument("folder", type=Path)
    folder = parser.parse_args().folder
    folder.mkdir(parents=True, exist_ok=True)
    (folder / "pyproject.toml").write_text('[tool.growthbudget]\nundecided = "pass"\n')
    (folder / "test_corpus.py").write_text(HEAD.format(root=str(ROOT)) + "".join(map(tests_of, CORPUS)))
    records = folder / "records.jsonl"
    records.unlink(missing_ok=True)
    command = [sys.executable, "-m", "pytest", "-q", "--tb=no", "--growth-records", records.name]
    subprocess.run(command, cwd=folder, check=False, stdout=subprocess.DEVNULL)

    counts: Counter[tuple[str, str]] = Counter()
    seconds = []
    for line in records.read_text().splitlines():
        record = json.loads(line)
        relation = record["test"].partition("::test_")[2].partition("_")[0].rstrip("0123456789")
        counts[relation, record["judgement"]["verdict"]] += 1
        seconds.append(record["judgement"]["seconds"])
    for relation in ("sound", "loose", "tight"):
        found = {verdict: count for (kind, verdict), count in sorted(counts.items()) if kind == relation}
        print(relation, found)
    twentieths = statistics.quantiles(seconds, n=20)
    print(f"seconds: median {statistics.median(seconds):.2f}, 95 % {twentieths[-1]:.2f}, most {max(seconds):.2f}")


if __name__ == "__main__":
    main()
