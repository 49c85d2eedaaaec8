"""The estimate of the excess: exact laws, invariances, coverage, and an earlier implementation's figures."""

from __future__ import annotations

import json
import math

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from pytest_growthbudget.fitting.excess import (
    COUNTER_NOISE,
    Mixture,
    Observations,
    fit_excess,
    fit_lines,
    local_exponent,
    observe,
)
from tests.studies.recordings import DATA, GROWTHS, KERNELS, Replay, Trial, load, lower_quartile, memory_curve

SIZES = np.unique((12 * 2 ** (np.arange(18) / 2)).astype(int))


def linear(n: float) -> float:
    return math.log(n)


def constant(n: float) -> float:
    return 0.0


@pytest.mark.parametrize("exponent", [-0.5, 0.0, 0.5, 1.0, 2.0])
def test_a_pure_power_is_found(exponent: float) -> None:
    seen = observe(SIZES, 3.0 * SIZES ** (1 + exponent), linear)
    found = fit_excess(seen, noise=COUNTER_NOISE)
    for mixture in (found.delta, found.at_top):
        interval = mixture.interval()
        assert interval.low < exponent < interval.high
        assert interval.estimate == pytest.approx(exponent, abs=0.01)


def test_an_offset_does_not_hide_the_excess() -> None:
    """Fifty milliseconds of overhead over a square: the whole cost grows slowly, what leads it grows as n²."""
    found = fit_excess(observe(SIZES, 5e7 + 10.0 * SIZES**2, linear))
    assert found.delta.interval().estimate == pytest.approx(1.0, abs=0.05)
    assert found.at_top.interval().estimate < 0.7


def test_what_hides_behind_the_budgets_own_growth_is_found() -> None:
    found = fit_excess(observe(SIZES, 100.0 * SIZES + 0.05 * SIZES**2, linear), noise=COUNTER_NOISE)
    assert found.hidden.interval().high > found.delta.interval().high


def test_an_exponential_budget_is_met_in_powers_of_itself() -> None:
    n = np.arange(8, 24)
    budget = partial_exponential(math.log(2))
    met = fit_excess(observe(n, 2.0**n, budget, exponential=True)).delta.interval()
    assert met.estimate == pytest.approx(0, abs=0.01)
    missed = fit_excess(observe(n, 3.0**n, budget, exponential=True)).delta.interval()
    assert missed.estimate == pytest.approx(math.log(3) / math.log(2) - 1, abs=0.01)


def partial_exponential(rate: float):  # type: ignore[no-untyped-def]
    return lambda n: rate * n


def test_exponential_growth_neither_overflows_nor_vanishes() -> None:
    """2^n at n = 5000 is beyond any float; its log is not."""
    n = np.arange(100, 5000, 300)
    found = fit_excess(observe(n, 7.0 * n, partial_exponential(math.log(2)), exponential=True))
    assert -1.01 < found.delta.interval().estimate < -0.99


@settings(max_examples=40, deadline=None)
@given(
    scale=st.floats(1e-6, 1e9),
    growth_scale=st.floats(-50, 50),
    noise=st.integers(0, 1000),
)
def test_units_and_constant_factors_do_not_matter(scale: float, growth_scale: float, noise: int) -> None:
    """Costs in other units, and a budget times a constant, leave every interval where it is."""
    costs = SIZES**1.3 * np.exp(np.random.default_rng(noise).normal(0, 0.05, len(SIZES)))
    one = fit_excess(observe(SIZES, costs, linear))
    other = fit_excess(observe(SIZES, costs * scale, lambda n: math.log(n) + growth_scale))
    for name in ("delta", "at_top", "hidden"):
        first, second = getattr(one, name).interval(), getattr(other, name).interval()
        assert second.estimate == pytest.approx(first.estimate, abs=1e-5)
        assert second.low == pytest.approx(first.low, abs=1e-5)
        assert second.high == pytest.approx(first.high, abs=1e-5)


@settings(max_examples=40, deadline=None)
@given(shift=st.floats(-0.5, 1), noise=st.integers(0, 1000))
def test_cost_and_budget_steeper_alike_leave_the_excess(shift: float, noise: int) -> None:
    """What counts is the cost against the budget: both times n^s have the excess at the top that they had."""
    costs = SIZES * np.exp(np.random.default_rng(noise).normal(0, 0.02, len(SIZES)))
    steeper = fit_excess(observe(SIZES, costs * SIZES**shift, lambda n: (1 + shift) * math.log(n)))
    plain = fit_excess(observe(SIZES, costs, linear))
    assert steeper.at_top.interval().estimate == pytest.approx(plain.at_top.interval().estimate, abs=0.03)


