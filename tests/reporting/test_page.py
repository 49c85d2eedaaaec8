"""The page: whole, valid, self-contained, accessible; and in a real browser where there is one."""

from __future__ import annotations

import json
import math
import os
import re
import shutil
import subprocess
import sys
from collections import Counter
from html.parser import HTMLParser
from importlib import resources
from pathlib import Path
from typing import Any

import pytest

jinja2 = pytest.importorskip("jinja2", reason="the page needs the extra [page]")
matplotlib = pytest.importorskip("matplotlib", reason="the page needs the extra [page]")

from pytest_growthbudget.__main__ import main  # noqa: E402
from pytest_growthbudget.reporting.curves import curves  # noqa: E402
from pytest_growthbudget.reporting.page import render  # noqa: E402
from pytest_growthbudget.reporting.plot import _log_ticks, draw  # noqa: E402
from tests.reporting.samples import SIZES, judgement, real_records, record, write  # noqa: E402
from tests.studies import shoot_page  # noqa: E402

VOID = {"meta", "link", "input", "wbr", "br"}


class Outline(HTMLParser):
    """What a page holds; fails on elements that are not closed in order."""

    def __init__(self) -> None:
        super().__init__()
        self.open: list[str] = []
        self.ids: Counter[str] = Counter()
        self.links: list[str] = []
        self.tags: Counter[str] = Counter()
        self.attributes: list[tuple[str, dict[str, str | None]]] = []

    def handle_starttag(self, tag: str, attrs: list[tuple[str, str | None]]) -> None:
        found = dict(attrs)
        self.tags[tag] += 1
        self.attributes.append((tag, found))
        if found.get("id"):
            self.ids[str(found["id"])] += 1
        for name in ("href", "src", "action"):
            if name in found:
                self.links.append(str(found[name]))
        if tag not in VOID:
            self.open.append(tag)

    def handle_startendtag(self, tag: str, attrs: list[tuple[str, str | None]]) -> None:
        self.handle_starttag(tag, attrs)
        if tag not in VOID:
            self.open.pop()

    def handle_endtag(self, tag: str) -> None:
        assert self.open.pop() == tag


@pytest.fixture(scope="module")
def page() -> str:
    return render(real_records())


@pytest.fixture(scope="module")
def outline(page: str) -> Outline:
    found = Outline()
    found.feed(page)
    assert found.open == []
    return found


# ------------------------------------------------------------------ the document


def test_nothing_comes_from_elsewhere(page: str, outline: Outline) -> None:
    assert all(link.startswith(("#", "data:")) for link in outline.links)
    assert "url(" not in page.replace("url(#", "")
    assert "@import" not in page
    assert re.findall(r"https?://(?!www\.w3\.org/)", page) == []
    assert "default-src 'none'" in page


def test_ids_are_the_only_ones_and_links_lead_somewhere(page: str, outline: Outline) -> None:
    assert [name for name, count in outline.ids.items() if count > 1] == []
    referred = {link[1:] for link in outline.links if link.startswith("#")} | set(re.findall(r"url\(#([^)]*)\)", page))
    assert referred <= set(outline.ids)


def test_every_plot_and_table_says_what_it_is(outline: Outline) -> None:
    plots = [found for tag, found in outline.attributes if tag == "svg"]
    assert len(plots) == 8
    for plot in plots:
        assert plot["role"] == "img"
        assert set(str(plot["aria-labelledby"]).split()) <= set(outline.ids)
    assert outline.tags["caption"] == outline.tags["table"]
    assert all(found.get("scope") in ("col", "row") for tag, found in outline.attributes if tag == "th")
    assert dict(outline.attributes[0][1]) == {"lang": "en"}
    assert outline.tags["h1"] == outline.tags["main"] == 1


def test_what_needs_a_look_comes_first(page: str) -> None:
    rows = re.findall(r'<tr data-verdict="(\w+)">', page)
    assert rows == ["exceeded"] * 2 + ["undecided"] + ["within"] * 5


def test_everything_a_record_tells_is_there(page: str) -> None:
    text = re.sub(r"<[^>]*>", "", page)
    for each in real_records():
        judged = each["judgement"]
        assert each["test"] in text
        for step in judged["steps"]:
            assert step.replace("&", "&amp;").replace("<", "&lt;").replace(">", "&gt;") in text
    for fact in ("3.11.7", "x86_64", "the lower quartile at each size", "Master theorem, case 2"):
        assert fact in text


def test_text_is_escaped() -> None:
    hostile = record(1.0, test="t.py::test[<script>alert(1)</script>&\"']")
    hostile["judgement"].update(bound="<b>n</b>", notes=["</style><img src=x>"], steps=["a < b & c"])
    found = render([hostile])
    assert "<script>alert" not in found
    assert "<b>n</b>" not in found
    assert "<img" not in found
    Outline().feed(found)


