"""The plot of one judged budget as an inline SVG element, drawn by matplotlib, coloured by the page's style sheet."""

from __future__ import annotations

import html
import io
import math
import re
from functools import cache
from typing import Any

from matplotlib import rc_context
from matplotlib.axes import Axes
from matplotlib.backends.backend_svg import FigureCanvasSVG
from matplotlib.figure import Figure
from matplotlib.ticker import FuncFormatter, MaxNLocator, NullLocator

from pytest_growthbudget.reporting import units
from pytest_growthbudget.reporting.curves import Curves

#: matplotlib wants colours, the page has custom properties: each stands in for one of them.
_PAINT = {
    "--reading": "#010101",
    "--fit": "#010102",
    "--band": "#010103",
    "--budget": "#010104",
    "--line": "#010105",
    "--ink": "#010106",
    "--quiet": "#010107",
}
_SIZE = (4.5, 3.2)
_STYLE: Any = {"svg.fonttype": "none", "svg.hashsalt": "growth", "path.simplify": False, "font.size": 10}
_MARGIN = 0.12


def draw(curves: Curves, *, unit: str, variable: str, key: str, title: str, description: str) -> str:
    """The SVG element. `key` makes the ids in it the only ones of the page."""
    with rc_context(_STYLE):
        figure = Figure(figsize=_SIZE)
        axes = figure.add_axes((0.175, 0.16, 0.8, 0.81))
        _lay_out(axes, curves, unit)
        axes.set_xlabel(f"problem size {variable}", color=_PAINT["--ink"])
        _draw_curves(axes, curves)
        written = io.StringIO()
        canvas: Any = FigureCanvasSVG(figure)
        canvas.print_svg(written, metadata={"Date": None, "Creator": None})
    return _inlined(written.getvalue(), key, title, description)


def _lay_out(axes: Axes, curves: Curves, unit: str) -> None:
    axes.set_yscale("log")
    if not curves.linear:
        axes.set_xscale("log")
    sizes = [size for size, *_ in (*curves.readings, *curves.fit)]
    costs = [cost for _, *each in (*curves.readings, *curves.fit, *curves.band, *curves.budget) for cost in each]
    axes.set_xlim(*_widened(min(sizes), max(sizes), linear=curves.linear))
    axes.set_ylim(*_widened(min(costs), max(costs), linear=False))
    _tick(axes.xaxis, *axes.get_xlim(), units.count, linear=curves.linear)
    _tick(axes.yaxis, *axes.get_ylim(), lambda value: units.cost(value, unit), linear=False)
    axes.patch.set_visible(False)
    axes.figure.patch.set_visible(False)
    for name, spine in axes.spines.items():
        spine.set_visible(name in ("left", "bottom"))
        spine.set_color(_PAINT["--quiet"])
    axes.tick_params(colors=_PAINT["--ink"], length=3, color=_PAINT["--quiet"])
    axes.grid(visible=True, color=_PAINT["--line"], linewidth=0.6)
    axes.set_axisbelow(True)


def _widened(low: float, high: float, *, linear: bool) -> tuple[float, float]:
    if linear:
        return low - 1, high + 1
    spread = max(math.log(high / low), 0.5)
    return math.exp(math.log(low) - _MARGIN * spread / 2), math.exp(math.log(high) + _MARGIN * spread / 2)


def _tick(axis: Any, low: float, high: float, shown: Any, *, linear: bool) -> None:
    axis.set_minor_locator(NullLocator())
    axis.set_major_formatter(FuncFormatter(lambda value, _: shown(value).replace(".0 ", " ")))
    if linear:
        axis.set_major_locator(MaxNLocator(6, integer=True))
        return
    axis.set_ticks([tick for tick in _log_ticks(low, high) if low <= tick <= high])


