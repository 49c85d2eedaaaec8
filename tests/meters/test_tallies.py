"""Tallies: keys that count what is done to them, also from C, and behave as their values in all else."""

from __future__ import annotations

import bisect
import copy
import heapq
import operator
import pickle
import random
import sqlite3
from itertools import pairwise

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from pytest_growthbudget.meters.protocol import MeterError
from pytest_growthbudget.meters.tallies import Tally, TallyMeter


@pytest.fixture
def tally() -> Tally:
    return Tally()


VALUES = st.one_of(
    st.integers(), st.text(max_size=5), st.tuples(st.integers(), st.text(max_size=2)), st.floats(allow_nan=False)
)


class TestCounting:
    @pytest.mark.parametrize("compare", [operator.lt, operator.le, operator.gt, operator.ge])
    def test_a_comparison_counts_once_on_either_side(self, tally, compare):
        a, b = tally.keys([1, 2])
        for one, other in ((a, b), (a, 2), (1, b)):
            tally.reset()
            assert compare(one, other) is compare(1, 2)
            assert [tally.count(name) for name in tally.names] == [1, 0, 0]

    @pytest.mark.parametrize("compare", [operator.eq, operator.ne])
    def test_an_equality_test_counts_once_on_either_side(self, tally, compare):
        a, b = tally.keys(["berth", "crane"])
        for one, other in ((a, b), (a, "crane"), ("berth", b)):
            tally.reset()
            assert compare(one, other) is compare("berth", "crane")
            assert [tally.count(name) for name in tally.names] == [0, 1, 0]

    def test_sorting_in_c_is_counted(self, tally):
        values = list(range(500))
        random.Random(5).shuffle(values)
        keys = tally.keys(values)
        keys.sort()
        assert [tally.unwrap(key) for key in keys] == list(range(500))
        assert 499 < tally.count("comparisons") < 500 * 9

    def test_sorting_tuples_of_keys_asks_for_equality_first(self, tally):
        rows = [(key,) for key in tally.keys([3, 1, 2])]
        assert sorted(rows) == [(1,), (2,), (3,)]
        assert tally.count("equalities") > 0

    def test_bisection_in_c_is_counted(self, tally):
        keys = tally.keys(range(1000))
        assert bisect.bisect_left(keys, 500) == 500
        assert 9 <= tally.count("comparisons") <= 10

    def test_a_heap_in_c_is_counted(self, tally):
        heap = tally.keys([5, 3, 8, 1])
        heapq.heapify(heap)
        before = tally.count("comparisons")
        assert before >= 3
        assert heapq.heappop(heap) == 1
        assert tally.count("comparisons") > before

    def test_a_dict_hashes_once_an_access(self, tally):
        keys = tally.keys(range(100))
        berths = dict.fromkeys(keys, "free")
        assert tally.count("hashes") == 100
        assert berths[7] == "free"  # a plain key meets a wrapped one: only the table's side is asked
        assert (tally.count("hashes"), tally.count("equalities")) == (100, 1)
        assert berths[keys[8]] == "free"  # the same object needs no equality test
        assert (tally.count("hashes"), tally.count("equalities")) == (101, 1)

    def test_a_set_finds_equal_keys(self, tally):
        assert len(set(tally.keys([1, 2, 1, 2, 3]))) == 3
        assert tally.count("hashes") == 5
        assert tally.count("equalities") == 2

    def test_a_search_through_a_list_is_counted(self, tally):
        keys = tally.keys(range(100))
        assert 70 in keys
        assert tally.count("equalities") == 71

    def test_hashes_that_all_collide_show_as_equality_tests(self, tally):
        class Crate:
            def __hash__(self):
                return 1

            def __eq__(self, other):
                return self is other

        assert len(set(tally.keys(Crate() for _ in range(30)))) == 30
        assert tally.count("equalities") >= 30 * 29 // 2

    def test_keys_of_two_tallies_count_each_in_its_own(self):
        one, other = Tally(), Tally()
        (a,), (b,) = one.keys([1]), other.keys([2])
        assert a < b
        assert b > 1
        assert (one.count("comparisons"), other.count("comparisons")) == (1, 1)

    def test_a_key_that_is_wrapped_again_counts_for_the_new_tally_alone(self):
        one, other = Tally(), Tally()
        (again,) = other.keys(one.keys([3]))
        assert again < 4
        assert (one.count("comparisons"), other.count("comparisons")) == (0, 1)


