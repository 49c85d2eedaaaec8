"""The study's own arithmetic, on outcomes made up for the purpose."""

from __future__ import annotations

import math
from dataclasses import replace

import pytest

from tests.studies.corpus import CORPUS
from tests.studies.error_rates import arguments, chosen
from tests.studies.figures import as_markdown, as_text, figures_of, in_full, tallied
from tests.studies.one_case import Outcome, cases_of, hand_recipe
from tests.studies.rate import Rate

KEPT = Outcome(
    name="mooring",
    relation="true",
    bound="n",
    repeat=0,
    seed=1,
    half="choose",
    dominates=True,
    verdict="within",
    reason="",
    stage="A",
    wall=0.2,
    cpu=0.1,
    busy=0.5,
    load=False,
    curve=False,
    ended="",
    excess=[-0.02, 0.01, 0.04],
    recipe=0.01,
    interval=[-0.02, 0.01, 0.04],
    again=0.03,
    rows=[[100, 5e3, 25, 4096.0], [1000, 5e4, 25, 40960.0]],
)
CAUGHT = replace(KEPT, relation="tight", bound="log n", verdict="exceeded", recipe=0.9, interval=None, again=None)
MISSED = replace(CAUGHT, verdict="within", recipe=0.1, dominates=False)
ACCUSED = replace(KEPT, relation="loose", bound="n log n", verdict="exceeded", half="hold", load=True)


def test_no_hits_is_the_rule_of_three() -> None:
    # Hanley and Lippman-Hand 1983, "If nothing goes wrong, is everything all right?" [from memory]
    assert Rate(hits=0, tries=3000).at_most == pytest.approx(3 / 3000, rel=0.01)


def test_an_upper_limit_leaves_five_per_cent_below() -> None:
    # Clopper and Pearson 1934: at the upper limit p, as few hits as were seen have probability 0.05 [from memory]
    limit = Rate(hits=2, tries=50).at_most
    few = sum(math.comb(50, k) * limit**k * (1 - limit) ** (50 - k) for k in range(3))
    assert few == pytest.approx(0.05, rel=1e-6)


def test_the_hand_recipe_finds_the_excess_of_a_pure_power() -> None:
    costs = {n: (3.0 * n**1.4,) for n in (10, 30, 100, 300)}
    assert hand_recipe(costs, math.log, exponential=False) == pytest.approx(0.4)
    doubled = {n: (2.0**n,) for n in (4, 5, 6, 9)}
    assert hand_recipe(doubled, lambda n: n * math.log(2), exponential=True) == pytest.approx(0)
    assert hand_recipe({1: (1.0,), 2: (2.0,)}, math.log, exponential=False) is None


def test_figures_count_each_relation_apart() -> None:
    figures = figures_of([KEPT, CAUGHT, MISSED])
    assert figures["false exceeded"].startswith("0.0 % (0 of 1)")
    assert figures["too tight reported"] == "50.0 % (1 of 2)"
    assert figures["too tight reported, faster term dominates"] == "100.0 % (1 of 1)"
    assert figures["too tight missed (within)"] == "50.0 % (1 of 2)"
    assert figures["interval holds a second estimate"] == "100.0 % (1 of 1)"
    assert figures["hand recipe: too tight reported"] == "50.0 % (1 of 2)"
    assert figures["wall seconds, median / 95 % / most"] == "0.20 / 0.20 / 0.20"


def test_the_table_has_a_column_for_each_condition_and_names_the_accused() -> None:
    table = as_markdown([KEPT, CAUGHT, MISSED, ACCUSED], machine="a machine", command="the command")
    assert "| figure | quiet, choose | every core busy, hold |" in table
    assert "mooring against loose `n log n`: exceeded 1 of 1" in table
    assert tallied([MISSED, ACCUSED])[0].endswith("exceeded 1 of 1")
    assert "false exceeded" in as_text([ACCUSED])


def test_a_wrong_case_is_listed_with_its_numbers() -> None:
    line = in_full(ACCUSED)
    assert "EXCEEDED mooring against loose `n log n`" in line
    assert "excess +0.01 [-0.02, +0.04]" in line
    assert "100..1000, 5..50 us" in line


def test_cases_hold_every_body_to_all_its_budgets_in_each_turn() -> None:
    cases = cases_of(CORPUS, 2, seed=3)
    assert len({case.key for case in cases}) == len(cases)
    assert len(cases) == 2 * sum(2 + len(entry.too_tight) for entry in CORPUS)
    only = chosen(arguments(["--only", "merge_sort", "--half", "all"]))
    assert {(case.relation, case.bound) for case in only} == {("true", "T(n) = 2 T(n/2) + n"), ("loose", "n^1.5")}