def _log_ticks(low: float, high: float) -> list[float]:
    """At most seven round numbers between two positive ones: decades, or 1, 2 and 5 where there are few decades."""
    first, last = math.floor(math.log10(low)), math.ceil(math.log10(high))
    decades = last - first
    if decades <= 2:
        return [step * 10.0**power for power in range(first, last + 1) for step in (1, 2, 5)]
    step = math.ceil((decades + 1) / 7)
    return [10.0**power for power in range(first, last + 1, step)]


def _draw_curves(axes: Axes, curves: Curves) -> None:
    if curves.band:
        sizes, low, high = zip(*curves.band, strict=True)
        axes.fill_between(sizes, low, high, color=_PAINT["--band"], linewidth=0)
    if curves.bends_at is not None:
        axes.axvline(curves.bends_at, color=_PAINT["--quiet"], linewidth=1, linestyle=(0, (1, 2)))
    if curves.budget:
        axes.plot(*zip(*curves.budget, strict=True), color=_PAINT["--budget"], linewidth=1.8, linestyle=(0, (5, 2)))
    read = [point for point in curves.fit if point[0] <= curves.read]
    beyond = [point for point in curves.fit if point[0] >= curves.read]
    if read:
        axes.plot(*zip(*read, strict=True), color=_PAINT["--fit"], linewidth=1.8)
    if len(beyond) > 1:
        axes.plot(*zip(*beyond, strict=True), color=_PAINT["--fit"], linewidth=1.2, linestyle=(0, (2, 2)))
        axes.plot(
            *zip(*beyond[1:], strict=True),
            color=_PAINT["--fit"],
            marker="o",
            markersize=4.5,
            markerfacecolor="none",
            linestyle="none",
        )
    axes.plot(
        *zip(*curves.readings, strict=True),
        color=_PAINT["--reading"],
        marker="o",
        markersize=4.5,
        linestyle="none",
    )


# ------------------------------------------------------------------ from a file to an element


@cache
def _patterns() -> tuple[tuple[re.Pattern[str], str], ...]:
    return (
        (re.compile(r"<metadata>.*?</metadata>\s*", re.S), ""),
        (re.compile(r"<!--.*?-->\s*", re.S), ""),
        # The page sets the fonts; a style sheet inside the drawing would hold for the whole page.
        (re.compile(r"<defs>\s*<style.*?</style>\s*</defs>\s*", re.S), ""),
        (re.compile(r"(font-size|font-family|stroke-linecap): [^;\"]*; "), ""),
        (re.compile(r"; stroke-linecap: \w+"), ""),
        (re.compile(r' transform="rotate\(-0 [^"]*\)"'), ""),
        (re.compile(r"(\d+\.\d\d)\d+"), r"\1"),
        (re.compile(r"\n\s*"), "\n"),
    )


def _inlined(svg: str, key: str, title: str, description: str) -> str:
    svg = svg[svg.index("<svg") :]
    for pattern, new in _patterns():
        svg = pattern.sub(new, svg)
    for name, colour in _PAINT.items():
        svg = svg.replace(colour, f"var({name})")
    # Groups that nothing refers to need no id; the rest must not meet those of another plot.
    referred = set(re.findall(r"#([\w-]+)", svg))
    svg = re.sub(r' id="([\w.-]+)"', lambda found: f' id="{key}-{found[1]}"' if found[1] in referred else "", svg)
    svg = re.sub(r"(url\(#|href=\"#)", rf"\g<1>{key}-", svg)
    box = re.search(r'viewBox="[^"]*"', svg)
    assert box is not None
    opening = f'<svg {box[0]} role="img" aria-labelledby="{key}-title {key}-desc" xmlns="http://www.w3.org/2000/svg">'
    about = (
        f'<title id="{key}-title">{html.escape(title)}</title><desc id="{key}-desc">{html.escape(description)}</desc>'
    )
    inner = svg[svg.index(">") + 1 :].replace("xlink:href", "href")
    return f"{opening}{about}{inner}".strip()