class TestKeysAsValues:
    @given(VALUES)
    def test_a_key_prints_hashes_and_equals_as_its_value(self, value):
        (key,) = Tally().keys([value])
        assert repr(key) == repr(value)
        assert str(key) == str(value)
        assert f"{key}" == f"{value}"
        assert hash(key) == hash(value)
        assert key == value
        assert value == key
        assert bool(key) is bool(value)
        assert Tally.unwrap(key) is value

    @given(st.lists(st.integers(), max_size=30))
    def test_sorting_keys_sorts_the_values_stably(self, values):
        tally = Tally()
        keys = sorted(tally.keys(values))
        assert [tally.unwrap(key) for key in keys] == sorted(values)
        assert tally.count("comparisons") >= max(0, len(values) - 1)

    @given(st.integers(-50, 50), st.integers(1, 50))
    def test_arithmetic_gives_plain_values(self, a, b):
        one, other = Tally().keys([a, b])
        for calculate in (
            operator.add, operator.sub, operator.mul, operator.truediv, operator.floordiv, operator.mod, divmod,
            operator.and_, operator.or_, operator.xor, operator.lshift, operator.rshift,
        ):  # fmt: skip
            plain = calculate(a, b)
            for got in (calculate(one, other), calculate(one, b), calculate(a, other)):
                assert got == plain
                assert type(got) is type(plain)
        assert other**2 == b**2
        assert 2**other == 2**b
        assert pow(one, other, 7) == pow(a, b, 7)
        assert (-one, +one, ~one, abs(one), int(one), float(one), round(one)) == (-a, a, ~a, abs(a), a, float(a), a)
        assert [*range(100)][other] == b

    def test_containers_and_attributes_show_through(self, tally):
        (name,) = tally.keys(["berth"])
        assert len(name) == 5
        assert name[1:3] == "er"
        assert list(name) == list("berth")
        assert "er" in name
        assert name.upper() == "BERTH"
        (matrix,) = tally.keys([np.eye(2)])
        assert (matrix @ np.ones(2)).tolist() == [1, 1]

    def test_what_a_value_cannot_do_its_key_cannot(self, tally):
        (number,) = tally.keys([3])
        with pytest.raises(AttributeError, match="'int' object has no attribute 'upper'"):
            number.upper()
        with pytest.raises(TypeError):
            iter(number)
        with pytest.raises(TypeError, match="'<' not supported between instances of 'int' and 'str'"):
            number < "berth"  # noqa: B015
        with pytest.raises(TypeError, match="unhashable type: 'list'"):
            hash(tally.keys([[]])[0])

    def test_copies_count_for_the_same_tally(self, tally):
        keys = tally.keys([[1], [2]])
        for copied in (copy.copy(keys[0]), copy.deepcopy(keys)[0]):
            tally.reset()
            assert copied < keys[1]
            assert tally.count("comparisons") == 1
        assert tally.unwrap(copy.deepcopy(keys)[0]) is not tally.unwrap(keys[0])

    def test_a_key_does_not_go_to_another_process(self, tally):
        with pytest.raises(TypeError, match="a counted key cannot be pickled: what another process does with it"):
            pickle.dumps(tally.keys([1]))

    def test_nothing_is_unwrapped_to_itself(self):
        assert Tally.unwrap("plain") == "plain"


class TestNames:
    def test_anything_can_be_counted(self, tally):
        assert tally.names == ()
        assert tally.count("queries") == 0
        tally.add("queries")
        tally.add("rows", 40)
        tally.add("queries", 2)
        assert (tally.count("queries"), tally.count("rows")) == (3, 40)
        assert tally.names == ("queries", "rows")

    def test_a_reset_keeps_names_and_keys(self, tally):
        a, b = tally.keys([1, 2])
        assert a < b
        tally.reset()
        assert tally.count("comparisons") == 0
        assert tally.names == ("comparisons", "equalities", "hashes")
        assert a < b
        assert tally.count("comparisons") == 1

    @pytest.mark.parametrize(
        ("name", "amount", "message"),
        [
            ("queries", -1, "tally.add('queries', -1): a tally only grows; add 0 or more"),
            ("", 1, "tally.add(''): a name must be given, without blanks around it"),
            (" rows", 1, "tally.add(' rows'): a name must be given, without blanks around it"),
        ],
    )
    def test_what_cannot_be_added(self, tally, name, amount, message):
        with pytest.raises(ValueError, match=r"tally\.add") as caught:
            tally.add(name, amount)
        assert str(caught.value) == message


