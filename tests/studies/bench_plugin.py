"""What the plugin costs: `python -m tests.studies.bench_plugin`.

Prints, all measured in one run: seconds added to 500 unmarked tests, plugin time per reading beyond workload and
body, time of one fit, and seconds to verdict for clear cases.
"""

from __future__ import annotations

import os
import re
import resource
import statistics
import subprocess
import sys
import tempfile
import time
from pathlib import Path

PLAIN = "\n".join(f"def test_{number}():\n    assert True\n" for number in range(500))

CLEAR = """
import pytest

@pytest.fixture
def numbers(problem_size, workload_rng):
    return [workload_rng.random() for _ in range(problem_size)]

@pytest.mark.growth_budget("n")
def test_sum_is_linear(numbers):
    total = 0.0
    for number in numbers:
        total += number

@pytest.mark.growth_budget("n log n")
def test_sort(numbers):
    sorted(numbers)

@pytest.mark.growth_budget("n")
def test_set(numbers):
    {round(number * 1000) for number in numbers}

@pytest.mark.growth_budget("n")
def test_quadratic_is_not_linear(numbers):
    seen = []
    for number in numbers:
        if number not in seen:
            seen.append(number)

@pytest.mark.growth_budget("n")
def test_pairs_are_not_linear(numbers):
    sum(1 for a in numbers for b in numbers if a < b)

@pytest.mark.growth_budget("n")
def test_exponential_is_not_linear(problem_size):
    def calls(n):
        return 1 if n < 2 else calls(n - 1) + calls(n - 2)
    calls(problem_size)

@pytest.mark.growth_budget("n^2")
def test_pairs(numbers):
    sum(1 for a in numbers for b in numbers if a < b)
"""

PER_READING = """
import pytest

@pytest.fixture
def workload(problem_size):
    return problem_size

@pytest.mark.growth_budget("n")
def test_nothing(workload):
    pass
"""

READER = """
import statistics, sys
import pytest
from pytest_growthbudget.running import trial
from pytest_growthbudget.measuring.guards import Watch
from pytest_growthbudget.meters.clocks import CpuTime, wall_time_ns
from pytest_growthbudget.workloads.repeat import Repeater, collector_spared, warnings_apart


def time_readings(item):
    meter = CpuTime()
    repeater = Repeater(item, lambda size: {"problem_size": size}, Watch(60))
    with collector_spared(), warnings_apart():
        spent = []
        for number in range(3000):
            before = wall_time_ns()
            repeater.take(100, meter, 1)
            spent.append(wall_time_ns() - before)
    print("PER READING", statistics.median(spent) / 1e3)


trial.hold = time_readings
sys.exit(pytest.main(["-q", "-s", "-p", "no:cacheprovider", "test_reading.py"]))
"""


def cpu_seconds_of(command: list[str], folder: Path) -> float:
    """CPU time of a process: what other work on the machine takes is not in it."""
    before = resource.getrusage(resource.RUSAGE_CHILDREN)
    alone = {**os.environ, "PYTEST_DISABLE_PLUGIN_AUTOLOAD": "1"}
    subprocess.run(command, cwd=folder, check=True, capture_output=True, env=alone)
    after = resource.getrusage(resource.RUSAGE_CHILDREN)
    return after.ru_utime + after.ru_stime - before.ru_utime - before.ru_stime


def plain_run(folder: Path, repeats: int = 15) -> None:
    (folder / "test_plain.py").write_text(PLAIN)
    base = [sys.executable, "-m", "pytest", "-q", "-p", "no:cacheprovider", "test_plain.py"]
    with_plugin, without = [], []
    for _ in range(repeats):
        without.append(cpu_seconds_of(base, folder))
        with_plugin.append(cpu_seconds_of([*base, "-p", "pytest_growthbudget.plugin"], folder))
    added = 1e3 * (min(with_plugin) - min(without))
    spread = 1e3 * (statistics.median(without) - min(without))
    print(f"500 unmarked tests: {min(without):.3f} s of CPU time without the plugin; the plugin adds")
    print(f"    {added:+.1f} ms (least of {repeats} each; the plain median is {spread:.0f} ms above the least)")


def reading(folder: Path) -> None:
    (folder / "test_reading.py").write_text(PER_READING)
    (folder / "read.py").write_text(READER)
    run = subprocess.run([sys.executable, "read.py"], cwd=folder, capture_output=True, text=True, check=False)
    found = re.search(r"PER READING ([\d.]+)", run.stdout)
    print(f"plugin time per reading: {found.group(1) if found else run.stdout} us (median of 3000, empty body)")


def one_fit() -> None:
    import numpy as np

    from pytest_growthbudget.fitting import excess

    rng = np.random.default_rng(1)
    sizes = 100 * 2 ** np.arange(0, 8, 0.5)
    costs = 50.0 * sizes * np.exp(rng.normal(0, 0.03, len(sizes)))
    spent = []
    for _ in range(60):
        start = time.perf_counter()
        excess.fit_excess(excess.observe(sizes, costs, np.log)).delta.interval()
        spent.append(time.perf_counter() - start)
    print(f"one fit over {len(sizes)} sizes: {1e3 * statistics.median(spent):.2f} ms (median of 60)")


def clear_cases(folder: Path) -> None:
    (folder / "test_clear.py").write_text(CLEAR)
    run = subprocess.run(
        [sys.executable, "-m", "pytest", "-v", "-rA", "test_clear.py"],
        cwd=folder,
        capture_output=True,
        text=True,
        check=False,
    )
    cases = re.findall(
        r"^_+ (test_\w+) _+$.*?^growth budget (\w+): .*?measured in ([\d.]+) (m?s)\)", run.stdout, re.S | re.M
    )
    spent = []
    print("clear cases:")
    for name, verdict, amount, unit in cases:
        spent.append(float(amount) / (1000 if unit == "ms" else 1))
        print(f"    {name:34} {verdict:10} {spent[-1]:.2f} s")
    if spent:
        print(f"    median {statistics.median(spent):.2f} s")


def main() -> None:
    with tempfile.TemporaryDirectory() as name:
        folder = Path(name)
        plain_run(folder)
        reading(folder)
        one_fit()
        clear_cases(folder)


if __name__ == "__main__":
    main()
