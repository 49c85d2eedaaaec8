"""The page: every judged budget of a run in one HTML file that needs nothing else, drawn from its records.

Needs jinja2 and matplotlib, which the extra `page` installs; nothing else in the package does.
"""

from __future__ import annotations

import math
import re
from collections import Counter
from collections.abc import Mapping, Sequence
from importlib import resources
from typing import Any

from jinja2 import Environment, StrictUndefined
from markupsafe import Markup, escape

from pytest_growthbudget.reporting import risen, units
from pytest_growthbudget.reporting.curves import Curves, curves
from pytest_growthbudget.reporting.failure import first_line, power
from pytest_growthbudget.reporting.plot import draw
from pytest_growthbudget.reporting.records import Record
from pytest_growthbudget.reporting.summary import total_line

#: What needs a look comes first.
RANK = ("exceeded", "risen", "undecided", "unmeasured", "within")
#: Up to so many budgets the page opens with all of them unfolded.
FEW = 6
LINE_WIDTH = 100

_ENVIRONMENT = (
    ("Time (UTC)", "run", "time"),
    ("Seed", "run", "seed"),
    ("Worker processes", "run", "workers"),
    ("Python", "environment", "python"),
    ("Implementation", "environment", "implementation"),
    ("Platform", "environment", "platform"),
    ("Architecture", "environment", "machine"),
    ("Processor", "environment", "processor"),
    ("Cores", "environment", "cores"),
    ("pytest_growthbudget", "environment", "version"),
)

#: After these a node id may be broken; not within the escape of a sign.
_PLACES = re.compile(r"(::|[/_.\[,-])")

Facts = list[tuple[str, str]]


def render(records: Sequence[Record]) -> str:
    """The page of `records` as HTML. The records of several runs stand side by side, each naming its run."""
    runs: dict[str, Record] = {}
    for record in records:
        runs.setdefault(record["run"]["id"], record)
    several = len(runs) > 1
    ordered = sorted(enumerate(records), key=lambda pair: (_rank(pair[1]["judgement"]), pair[0]))
    budgets = [
        _budget(record, f"b{number}", several=several, opened=len(records) <= FEW)
        for number, (_, record) in enumerate(ordered, 1)
    ]
    counts = Counter(str(budget["verdict"]) for budget in budgets)
    jinja = Environment(autoescape=True, undefined=StrictUndefined, trim_blocks=True, lstrip_blocks=True)
    jinja.globals["mark"] = _mark
    jinja.filters["breakable"] = _breakable
    jinja.filters["hundredths"] = _hundredths
    return jinja.from_string(_resource("page.html.j2")).render(
        total=total_line([record["judgement"] for record in records]),
        budgets=budgets,
        counts=[(name, counts[name]) for name in RANK if counts[name]],
        runs=[record["run"] for record in runs.values()],
        environment=[(name, [record[part][entry] for record in runs.values()]) for name, part, entry in _ENVIRONMENT],
        style=Markup(_resource("page.css")),
        script=Markup(_resource("page.js")),
    )


def _resource(name: str) -> str:
    return resources.files("pytest_growthbudget.reporting").joinpath(name).read_text(encoding="utf-8")


def _breakable(text: str) -> Markup:
    """The text with places where a narrow line may break: a node id has none of its own."""
    return Markup(_PLACES.sub("\\1<wbr>", str(escape(text))))


def _mark(budget: Mapping[str, Any]) -> Markup:
    text = "within, but risen" if budget["verdict"] == "risen" else budget["verdict"]
    return Markup('<span class="verdict {}">{}</span>').format(budget["verdict"], text)


def _shown_verdict(judgement: Mapping[str, Any]) -> str:
    return "risen" if judgement["verdict"] == "within" and risen.fails(judgement) else str(judgement["verdict"])


def _rank(judgement: Mapping[str, Any]) -> int:
    return RANK.index(_shown_verdict(judgement))


def _budget(record: Record, key: str, *, several: bool, opened: bool) -> dict[str, Any]:
    """What the template shows of one record."""
    judgement = record["judgement"]
    drawn = curves(judgement)
    return {
        "key": key,
        "test": record["test"],
        "verdict": _shown_verdict(judgement),
        "rank": _rank(judgement),
        "meter": judgement["meter"],
        "theta": judgement["theta"],
        "variable": judgement["variable"],
        "exponent": judgement["exponent"],
        "exponent_sort": _estimate(judgement["exponent"]),
        "excess": judgement["excess"],
        "excess_sort": _estimate(judgement["excess"]),
        "seconds": units.seconds(judgement["seconds"]),
        "seconds_sort": judgement["seconds"],
        "open": opened or judgement["verdict"] == "exceeded",
        "first_line": first_line(judgement),
        "percent": _percent(judgement),
        "plot": Markup(_plot(drawn, record, key)) if drawn else "",
        "bends_at": units.count(judgement["bends_at"]) if judgement["bends_at"] is not None else "",
        "has_budget_line": bool(drawn and drawn.budget),
        "has_forecast": bool(drawn and len(drawn.fit) > len(drawn.readings)),
        "facts": _facts(judgement) + ([("run", record["run"]["id"])] if several else []),
        "look_at": _look_at(judgement),
        "steps": judgement["steps"],
        "rows": _rows(judgement),
        "ahead": _ahead(judgement),
    }


