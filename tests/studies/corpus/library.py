"""Linear bodies out of the standard library."""

from __future__ import annotations

import ast
import base64
import copy
import csv
import hashlib
import heapq
import html
import io
import itertools
import json
import pickle
import random
import re
import sqlite3
import statistics
import struct
import textwrap
import tokenize
import xml.etree.ElementTree as ElementTree
import zlib
from collections import ChainMap, Counter, deque
from contextlib import closing
from typing import Any

from .entry import LINEAR, Shelf
from .inputs import Arguments, bulk, floats, integers, number_words, prose, random_bytes, repeated_words

shelf = Shelf()


@shelf.add(
    LINEAR,
    repeated_words,
    expected=lambda words: {word: words.count(word) for word in words},
    tags="library hash",
    reusable=True,
)
def count_words(words: list[str]) -> Counter[str]:
    return Counter(words)


@shelf.add(
    LINEAR,
    floats,
    expected=lambda values: "[" + ", ".join(map(repr, values)) + "]",
    tags="library strings",
    reusable=True,
)
def dump_json(values: list[float]) -> str:
    return json.dumps(values)


def json_records(n: int, rng: random.Random) -> Arguments:
    return (json.dumps([{"berth": i, "tons": tons} for i, tons in enumerate(bulk(rng).integers(0, 9999, n).tolist())]),)


@shelf.add(
    LINEAR,
    json_records,
    expected=lambda text: text.count("berth"),
    tags="library allocator",
    reusable=True,
    largest=300_000,
)
def load_json_records(text: str) -> int:
    return len(json.loads(text))


@shelf.add(
    LINEAR,
    prose,
    expected=lambda text: "".join("" if mark in "aeiou" else mark for mark in text),
    tags="library regex",
    reusable=True,
)
def drop_vowels_by_pattern(text: str) -> str:
    return re.sub("[aeiou]+", "", text)


@shelf.add(
    LINEAR,
    prose,
    expected=lambda text: [word for word in text.split() if len(word) >= 5],
    tags="library regex allocator",
    reusable=True,
)
def long_words_by_pattern(text: str) -> list[str]:
    return re.findall(r"\b[a-z]{5,}\b", text)


def csv_text(n: int, rng: random.Random) -> Arguments:
    return (
        "".join(
            [f"{i},quay {value},{value / 7:.2f}\r\n" for i, value in enumerate(bulk(rng).integers(0, 999, n).tolist())]
        ),
    )


@shelf.add(
    LINEAR,
    csv_text,
    expected=lambda text: text.count("\n"),
    tags="library allocator strings",
    reusable=True,
    largest=300_000,
)
def read_csv_rows(text: str) -> int:
    return len(list(csv.reader(io.StringIO(text))))


@shelf.add(
    LINEAR,
    floats,
    expected=lambda values: "".join(f"{value!r},moored\r\n" for value in values),
    tags="library strings",
    reusable=True,
)
def write_csv_rows(values: list[float]) -> str:
    out = io.StringIO()
    writer = csv.writer(out)
    for value in values:
        writer.writerow((value, "moored"))
    return out.getvalue()


@shelf.add(
    LINEAR,
    floats,
    expected=lambda values: [sum(values[: i + 1]) for i in range(len(values))],
    tags="library allocator",
    reusable=True,
)
def running_totals(values: list[float]) -> list[float]:
    return list(itertools.accumulate(values))


@shelf.add(
    LINEAR,
    prose,
    expected=lambda text: text.split(),
    tags="library strings regex",
    reusable=True,
    largest=300_000,
)
def wrap_paragraph(text: str) -> list[str]:
    return " ".join(textwrap.wrap(text, 72)).split()


@shelf.add(LINEAR, floats, expected=lambda values: sum(values) / len(values), tags="library", reusable=True)
def mean_of_floats(values: list[float]) -> float:
    return statistics.fmean(values)


@shelf.add(
    LINEAR,
    floats,
    expected=lambda values: sum((v - sum(values) / len(values)) ** 2 for v in values) / (len(values) - 1),
    tags="library slow",
    reusable=True,
    largest=100_000,
)
def exact_variance(values: list[float]) -> float:
    return statistics.variance(values)


@shelf.add(
    LINEAR,
    floats,
    expected=lambda values: [sum(values[max(0, i - 9) : i + 1]) / 10 for i in range(len(values))],
    tags="library deque",
    reusable=True,
)
def moving_mean_of_ten(values: list[float]) -> list[float]:
    window: deque[float] = deque([0.0] * 10, maxlen=10)
    total = 0.0
    means = []
    for value in values:
        total += value - window[0]
        window.append(value)
        means.append(total / 10)
    return means


