"""How often the interval of the excess holds the truth, on made-up costs whose truth is known.

    python -m tests.studies.synthetic [--trials N] [--seed S] [--markdown FILE]

Each trial draws a budget n^γ, an excess δ, a ladder of sizes and a family of cost; the fit sees noisy readings as
the plan would take them (lower quartile of clip(8 ms / cost, 5, 25) readings a size) and gives a 95 % interval.
Two truths are held against it: the limit, the δ of the leading term as n grows without end; and the mean, the
straight line through the noiseless costs over the sizes measured. They part where the cost is no pure power. Beside
them stands how often the fit would accuse a body that keeps its budget (δ = 0), without a second set of readings
and without the memory allowance that the rule makes.
"""

from __future__ import annotations

import argparse
import sys
from collections.abc import Callable, Sequence
from dataclasses import dataclass
from pathlib import Path

import numpy as np
from numpy.typing import NDArray

from pytest_growthbudget.fitting.excess import fit_excess, observe
from pytest_growthbudget.fitting.verdict import clock_limits, is_exceeded
from tests.studies.rate import Rate

Array = NDArray[np.float64]
Family = Callable[[Array, np.random.Generator], Array]

#: One call's cost over the median, less one, at the probabilities below: measured on real functions, a quiet machine
#: and one with a busy loop on each core, for calls of 20 to 100 µs and of 1 to 10 ms.
PROBABILITIES = np.array([0.0, 0.01, 0.05, 0.25, 0.5, 0.75, 0.95, 0.99, 1.0])
NOISE = {
    "quiet": (
        np.array([-0.40, -0.34, -0.15, -0.05, 0.0, 0.07, 0.32, 1.16, 1.6]),
        np.array([-0.15, -0.12, -0.06, -0.02, 0.0, 0.03, 0.10, 0.21, 0.4]),
    ),
    "busy": (
        np.array([-0.45, -0.38, -0.16, -0.04, 0.0, 0.07, 0.43, 0.98, 1.6]),
        np.array([-0.25, -0.19, -0.08, -0.02, 0.0, 0.03, 0.12, 0.30, 0.6]),
    ),
}
SHORT, LONG = np.log(50e3), np.log(3e6)
FLOOR, TOP = 5e3, 30e6


def pure(n: Array, draw: np.random.Generator) -> Array:
    """Nothing but the power."""
    return np.ones_like(n)


def offset(n: Array, draw: np.random.Generator) -> Array:
    """A constant of up to 30 times the cost at the smallest size; told apart from a factor by its minus sign."""
    return np.full_like(n, -np.exp(draw.uniform(np.log(0.1), np.log(30.0))))


def slow_start(n: Array, draw: np.random.Generator) -> Array:
    """Terms in n^-1/2 and n^-1, of either sign, beside the leading one."""
    first, second = draw.uniform(-0.4, 3.0), draw.uniform(-0.3, 3.0)
    factor: Array = 1 + first * (n[0] / n) ** 0.5 + second * (n[0] / n)
    return factor


def ramp(n: Array, draw: np.random.Generator) -> Array:
    """A cache that is left somewhere along the ladder: up to 3.5 times as dear beyond."""
    height = draw.uniform(np.log(1.2), np.log(3.5))
    place = draw.uniform(0.2, 1.0) * np.log(n[-1] / n[0])
    factor: Array = np.exp(height / (1 + np.exp(-(np.log(n / n[0]) - place) / 0.5)))
    return factor


def sawtooth(n: Array, draw: np.random.Generator) -> Array:
    """A table that doubles: dear just after, cheap just before."""
    depth, phase = draw.uniform(0.05, 0.4), draw.random()
    factor: Array = 1 + depth * (1 - np.mod(np.log2(n) + phase, 1.0))
    return factor


FAMILIES: dict[str, Family] = {
    "pure power": pure,
    "constant up to 30 times the floor": offset,
    "terms in n^-1/2 and n^-1": slow_start,
    "cache ramp to 1.2..3.5": ramp,
    "resize sawtooth": sawtooth,
}


