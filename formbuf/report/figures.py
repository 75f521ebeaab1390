"""The figures of the rationale, from plain lists of numbers."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING

from formbuf.report.drawing import (
    BAND,
    INK,
    PALE,
    Makers,
    label,
    legend_below,
    look,
    makers,
    quiet,
)

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure as Canvas

WIDTH_IN = 6.3
#: Distance from the window within which a curve sets the height of the figure, pH.
NEAR_PH = 0.3


@dataclass(frozen=True, slots=True)
class Series:
    """One line: its name, where it lies, and whether it is the product without buffer."""

    name: str
    x: Sequence[float]
    y: Sequence[float]
    is_background: bool = False


@dataclass(frozen=True, slots=True)
class Window:
    """pH window and target."""

    low: float
    high: float
    target: float


@dataclass(frozen=True, slots=True)
class Panel:
    """Freezing paths of one candidate.

    ``paths`` holds the assumption with temperatures and pH; None breaks the line.
    """

    name: str
    paths: Sequence[tuple[str, Sequence[float], Sequence[float | None]]]
    prepared_ph: float


@dataclass(frozen=True, slots=True)
class Interval:
    """Ends of central intervals: low 95, low 50, median, high 50, high 95 %."""

    name: str
    ends: tuple[float, ...]


def capacity_figure(
    series: Sequence[Series], window: Window, temperature: str
) -> Makers:
    """Return capacity against pH with the window and the target."""

    def draw(canvas: Canvas) -> None:
        axes = canvas.subplots()
        quiet(axes)
        axes.axvspan(window.low, window.high, color=BAND, label="pH window", zorder=0)
        axes.axvline(window.target, color=INK, linewidth=0.9, label="target")
        for position, one in enumerate(series):
            _line(axes, one, position, every=10)
        axes.set_xlabel(f"pH at {temperature}")
        axes.set_ylabel("capacity of the product, mmol/L per pH")
        axes.set_xlim(min(series[0].x), max(series[0].x))
        axes.set_ylim(0.0, _top(series, window))
        legend_below(axes)

    return makers("fig-capacity", WIDTH_IN, 4.2, draw)


def _top(series: Sequence[Series], window: Window) -> float:
    """Return the top of the axis: what matters near the window, with some air."""
    near = [
        y
        for one in series
        for x, y in zip(one.x, one.y, strict=True)
        if window.low - NEAR_PH <= x <= window.high + NEAR_PH
    ]
    return 1.15 * max(near, default=1.0)


def temperature_figure(
    series: Sequence[Series],
    window: Window,
    measured_at: float,
    storage: Sequence[float],
) -> Makers:
    """Return pH against temperature; storage temperatures are marked."""

    def draw(canvas: Canvas) -> None:
        axes = canvas.subplots()
        quiet(axes)
        axes.axhspan(
            window.low,
            window.high,
            color=BAND,
            label="pH window (at measurement)",
            zorder=0,
        )
        axes.axvline(
            measured_at, color=INK, linewidth=0.9, label="temperature of measurement"
        )
        for place, at in enumerate(storage):
            axes.axvline(
                at,
                color=PALE,
                linewidth=0.9,
                linestyle=(0, (4, 3)),
                label="liquid storage" if place == 0 else None,
            )
        for position, one in enumerate(series):
            _line(axes, one, position, every=max(len(one.x) // 6, 1))
        axes.set_xlabel("temperature, °C")
        axes.set_ylabel("pH")
        axes.set_xlim(min(series[0].x), max(series[0].x))
        legend_below(axes)

    return makers("fig-temperature", WIDTH_IN, 4.2, draw)


def criteria_figure(
    criteria: Sequence[str], rows: Sequence[tuple[str, Sequence[float | None]]]
) -> Makers:
    """Return the desirabilities of the finalists, one row for each criterion."""

    def draw(canvas: Canvas) -> None:
        axes = canvas.subplots()
        quiet(axes)
        count = len(rows)
        step = 0.62 / max(count, 1)
        for place in range(len(criteria)):
            if place % 2 == 0:
                axes.axhspan(place - 0.5, place + 0.5, color="#f5f3ec", zorder=0)
        for position, (name, values) in enumerate(rows):
            shift = (position - (count - 1) / 2.0) * step
            points = [(v, i + shift) for i, v in enumerate(values) if v is not None]
            style = look(position)
            axes.plot(
                [x for x, _ in points],
                [y for _, y in points],
                linestyle="none",
                marker=style["marker"],
                color=style["color"],
                markersize=6.0,
                label=label(name),
            )
        axes.set_yticks(range(len(criteria)), labels=list(criteria))
        axes.set_ylim(len(criteria) - 0.5, -0.5)
        axes.set_xlim(0.0, 1.04)
        axes.set_xlabel("desirability")
        legend_below(axes)

    return makers("fig-criteria", WIDTH_IN, 1.6 + 0.42 * len(criteria), draw)


def freezing_figure(panels: Sequence[Panel]) -> Makers:
    """Return the bounding paths on freezing, one panel for each candidate."""
    columns = 1 if len(panels) == 1 else 2
    lines = (len(panels) + columns - 1) // columns

    def draw(canvas: Canvas) -> None:
        grid = canvas.subplots(lines, columns, sharex=True, sharey=True, squeeze=False)
        every = [grid[i // columns][i % columns] for i in range(lines * columns)]
        for axes, panel in zip(every, panels, strict=False):
            _paths(axes, panel)
        for axes in every[len(panels) :]:
            axes.set_visible(False)
        for axes in (grid[lines - 1][i] for i in range(columns)):
            axes.set_xlabel("temperature, °C")
        for i in range(lines):
            grid[i][0].set_ylabel("pH of the liquid")
        every[0].invert_xaxis()
        handles, names = every[0].get_legend_handles_labels()
        known = dict(zip(names, handles, strict=True))
        for axes in every[1 : len(panels)]:
            for handle, name in zip(*axes.get_legend_handles_labels(), strict=True):
                known.setdefault(name, handle)
        canvas.legend(
            list(known.values()),
            list(known),
            loc="outside lower center",
            ncols=2,
            handlelength=3.2,
        )

    return makers("fig-freezing", WIDTH_IN, 0.6 + 2.4 * lines, draw)


def interval_figure(
    panels: Sequence[tuple[str, Sequence[Interval]]], low: float, high: float
) -> Makers:
    """Return central intervals of pH, one panel for each temperature."""
    most = max(len(rows) for _, rows in panels)

    def draw(canvas: Canvas) -> None:
        grid = canvas.subplots(1, len(panels), sharex=True, squeeze=False)[0]
        for axes, (title, rows) in zip(grid, panels, strict=True):
            quiet(axes)
            axes.axvspan(low, high, color=BAND, zorder=0)
            axes.set_title(title, fontsize=9.0, loc="left")
            for place, one in enumerate(rows):
                style = look(place)
                outer, inner = one.ends[0::4], one.ends[1:4:2]
                axes.plot(outer, [place] * 2, color=style["color"], linewidth=1.2)
                axes.plot(inner, [place] * 2, color=style["color"], linewidth=4.0)
                axes.plot([one.ends[2]], [place], "o", color="white", markersize=3.0)
            axes.set_xlabel("pH")
            axes.set_ylim(most - 0.5, -0.5)
            axes.set_yticks([])
        names = [label(one.name) for one in panels[0][1]]
        grid[0].set_yticks(range(len(names)), labels=names)

    return makers("fig-confidence", WIDTH_IN, 1.2 + 0.32 * most, draw)


def _paths(axes: Axes, panel: Panel) -> None:
    quiet(axes)
    axes.set_title(label(panel.name), fontsize=9.0, loc="left")
    axes.axhline(panel.prepared_ph, color=PALE, linewidth=0.9, label="pH as prepared")
    looks = {"crystallising": 1, "supersaturated": 0}
    for assumption, at, ph in sorted(
        panel.paths, key=lambda path: path[0], reverse=True
    ):
        style = look(looks.get(assumption, 2))
        axes.plot(
            list(at),
            [float("nan") if y is None else y for y in ph],
            label=f"{assumption} path",
            **style,
        )


def _line(axes: Axes, one: Series, position: int, *, every: int) -> None:
    style = look(position)
    if one.is_background:
        style = {"color": PALE, "linestyle": (0, (1, 2)), "linewidth": 1.4}
    else:
        style["markevery"] = (position * 2 % max(every, 1), every)
    axes.plot(list(one.x), list(one.y), label=label(one.name), **style)