def layered_tables(n: int, rng: random.Random) -> Arguments:
    draw = bulk(rng)
    return [dict.fromkeys(draw.integers(0, 4 * n, n // 4 + 1).tolist(), i) for i in range(4)], draw.integers(
        0, 4 * n, n
    ).tolist()


@shelf.add(
    LINEAR,
    layered_tables,
    expected=lambda tables, keys: sum(any(key in table for table in tables) for key in keys),
    tags="library hash cache",
    reusable=True,
    largest=400_000,
)
def look_up_in_layers(tables: list[dict[int, int]], keys: list[int]) -> int:
    layers = ChainMap(*tables)
    return sum(key in layers for key in keys)


@shelf.add(
    LINEAR,
    prose,
    expected=lambda text: (text + "<&>" * 3).replace("&", "&amp;").replace("<", "&lt;").replace(">", "&gt;"),
    tags="library strings fast",
    reusable=True,
    largest=10_000_000,
)
def escape_for_html(text: str) -> str:
    return html.escape(text + "<&>" * 3)


@shelf.add(LINEAR, random_bytes, expected=lambda data: data, tags="library fast", reusable=True, largest=20_000_000)
def there_and_back_base64(data: bytes) -> bytes:
    return base64.b64decode(base64.b64encode(data))


@shelf.add(
    LINEAR,
    random_bytes,
    expected=lambda data: hashlib.new("sha256", data).hexdigest(),
    tags="library fast",
    reusable=True,
    largest=20_000_000,
)
def digest(data: bytes) -> str:
    return hashlib.sha256(data).hexdigest()


@shelf.add(LINEAR, prose, expected=lambda text: text, tags="library", reusable=True)
def deflate_and_inflate(text: str) -> str:
    return zlib.decompress(zlib.compress(text.encode())).decode()


@shelf.add(LINEAR, random_bytes, expected=lambda data: sum(data[::4]), tags="library allocator", reusable=True)
def unpack_records(data: bytes) -> int:
    whole = len(data) // 4 * 4
    firsts: list[int] = [record[0] for record in struct.iter_unpack("<BBBB", data[:whole])]
    return sum(firsts) + (data[whole] if whole < len(data) else 0)


@shelf.add(LINEAR, integers, expected=lambda values: values, tags="library allocator", reusable=True)
def pickle_and_back(values: list[int]) -> Any:
    return pickle.loads(pickle.dumps(values))


def nested_records(n: int, rng: random.Random) -> Arguments:
    return ([{"berth": i, "crew": [tons, tons + 1]} for i, tons in enumerate(bulk(rng).integers(0, 99, n).tolist())],)


@shelf.add(
    LINEAR,
    nested_records,
    expected=lambda records: records,
    tags="library slow allocator hash",
    reusable=True,
    largest=100_000,
)
def deep_copy_records(records: list[dict[str, Any]]) -> list[dict[str, Any]]:
    return copy.deepcopy(records)


@shelf.add(LINEAR, floats, expected=lambda values: sorted(values)[:10], tags="library", reusable=True)
def ten_least(values: list[float]) -> list[float]:
    return heapq.nsmallest(10, values)


@shelf.add(LINEAR, floats, expected=min, tags="library")
def heap_in_place(values: list[float]) -> float:
    heapq.heapify(values)
    return values[0]


def eight_runs(n: int, rng: random.Random) -> Arguments:
    draw = bulk(rng)
    return ([sorted(draw.random(n // 8 + 1).tolist()) for _ in range(8)],)


@shelf.add(
    LINEAR,
    eight_runs,
    expected=lambda runs: sorted(itertools.chain(*runs)),
    tags="library generator",
    reusable=True,
)
def merge_eight_runs(runs: list[list[float]]) -> list[float]:
    return list(heapq.merge(*runs))


def statements(n: int, rng: random.Random) -> Arguments:
    return (
        "".join([f"berth_{i} = {value} + depth\n" for i, value in enumerate(bulk(rng).integers(0, 99, n).tolist())]),
    )


@shelf.add(
    LINEAR,
    statements,
    expected=lambda text: text.count("\n"),
    tags="library allocator",
    reusable=True,
    largest=50_000,
)
def parse_statements(text: str) -> int:
    return len(ast.parse(text).body)


@shelf.add(
    LINEAR,
    statements,
    expected=lambda text: 2 * text.count("\n"),
    tags="library slow generator",
    reusable=True,
    largest=50_000,
)
def tokenize_statements(text: str) -> int:
    lines = io.StringIO(text).readline
    return sum(token.type == tokenize.NAME for token in tokenize.generate_tokens(lines))


def xml_text(n: int, rng: random.Random) -> Arguments:
    berths = [f"<berth depth='{depth}'/>" for depth in bulk(rng).integers(0, 99, n).tolist()]
    return ("<harbour>" + "".join(berths) + "</harbour>",)


@shelf.add(
    LINEAR,
    xml_text,
    expected=lambda text: text.count("<berth"),
    tags="library allocator",
    reusable=True,
    largest=100_000,
)
def read_xml(text: str) -> int:
    return len(ElementTree.fromstring(text))


def rows_to_insert(n: int, rng: random.Random) -> Arguments:
    return (list(enumerate(bulk(rng).integers(0, 999, n).tolist())),)


@shelf.add(
    LINEAR,
    rows_to_insert,
    expected=lambda rows: sum(tons for _, tons in rows),
    tags="library large_constant",
    reusable=True,
    largest=300_000,
)
def insert_and_sum_in_sqlite(rows: list[tuple[int, int]]) -> int:
    with closing(sqlite3.connect(":memory:")) as database:
        database.execute("create table cargo (id integer primary key, tons integer)")
        database.executemany("insert into cargo values (?, ?)", rows)
        return int(database.execute("select sum(tons) from cargo").fetchone()[0])


@shelf.add(
    LINEAR,
    number_words,
    expected=lambda words: sum(len(word) for word in words),
    tags="library generator",
    reusable=True,
)
def lines_of_a_stream(words: list[str]) -> int:
    stream = io.StringIO("\n".join(words))
    return sum(len(line.rstrip("\n")) for line in stream)