def test_a_run_without_budgets() -> None:
    found = render([])
    assert "No budget was judged." in found
    Outline().feed(found)


def test_what_was_not_measured_has_a_place_without_a_plot() -> None:
    bare = record(1.0)
    bare["judgement"].update(
        verdict="unmeasured", reason="no size could be read", excess=None, exponent=None, resolution=None, sizes=[],
        allowed=[], forecast=[], nearest=None,
    )  # fmt: skip
    found = render([bare])
    assert "There is no plot" in found
    assert "no size could be read" in found
    assert "<svg" not in found


def test_numbers_beyond_counting() -> None:
    steep = record(1.0)
    steep["judgement"]["forecast"][1]["cost"] = {"estimate": None, "low": 1.0, "high": None}
    steep["judgement"]["forecast"][2]["allowed"] = None
    assert "beyond counting" in render([steep])


def test_several_runs_stand_side_by_side() -> None:
    found = render([record(1.0, run="first"), record(1.0, run="second", test="t.py::other")])
    assert "<dt>run</dt><dd>first</dd>" in found
    assert '<th scope="col">second</th>' in found


def test_a_budget_with_a_risen_exponent_stands_out() -> None:
    risen = record(1.1)
    interval = {"estimate": 1.1, "low": 1.09, "high": 1.11}
    risen["judgement"]["drift"] = {
        "risen": True, "why": "a second measurement agrees", "of": "exponent", "over": [32, 2896],
        "accepted": {"estimate": 0.9, "low": 0.89, "high": 0.91}, "now": interval, "since": "2026-02-01T00:00:00Z",
    }  # fmt: skip
    found = render([record(1.0, test="t.py::other"), risen])
    assert re.findall(r'<tr data-verdict="(\w+)">', found) == ["risen", "within"]
    assert "growth has drifted: cpu_time grows as n^1.10 where n^0.90 was accepted" in found


def test_lines_to_look_at() -> None:
    pytest.importorskip("pytest_growthbudget.reporting.lines")
    found = record(2.0)
    found["judgement"]["lines"] = [
        {
            "file": "harbour/berths.py", "line": 42, "source": "if ship in taken < 3:", "kind": "runs",
            "sizes": [64, 128], "before": 4096, "after": 16384,
        }
    ]  # fmt: skip
    text = render([found])
    assert "What to look at" in text
    assert "harbour/berths.py:42 runs n^2.0 times: 4,096 -&gt; 16,384" in text
    assert "if ship in taken &lt; 3:" in text


def test_nothing_is_said_to_be_less_than_nothing(page: str) -> None:
    assert re.findall(r">-0\.00\b", page) == []


def test_hundreds_of_budgets_stay_small() -> None:
    one = real_records()
    few, more = (len(render(one[:count])) for count in (4, 8))
    each = (more - few) / 4
    assert each < 30_000, "three hundred budgets are a page of some megabytes"


# ------------------------------------------------------------------ colours


def test_contrast_in_both_themes_and_on_paper() -> None:
    """WCAG 2.2, success criteria 1.4.3 (text: 4.5 to 1) and 1.4.11 (graphics: 3 to 1)."""
    sheet = resources.files("pytest_growthbudget.reporting").joinpath("page.css").read_text(encoding="utf-8")
    themes = [
        dict(re.findall(r"(--\w+): (#[0-9a-f]+);", block)) for block in re.findall(r":root \{(.*?)\}", sheet, re.S)
    ]
    assert len(themes) == 3
    for theme in themes:
        for ground in ("--paper", "--raised"):
            for text in ("--ink", "--quiet", "--link", "--within", "--exceeded", "--undecided", "--unmeasured"):
                assert contrast(theme[text], theme[ground]) >= 4.5, (text, ground)
        for line in ("--reading", "--fit", "--budget", "--quiet"):
            assert contrast(theme[line], theme["--paper"]) >= 3, line


def contrast(one: str, other: str) -> float:
    """The contrast ratio of WCAG 2.2 (relative luminance of sRGB)."""
    light, dark = sorted((luminance(one), luminance(other)), reverse=True)
    return (light + 0.05) / (dark + 0.05)


def luminance(colour: str) -> float:
    digits = colour[1:] if len(colour) == 7 else "".join(2 * digit for digit in colour[1:])
    shares = [int(digits[place : place + 2], 16) / 255 for place in (0, 2, 4)]
    linear = [share / 12.92 if share <= 0.04045 else ((share + 0.055) / 1.055) ** 2.4 for share in shares]
    return 0.2126 * linear[0] + 0.7152 * linear[1] + 0.0722 * linear[2]


