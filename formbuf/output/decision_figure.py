"""Draw the map of the decision: desirability over the target pH, lead and back-up.

One line per system that leads or backs up anywhere, told apart by colour, style and a
name at its best point; a strip below names who leads. The same map gives the same
bytes.
"""

from __future__ import annotations

import io
from itertools import groupby
from pathlib import Path
from typing import TYPE_CHECKING, Any

from formbuf.advice.decision_map import DecisionMap
from formbuf.errors import OutputError
from formbuf.output.writers import write_bytes

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure

#: Okabe & Ito, in an order that also falls apart in lightness, with line styles.
_STYLES: tuple[tuple[str, Any], ...] = (
    ("#004D7A", "-"),
    ("#D55E00", (0, (5, 2))),
    ("#009E73", (0, (1, 1.4))),
    ("#CC79A7", (0, (6, 2, 1, 2))),
    ("#E69F00", (0, (3, 1))),
    ("#56B4E9", (0, (8, 3))),
    ("#000000", (0, (2, 2))),
)
_FAINT, _INK = "#B5B5B5", "#222222"
_DOTS_PER_INCH = 150


def write_figure(chart: DecisionMap, path: Path) -> None:
    """Draw a map into a file; its ending, .svg or .png, decides the format.

    Raises
    ------
    OutputError
        Matplotlib is not installed, or the file cannot be written.
    """
    write_bytes(path, figure_bytes(chart, path.suffix.lower().removeprefix(".")))


def figure_bytes(chart: DecisionMap, kind: str) -> bytes:
    """Return the figure as the bytes of a file of one kind, ``svg`` or ``png``."""
    try:
        import matplotlib as mpl
    except ImportError as error:
        msg = "--figure needs matplotlib, which is not installed"
        raise OutputError(
            msg, hint="Install formbuf with its extra: report."
        ) from error
    settings: Any = {
        "svg.hashsalt": "formbuf",
        "svg.fonttype": "none",
        "font.family": "sans-serif",
        "font.sans-serif": ["DejaVu Sans"],
        "font.size": 9,
    }
    title = _title(chart)
    nobody: dict[str, Any] = (
        {"Date": None, "Creator": None, "Title": title}
        if kind == "svg"
        else {"Software": None, "Title": title}
    )
    stream = io.BytesIO()
    with mpl.rc_context(settings):
        draw(chart).savefig(stream, format=kind, dpi=_DOTS_PER_INCH, metadata=nobody)
    return stream.getvalue()


def draw(chart: DecisionMap) -> Figure:
    """Return the figure."""
    from matplotlib.figure import Figure as NewFigure

    figure = NewFigure(figsize=(7.2, 4.8), layout="constrained")
    axes, strip = figure.subplots(
        2, 1, sharex=True, gridspec_kw={"height_ratios": (8, 1)}
    )
    _lines(axes, chart)
    _strip(strip, chart)
    axes.set_ylabel("Desirability")
    axes.set_ylim(0.0, 1.0)
    strip.set_xlabel("Target pH")
    figure.suptitle(_title(chart), fontsize=10)
    return figure


def _title(chart: DecisionMap) -> str:
    return f"{chart.title}: desirability over the target pH".lstrip(": ")


def contenders(chart: DecisionMap) -> dict[str, str]:
    """Return name by key of every system that leads or backs up anywhere."""
    found: dict[str, str] = {}
    for point in chart.points:
        for place in point.places[:2]:
            found.setdefault(place.system, place.name)
    return found


def _lines(axes: Axes, chart: DecisionMap) -> None:
    shown = contenders(chart)
    everyone = {p.system for point in chart.points for p in point.places}
    for key in sorted(everyone - set(shown)):
        at, values = _curve(chart, key)
        axes.plot(at, values, color=_FAINT, linewidth=0.8, zorder=2)
    for (key, name), style in zip(shown.items(), _cycled(len(shown)), strict=True):
        at, values = _curve(chart, key)
        colour, dashes = style
        axes.plot(
            at,
            values,
            color=colour,
            linestyle=dashes,
            linewidth=1.8,
            label=name,
            zorder=4,
        )
    axes.axvline(chart.target_ph, color=_INK, linewidth=0.8, linestyle=(0, (1, 2)))
    axes.grid(visible=True, color="#E4E4E4", linewidth=0.6)
    axes.spines[["top", "right"]].set_visible(False)
    axes.set_axisbelow(True)
    if shown:
        axes.figure.legend(
            loc="outside lower center", ncols=3, frameon=False, fontsize=8
        )


def _cycled(count: int) -> list[tuple[str, Any]]:
    return [_STYLES[k % len(_STYLES)] for k in range(count)]


def _curve(chart: DecisionMap, key: str) -> tuple[list[float], list[float]]:
    """Return target pH and desirability of a system; gaps where it has no place."""
    at, values = [], []
    for point in chart.points:
        place = next((p for p in point.places if p.system == key), None)
        at.append(point.target_ph)
        values.append(place.desirability if place else float("nan"))
    return at, values


def _strip(axes: Axes, chart: DecisionMap) -> None:
    """Say along the axis who leads."""
    shown = list(contenders(chart))
    step = 0.05
    if len(chart.points) > 1:
        step = 0.5 * (chart.points[1].target_ph - chart.points[0].target_ph)
    runs = groupby(chart.points, key=lambda p: p.lead.system if p.lead else "")
    for key, points in runs:
        run = list(points)
        left, right = run[0].target_ph - step, run[-1].target_ph + step
        lead = run[0].lead
        colour = _STYLES[shown.index(key) % len(_STYLES)][0] if key else "#FFFFFF"
        axes.axvspan(left, right, color=colour, alpha=0.25, linewidth=0)
        axes.axvline(right, color="white", linewidth=1.0)
        text = lead.name.replace(" ", "\n", 1) if lead else "none"
        axes.text(
            0.5 * (left + right),
            0.5,
            text,
            ha="center",
            va="center",
            fontsize=7.5,
            clip_on=True,
        )
    axes.set_yticks([])
    axes.set_ylim(0.0, 1.0)
    axes.spines[["top", "right", "left"]].set_visible(False)
    axes.set_ylabel("Lead", rotation=0, ha="right", va="center")