@dataclass(frozen=True, slots=True)
class Trial:
    """What one made-up measurement gave."""

    holds_limit: bool
    holds_mean: bool
    accused: bool | None
    width: float


def noisy_quartiles(costs: Array, noise: str, draw: np.random.Generator) -> Array:
    """Lower quartiles of the readings that the plan would take of these costs (ns)."""
    short, long = NOISE[noise]
    quartiles = []
    for cost in costs:
        weight = np.clip((np.log(cost) - SHORT) / (LONG - SHORT), 0.0, 1.0)
        count = int(np.clip(8e6 / cost, 5, 25))
        spread = np.interp(draw.random(count), PROBABILITIES, (1 - weight) * short + weight * long)
        quartiles.append(cost * np.quantile(1 + spread, 0.25))
    return np.array(quartiles)


def try_once(family: Family, noise: str, draw: np.random.Generator, *, keeps: bool) -> Trial:
    """One trial. `keeps`: δ is 0 and the trial asks whether the fit accuses; otherwise δ is drawn."""
    gamma = float(draw.choice([0.5, 1.0, 1.5, 2.0, 3.0]))
    delta = 0.0 if keeps else float(draw.uniform(-0.3, 0.8))
    octaves = np.log2(TOP / FLOOR) / max(gamma + delta, 0.3)
    step = 0.5 if 2 * octaves >= 12 else 0.25
    n = np.round(40 * 2 ** (np.arange(int(min(octaves, 14) / step) + 1) * step + draw.random()))
    n = np.unique(n)
    power = (n / n[0]) ** (gamma + delta)
    factor = family(n, draw)
    costs = FLOOR * (power - factor if factor[0] < 0 else power * factor / factor[0])
    seen = observe(n, noisy_quartiles(costs, noise, draw), lambda size: gamma * float(np.log(size)))
    fit = fit_excess(seen)
    low, high = fit.delta.quantiles((0.025, 0.975))
    mean = float(np.polyfit(np.log(n), np.log(costs), 1)[0]) - gamma
    limits = clock_limits()
    return Trial(
        holds_limit=low <= delta <= high,
        holds_mean=low <= mean <= high,
        accused=is_exceeded(fit, fit, seen.gamma, limits.exceeded, limits) if keeps else None,
        width=high - low,
    )


def table(trials: int, seed: int) -> str:
    """The figures of all families and both kinds of noise, as a markdown table."""
    lines = [
        "| cost | noise | interval holds the limit | the mean over the sizes | median width | accused though δ = 0 |",
        "| --- | --- | --- | --- | --- | --- |",
    ]
    for name, family in FAMILIES.items():
        for noise in NOISE:
            draw = np.random.default_rng([seed, *map(ord, name + noise)])
            done = [try_once(family, noise, draw, keeps=i % 2 == 0) for i in range(trials)]
            judged = [trial for trial in done if trial.accused is not None]
            rates = [
                Rate(hits=sum(trial.holds_limit for trial in done), tries=len(done)),
                Rate(hits=sum(trial.holds_mean for trial in done), tries=len(done)),
                Rate(hits=sum(bool(trial.accused) for trial in judged), tries=len(judged)),
            ]
            width = float(np.median([trial.width for trial in done]))
            lines.append(f"| {name} | {noise} | {rates[0]} | {rates[1]} | {width:.2f} | {rates[2]} |")
    return "\n".join(lines) + "\n"


def main(given: Sequence[str] | None = None) -> int:
    parser = argparse.ArgumentParser(prog="python -m tests.studies.synthetic", description=__doc__.splitlines()[0])
    parser.add_argument("--trials", type=int, default=400, metavar="N", help="trials a family and noise")
    parser.add_argument("--seed", type=int, default=1)
    parser.add_argument("--markdown", type=Path, metavar="FILE", help="write the table there too")
    options = parser.parse_args(given)
    text = table(options.trials, options.seed)
    print(text, end="")
    if options.markdown:
        options.markdown.write_text(text)
    return 0


if __name__ == "__main__":
    sys.exit(main())