class TestMeter:
    def test_it_reads_what_was_added_during_the_reading(self, tally):
        meter = TallyMeter("comparisons", tally)
        assert (meter.name, meter.unit, meter.deterministic) == ("tally:comparisons", "comparisons", True)
        keys = tally.keys(range(50, 0, -1))
        max(keys)
        for _ in range(2):
            meter.start()
            sorted(keys)
            assert meter.stop() == 49.0

    def test_zero_is_a_reading_where_the_name_exists(self, tally):
        tally.add("queries", 0)
        meter = TallyMeter("queries", tally)
        meter.start()
        assert meter.stop() == 0.0

    @pytest.mark.parametrize(
        ("counted", "use", "remedy"),
        [
            (
                "comparisons",
                lambda tally: None,
                "Take the fixture `tally` and build the workload with tally.keys(values).",
            ),
            (
                "queries",
                lambda tally: None,
                (
                    "Take the fixture `tally` and call tally.add('queries') where one is made, "
                    "and tally.add('queries', 0) beforehand if there may be none."
                ),
            ),
            (
                "query",
                lambda tally: (tally.add("queries"), tally.add("rows")),
                "This test's tally has 'queries', 'rows': name one of these in the marker.",
            ),
        ],
        ids=["keys", "own", "other"],
    )
    def test_a_tally_that_nothing_added_to_is_a_fault(self, tally, counted, use, remedy):
        meter = TallyMeter(counted, tally)
        meter.start()
        use(tally)
        with pytest.raises(MeterError) as caught:
            meter.stop()
        assert caught.value.args[0] == (
            f"the meter 'tally:{counted}' has nothing to read: nothing was added to '{counted}'. {remedy}"
        )

    def test_a_body_that_resets_the_tally_is_told(self, tally):
        tally.add("queries", 5)
        meter = TallyMeter("queries", tally)
        meter.start()
        tally.reset()
        with pytest.raises(MeterError) as caught:
            meter.stop()
        assert caught.value.args[0] == (
            "the meter 'tally:queries' went backwards, from 5 to 0: the body reset the tally. "
            "Take tally.reset() out of the body; readings do not need it."
        )


class TestQueriesOfAPage:
    """The recipe of the guide, on a real database: one query a page, however many rows."""

    @staticmethod
    def harbour(rows: int) -> sqlite3.Connection:
        office = sqlite3.connect(":memory:")
        office.executescript("create table ship (id integer primary key, name); create table berth (ship, quay)")
        office.executemany("insert into ship values (?, ?)", ((i, f"ship {i}") for i in range(rows)))
        office.executemany("insert into berth values (?, ?)", ((i, i % 9) for i in range(rows)))
        return office

    @staticmethod
    def joined_page(office: sqlite3.Connection) -> list:
        return office.execute("select name, quay from ship join berth on ship = id order by id").fetchall()

    @staticmethod
    def query_per_row_page(office: sqlite3.Connection) -> list:
        ships = office.execute("select id, name from ship order by id").fetchall()
        return [
            (name, office.execute("select quay from berth where ship = ?", (ship,)).fetchone()[0])
            for ship, name in ships
        ]

    def queries(self, page, rows: int) -> float:
        office, tally = self.harbour(rows), Tally()
        office.set_trace_callback(lambda statement: tally.add("queries"))
        meter = TallyMeter("queries", tally)
        meter.start()
        shown = page(office)
        count = meter.stop()
        assert len(shown) == rows
        office.close()
        return count

    def test_a_join_issues_one_query(self):
        assert [self.queries(self.joined_page, rows) for rows in (1, 10, 100, 1000)] == [1, 1, 1, 1]

    def test_a_query_per_row_shows_as_linear(self):
        counts = [self.queries(self.query_per_row_page, rows) for rows in (100, 200, 300)]
        assert counts == [101, 201, 301]
        assert {b - a for a, b in pairwise(counts)} == {100}