@pytest.mark.parametrize("walk", [0.0, 0.02])
def test_the_interval_covers_the_truth(walk: float) -> None:
    """Of 200 draws with white noise, and with a random walk on top, at least 93 % of the 95 % intervals cover 0."""
    draw = np.random.default_rng(1)
    covered = 0
    for _ in range(200):
        error = draw.normal(0, 0.03, len(SIZES)) + np.cumsum(draw.normal(0, walk, len(SIZES)))
        interval = fit_excess(observe(SIZES, SIZES * np.exp(error), linear)).delta.interval()
        covered += interval.low <= 0 <= interval.high
    assert covered >= 186


def test_more_confidence_widens_the_interval() -> None:
    found = fit_excess(observe(SIZES, SIZES * (1 + 0.1 * (SIZES % 3)), linear)).delta
    wide, narrow = found.interval(0.99), found.interval(0.8)
    assert narrow.estimate == pytest.approx(wide.estimate)
    assert wide.low < narrow.low < narrow.estimate < narrow.high < wide.high


def test_quantiles_invert_the_distribution() -> None:
    mixture = Mixture(
        centres=np.array([-1.0, 0.5, 3.0]),
        scales=np.array([0.1, 2.0, 1e-3]),
        weights=np.array([0.2, 0.5, 0.3]),
        freedom=7,
    )
    levels = (0.001, 0.1, 0.5, 0.9, 0.999)
    for level, value in zip(levels, mixture.quantiles(levels), strict=True):
        assert mixture.cdf(value) == pytest.approx(level, abs=1e-5)


def test_a_window_is_judged_by_its_own_top() -> None:
    seen = observe(SIZES, SIZES * 1.0, lambda n: math.log(n) + math.log(math.log(n)))
    window = seen.window(2, 8)
    assert window.sizes.tolist() == SIZES[2:8].tolist()
    assert window.gamma == pytest.approx(local_exponent(lambda n: math.log(n) + math.log(math.log(n)), SIZES[7]))


def test_division_is_relative_to_the_first_size() -> None:
    seen = observe([1, 2, 4, 8, 16], [8.0, 8.0, 8.0, 8.0, 8.0], constant)
    halved = seen.divided_by(np.log([3.0, 6.0, 6.0, 12.0, 3.0]))
    assert halved.costs.tolist() == pytest.approx([8, 4, 4, 2, 8])


FIGURES = json.loads((DATA / "first_implementation.json").read_text(encoding="ascii"))["fits"]


@pytest.fixture(scope="module")
def recordings():  # type: ignore[no-untyped-def]
    return {session: load(session) for session in ("quiet1", "quiet2", "loaded1")}


@pytest.mark.parametrize("known", FIGURES, ids=lambda known: f"{known['session']}-{known['name']}")
def test_the_first_implementation_found_the_same(known, recordings) -> None:  # type: ignore[no-untyped-def]
    """Intervals that an independent implementation of the formulas gave for the same readings, memory included."""
    session = recordings[known["session"]]
    recording = session[known["name"]]
    curve = memory_curve([session[name] for name in KERNELS if name != known["name"]])
    replayed = Replay(Trial(recording, "sound", known["budget"], curve))
    cut = slice(known["first"], known["last"])
    costs = [lower_quartile(read) for read in recording.sets[0][cut]]
    seen: Observations = observe(recording.sizes[cut], costs, GROWTHS[known["budget"]])
    found = fit_excess(seen)
    for name in ("delta", "at_top", "hidden"):
        interval = getattr(found, name).interval()
        assert [interval.low, interval.estimate, interval.high] == pytest.approx(known[name], abs=2e-5)
    assert replayed.costs[cut] == pytest.approx(costs)


@pytest.mark.parametrize("count", [12, 400])
def test_growth_that_may_hide_has_no_part_in_the_plain_excess(count: int) -> None:
    """However many sizes speak for it: it is weighed on its own."""
    sizes = np.geomspace(10, 1e6, count)
    lines = fit_lines(observe(sizes, 100 * sizes + 1e-3 * sizes**2, np.log), noise=0.0003)
    assert lines.weights()[lines.kind == 2].sum() == 0
    assert lines.weights(with_growth=True)[lines.kind == 2].sum() > 0.9