def _plot(drawn: Curves, record: Record, key: str) -> str:
    judgement = record["judgement"]
    first, last = drawn.readings[0], drawn.readings[-1]
    unit, name = judgement["unit"], judgement["variable"]
    said = (
        f"{judgement['meter']} from {units.cost(first[1], unit)} at {name} = {units.count(first[0])} to "
        f"{units.cost(last[1], unit)} at {name} = {units.count(last[0])}, with the fit, its interval and the budget "
        f"{judgement['theta']}. {first_line(judgement)}. The table of sizes has the numbers."
    )
    title = f"Cost by problem size: {record['test']}, {judgement['meter']}"
    return draw(drawn, unit=unit, variable=name, key=key, title=title, description=said)


def _estimate(interval: Mapping[str, float] | None) -> float:
    return interval["estimate"] if interval else math.nan


def _hundredths(value: float) -> str:
    text = f"{value:.2f}"
    return "0.00" if text == "-0.00" else text


def _interval(interval: Mapping[str, float] | None) -> str:
    if interval is None:
        return ""
    estimate, low, high = (_hundredths(interval[end]) for end in ("estimate", "low", "high"))
    return f"{estimate} ({low} to {high})"


def _percent(judgement: Mapping[str, Any]) -> str:
    return f"{100 * judgement['confidence']:g} %"


def _facts(judgement: Mapping[str, Any]) -> Facts:
    exponent, excess, name = judgement["exponent"], judgement["excess"], judgement["variable"]
    known: list[tuple[str, object]] = [
        ("declared", judgement["bound"]),
        ("growth", judgement["theta"] if judgement["theta"] != judgement["bound"] else ""),
        ("theorem", judgement["theorem"]),
        ("ray", judgement["ray"]),
        ("rays", ", ".join(f"{ray}: {verdict}" for ray, verdict in judgement["rays"])),
        ("ceiling", _ceiling(judgement)),
        ("meter", judgement["meter"]),
        (
            "observed",
            exponent
            and f"{power(exponent['estimate'], name)}, {_percent(judgement)} interval "
            f"{exponent['low']:.2f} to {exponent['high']:.2f}",
        ),
        ("excess", excess and f"{_interval(excess)}, slack {judgement['slack']:g}"),
        ("resolution", judgement["resolution"] and f"an excess of {judgement['resolution']:.2f}"),
        ("since", judgement["bends_at"] and f"{name} = {units.count(judgement['bends_at'])}"),
        ("confirmed", judgement["confirmed"] and "by a second, independent set of readings"),
        ("nearest", judgement["nearest"]),
        ("because", judgement["reason"]),
        ("drift", risen.fact(judgement)),
        *(("note", note) for note in judgement["notes"]),
        ("seed", judgement["seed"]),
    ]
    return [(name, str(text)) for name, text in known if text not in (None, "", False)]


def _look_at(judgement: Mapping[str, Any]) -> str:
    """The lines of the user's code that grow fastest; "" where none were looked for."""
    if not judgement.get("lines"):
        return ""
    from pytest_growthbudget.reporting import lines

    return "\n".join(lines.describe(judgement["lines"], judgement["variable"], LINE_WIDTH))


def _ceiling(judgement: Mapping[str, Any]) -> str:
    row = judgement["ceiling"]
    if row is None:
        return ""
    unit, cost = judgement["unit"], row["cost"]
    return (
        f"{units.cost(cost['estimate'], unit)} ({units.cost(cost['low'], unit)} to {units.cost(cost['high'], unit)}) "
        f"foreseen at {judgement['variable']} = {units.count(row['size'])}, where {units.cost(row['allowed'], unit)} "
        "is allowed"
    )


def _rows(judgement: Mapping[str, Any]) -> list[tuple[str, ...]]:
    rows, unit = judgement["sizes"], judgement["unit"]
    allowed = judgement["allowed"] if len(judgement["allowed"]) == len(rows) else [None] * len(rows)
    return [
        (
            units.count(row["size"]),
            units.cost(row["cost"], unit),
            units.cost(limit, unit) if limit else "",
            f"{row['cost'] / limit:.3g}" if limit else "",
            str(row["readings"]),
            units.cost(row["footprint"], "bytes") if row["footprint"] else "",
        )
        for row, limit in zip(rows, allowed, strict=True)
    ]


def _ahead(judgement: Mapping[str, Any]) -> list[tuple[str, ...]]:
    unit = judgement["unit"]
    return [
        (
            units.count(row["size"]),
            units.cost(row["cost"]["estimate"], unit),
            f"{units.cost(row['cost']['low'], unit)} to {units.cost(row['cost']['high'], unit)}",
            units.cost(row["allowed"], unit),
        )
        for row in judgement["forecast"]
    ]
