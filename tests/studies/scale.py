"""Scale: what many budgets cost a session, in figures from one run.

    python tests/studies/scale.py [--budgets 2000] [--plain 20000] [--long 300] [--judged 200]

- collection of so many budgets beside so many plain tests, with the plugin and without, at two scales: a ratio near
  the ratio of the scales shows that nothing grows faster than the suite;
- the memory of a session after each tenth of its budgets;
- a suite of budgets end to end, alone and under `-n 2`.
"""

from __future__ import annotations

import argparse
import os
import re
import subprocess
import sys
import tempfile
import time
from pathlib import Path

PLAIN = "def test_plain_{0}(problem_size): ...\n"
UNPLUGGED = "def test_plain_{0}(): ...\n"
BUDGET = """
@pytest.mark.growth_budget("{1}", meter="steps", largest=64)
def test_budget_{0}(numbers):
    for number in numbers: number
"""
JUDGED = """
@pytest.mark.growth_budget("n", meter="{1}"{2})
def test_budget_{0}(numbers):
    sorted(number * 2 for number in numbers)
"""
FIXTURE = """
import pytest

@pytest.fixture
def numbers(problem_size):
    return list(range(problem_size))
"""
BOUNDS = ("n", "n log n", "T(n) = 2 T(n/2) + n", "n^2")
A_FILE = 200

MEMORY = """
import gc
import pytest

def resident():
    with open("/proc/self/statm") as file:
        return int(file.read().split()[1]) * 4096 / 2**20

class Watch:
    def __init__(self): self.done = 0
    @pytest.hookimpl(trylast=True)
    def pytest_runtest_logfinish(self):
        self.done += 1
        if self.done % {every} == 0:
            gc.collect()
            print(f"MEMORY {{self.done}} {{resident():.1f}} {{len(gc.get_objects())}}", flush=True)

def pytest_configure(config):
    config.pluginmanager.register(Watch())
"""


def write_suite(where: Path, budgets: int, plain: int, template: str = BUDGET) -> None:
    where.mkdir(parents=True)
    (where / "conftest.py").write_text(FIXTURE)
    (where / "pytest.ini").write_text("[pytest]\naddopts = -p no:cacheprovider\n")
    files = max(1, (budgets + plain) // A_FILE)
    for number in range(files):
        lines = ["import pytest\n"]
        lines += [template.format(i, BOUNDS[i % len(BOUNDS)], "") for i in range(number, budgets, files)]
        lines += [PLAIN.format(i) for i in range(number, plain, files)]
        (where / f"test_{number}.py").write_text("".join(lines))


def write_judged(where: Path, count: int) -> None:
    where.mkdir(parents=True)
    (where / "conftest.py").write_text(FIXTURE)
    (where / "pytest.ini").write_text("[pytest]\n")
    for number in range(10):
        lines = ["import pytest\n"]
        for i in range(number, count, 10):
            clock = i % 4 == 0
            lines.append(JUDGED.format(i, "cpu_time" if clock else "steps", "" if clock else ", largest=512"))
        (where / f"test_{number}.py").write_text("".join(lines))


def run(where: Path, *args: str) -> tuple[float, str]:
    environment = {**os.environ, "PYTHONPATH": os.pathsep.join(path for path in sys.path if path)}
    began = time.perf_counter()
    command = [sys.executable, "-m", "pytest", "-q", *args]
    done = subprocess.run(command, cwd=where, env=environment, capture_output=True, text=True, check=False)
    spent = time.perf_counter() - began
    if "INTERNALERROR" in done.stdout or done.returncode not in (0, 1):
        raise SystemExit(done.stdout[-3000:] + done.stderr[-3000:])
    return spent, done.stdout


def collection(root: Path, budgets: int, plain: int) -> None:
    print("collection, seconds")
    print(f"  {'budgets':>8} {'plain':>8} {'judging on':>11} {'judging off':>12} {'no plugin':>10}")
    for part in (10, 5, 2, 1):
        some, others = budgets // part, plain // part
        where = root / f"collect{part}"
        write_suite(where, some, others)
        on, text = run(where, "--collect-only", "-qq")
        off, _ = run(where, "--collect-only", "-qq", "--growth", "off")
        bare = root / f"bare{part}"
        write_suite(bare, some, others)
        for file in bare.glob("test_*.py"):
            file.write_text(re.sub(r"@pytest.mark.growth_budget.*\n", "", file.read_text()))
        (bare / "conftest.py").write_text(FIXTURE + "\n@pytest.fixture\ndef problem_size(): return 100\n")
        without, _ = run(bare, "--collect-only", "-qq", "-p", "no:growthbudget")
        counted = sum(int(line.rpartition(": ")[2]) for line in text.splitlines() if re.fullmatch(r".*\.py: \d+", line))
        assert counted == some + others, (counted, some + others)
        print(f"  {some:>8} {others:>8} {on:>11.1f} {off:>12.1f} {without:>10.1f}", flush=True)


def memory(root: Path, budgets: int) -> None:
    where = root / "long"
    write_suite(where, budgets, 0)
    (where / "conftest.py").write_text(FIXTURE + MEMORY.format(every=max(budgets // 10, 1)))
    spent, text = run(where, "-s")
    print(f"\nmemory of one session of {budgets} budgets ({spent:.0f} s)")
    print(f"  {'tests done':>10} {'resident MiB':>13} {'objects':>9}")
    for done, mib, objects in re.findall(r"MEMORY (\d+) ([\d.]+) (\d+)", text):
        print(f"  {done:>10} {mib:>13} {int(objects):>9,}")


def end_to_end(root: Path, count: int) -> None:
    where = root / "judged"
    write_judged(where, count)
    print(f"\n{count} budgets end to end, a quarter of them by the clock")
    for args in ((), ("-n", "2")):
        spent, text = run(where, *args)
        summary = [line for line in text.splitlines() if "growth budgets:" in line]
        print(f"  {' '.join(args) or 'alone':<6} {spent:7.1f} s  {summary[-1] if summary else text[-300:]}", flush=True)


def main() -> None:
    parser = argparse.ArgumentParser(description=(__doc__ or "").splitlines()[0])
    parser.add_argument("--budgets", type=int, default=2000)
    parser.add_argument("--plain", type=int, default=20_000)
    parser.add_argument("--long", type=int, default=300)
    parser.add_argument("--judged", type=int, default=200)
    options = parser.parse_args()
    with tempfile.TemporaryDirectory() as directory:
        root = Path(directory)
        collection(root, options.budgets, options.plain)
        memory(root, options.long)
        end_to_end(root, options.judged)


if __name__ == "__main__":
    main()