def test_the_contrast_of_black_on_white_is_21() -> None:
    assert contrast("#000000", "#fff") == pytest.approx(21)


# ------------------------------------------------------------------ curves and plots


@pytest.mark.parametrize("exponent", [0.5, 1.0, 2.0])
def test_the_fit_goes_through_costs_of_a_plain_power(exponent: float) -> None:
    drawn = curves(judgement(exponent, noise=0.0))
    assert drawn is not None
    read = [point for point in drawn.fit if point[0] <= drawn.read]
    for (size, fitted), (same, cost) in zip(read, drawn.readings, strict=True):
        assert size == same
        assert fitted == pytest.approx(cost, rel=0.03)
    assert len(drawn.fit) == len(drawn.readings) + 3
    for size, low, high in drawn.band:
        assert low <= dict(drawn.fit)[size] <= high


def test_the_fit_finds_the_constant_part() -> None:
    made = judgement(1.0, noise=0.0)
    for row in made["sizes"]:
        row["cost"] = 5000.0 + 3.0 * row["size"]
    made["excess"] = {"estimate": 0.0, "low": -0.02, "high": 0.02}
    drawn = curves(made)
    assert drawn is not None
    assert [cost for _, cost in drawn.fit[: len(SIZES)]] == pytest.approx([5000 + 3 * size for size in SIZES])


def test_exponential_budgets_have_a_linear_scale_of_sizes() -> None:
    (found,) = [each for each in real_records() if each["judgement"]["exponent"] is None]
    drawn = curves(found["judgement"])
    assert drawn is not None
    assert drawn.linear
    read = [point for point in drawn.fit if point[0] <= drawn.read]
    for (_, fitted), (_, cost) in zip(read, drawn.readings, strict=True):
        assert math.log(fitted / cost) == pytest.approx(0, abs=0.5)


def test_flat_budgets_are_drawn_about_the_largest_size() -> None:
    (found,) = [each for each in real_records() if each["judgement"]["theta"] == "log n"]
    drawn = curves(found["judgement"])
    assert drawn is not None
    near = [point for point in drawn.fit if point[0] <= drawn.read]
    assert 3 <= len(near) <= len(drawn.readings) // 4 + 1


def test_one_size_is_no_curve() -> None:
    made = judgement(1.0)
    made["sizes"] = made["sizes"][:1]
    assert curves(made) is None


def test_a_drawing_is_the_same_each_time_and_takes_the_colours_of_the_page() -> None:
    drawn = curves(judgement(1.2))
    assert drawn is not None
    first, second = (
        draw(drawn, unit="ns", variable="rows", key="b1", title="A < B", description="d") for _ in range(2)
    )
    assert first == second
    assert "problem size rows" in first
    assert '<title id="b1-title">A &lt; B</title>' in first
    assert re.findall(r"#[0-9a-f]{6}\b", first) == []
    assert "<style" not in first, "it would hold for the whole page"
    assert {"var(--reading)", "var(--fit)", "var(--band)", "var(--budget)"} <= set(re.findall(r"var\(--\w+\)", first))


@pytest.mark.parametrize(("low", "high"), [(1, 2), (3, 700), (1e-9, 1e12), (90, 110), (1, 1e300)])
def test_ticks_are_few_and_round(low: float, high: float) -> None:
    ticks = _log_ticks(low, high)
    assert all(re.fullmatch(r"[125](\.0)?e[+-]\d+", f"{tick:.1e}") for tick in ticks)
    assert len(ticks) <= 10


# ------------------------------------------------------------------ the command


def test_page_command(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    path = write(tmp_path / "records.jsonl", real_records())
    assert main(["page", str(path), "--out", str(tmp_path / "page.html")]) == 0
    assert capsys.readouterr().out == f"{tmp_path / 'page.html'}: 8 budgets\n"
    Outline().feed((tmp_path / "page.html").read_text(encoding="utf-8"))
    assert main(["page", str(path), "--out", str(tmp_path / "none" / "page.html")]) == 2
    assert capsys.readouterr().err == f"{tmp_path / 'none' / 'page.html'}: no such file or directory\n"
    path.write_bytes(path.read_bytes() + b"{}\n")
    assert main(["page", str(path), "--out", str(tmp_path / "page.html")]) == 2
    assert capsys.readouterr().err == f"{path}:9: not a record: schema is missing\n"


# ------------------------------------------------------------------ in a browser


def browser() -> str:
    found = shoot_page.browser()
    if found is None:
        pytest.skip("needs Chromium, which is not installed here")
    return found


def test_in_a_browser_everything_works_and_nothing_overflows(tmp_path: Path) -> None:
    """Each width and theme: the page's own script sorts, filters and opens; what it finds it writes into the title."""
    path = tmp_path / "page.html"
    path.write_text(render(real_records()).replace("</body>", f"<script>{PROBE}</script></body>"), encoding="utf-8")
    for width in (390, 1280):
        for theme in ("light", "dark"):
            answer = json.loads(asked(browser(), path, width, theme))
            assert answer["errors"] == []
            assert answer["overflow"] <= 0, f"{width} px, {theme}"
            assert answer["dark"] is (theme == "dark")
            assert answer["sorted"] == ["ascending", "descending"]
            assert answer["ascending"] == sorted(answer["ascending"])
            assert answer["descending"] == answer["ascending"][::-1]
            assert answer["shown"] == 2
            assert answer["said"] == "2 of 8 budgets shown."
            assert answer["opened"] is True
            assert answer["hidden plots"] == 0


PROBE = r"""
(() => {
  const found = { errors: [] };
  addEventListener("error", (event) => found.errors.push(String(event.message)));
  found.overflow = document.documentElement.scrollWidth - innerWidth;
  found.dark = matchMedia("(prefers-color-scheme: dark)").matches;
  const heading = [...document.querySelectorAll("#budgets thead th")].find((th) => /Excess/.test(th.textContent));
  const rows = () => [...document.querySelectorAll("#budgets tbody tr")];
  const values = () => rows().map((tr) => Number(tr.cells[5].dataset.sort));
  heading.querySelector("button").click();
  found.sorted = [heading.getAttribute("aria-sort")];
  found.ascending = values();
  heading.querySelector("button").click();
  found.sorted.push(heading.getAttribute("aria-sort"));
  found.descending = values();
  const verdict = document.getElementById("verdict");
  verdict.value = "exceeded";
  verdict.dispatchEvent(new Event("change"));
  found.shown = rows().filter((tr) => !tr.hidden).length;
  found.said = document.getElementById("said").textContent;
  const details = document.querySelector("details.budget");
  details.open = false;
  location.hash = details.querySelector("h3").id;
  verdict.value = "";
  verdict.dispatchEvent(new Event("change"));
  document.getElementById("open-all").click();
  found.opened = [...document.querySelectorAll("details.budget")].every((each) => each.open);
  found["hidden plots"] = [...document.querySelectorAll("figure svg")]
    .filter((svg) => svg.getBoundingClientRect().height < 100).length;
  document.documentElement.dataset.found = JSON.stringify(found);
})();
"""


def asked(program: str, page: Path, width: int, theme: str) -> str:
    """What the probe found, from the document as the browser leaves it. Headless windows are 500 px or wider, so
    narrow ones are a frame in a wider page."""
    frame = page.with_name(f"frame-{width}-{theme}.html")
    frame.write_text(
        f'<!DOCTYPE html><meta name="color-scheme" content="{theme}"><style>iframe {{ border: 0; '
        f"color-scheme: {theme} }}</style>"
        f'<iframe id="f" src="{page.name}" width="{width}" height="900"></iframe>'
        '<script>addEventListener("load", () => { document.documentElement.dataset.found = '
        'document.getElementById("f").contentDocument.documentElement.dataset.found; });</script>'
    )
    command = [program, *shoot_page.FLAGS, "--dump-dom", "--virtual-time-budget=5000", "--allow-file-access-from-files"]
    command += [f"--user-data-dir={page.parent / 'profile'}", "--window-size=1400,1000", frame.as_uri()]
    run = subprocess.run(command, capture_output=True, text=True, timeout=120, check=False)
    found = re.search(r'data-found="([^"]*)"', run.stdout)
    if found is None:
        raise AssertionError(f"the page's script did not run: {run.stdout[:500]} {run.stderr[-500:]}")
    return found[1].replace("&quot;", '"').replace("&amp;", "&")


def test_screenshots_without_a_word_on_the_console(tmp_path: Path) -> None:
    browser()
    if shutil.which("node") is None or not _has_driver():
        pytest.skip("needs node with playwright-core, which are not installed here")
    path = tmp_path / "page.html"
    path.write_text(render(real_records()), encoding="utf-8")
    assert shoot_page.shoot(path, tmp_path / "shots") == []
    assert len(list((tmp_path / "shots").glob("*.png"))) == 8


def _has_driver() -> bool:
    tried: Any = subprocess.run(["node", "-e", "require('playwright-core')"], capture_output=True, check=False)
    return bool(tried.returncode == 0)


def test_the_environment_of_the_tests_is_left_alone() -> None:
    """Drawing must not choose a back end or read settings of the user's for the tests that run in this process."""
    script = "import sys; from pytest_growthbudget.reporting import page; print('matplotlib.pyplot' in sys.modules)"
    run = subprocess.run(
        [sys.executable, "-c", script], capture_output=True, text=True, check=True, env=dict(os.environ)
    )
    assert run.stdout.strip() == "False"
