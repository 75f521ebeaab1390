"""Draw pH against temperature on freezing: two bounds, events, observations.

Freezing runs from left to right, thawing back. Lines differ in style and lightness,
symbols in shape, so that the figure holds in greyscale and for colour-blind readers.
One panel for a composition, small multiples for several systems. The same result
gives the same bytes.
"""

from __future__ import annotations

import io
import math
import re
import textwrap
from collections.abc import Sequence
from dataclasses import dataclass
from pathlib import Path
from typing import TYPE_CHECKING, Any

from formbuf.advice.freeze_thaw_results import FreezeThaw, FreezeThawSystem
from formbuf.chemistry.freezing_records import FreezingEvent, FreezingPath
from formbuf.constants import EXTRAPOLATION_LIMIT_C
from formbuf.errors import OutputError
from formbuf.output.figures import ABSENT
from formbuf.output.freeze_thaw_observed import amount, interval
from formbuf.output.freeze_thaw_words import class_words, event_words, made, title_of
from formbuf.output.writers import write_bytes
from formbuf.product.freezing_data import Observation

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure

#: Blue and vermilion of Okabe & Ito, told apart by lightness too; a pale band.
_DARK, _BRIGHT, _BAND, _INK, _FAINT = (
    "#004D7A",
    "#D55E00",
    "#CFDDE6",
    "#222222",
    "#888888",
)
#: Events that are drawn, by symbol; the others stand in the table.
_SYMBOLS = {
    "first ice": "v",
    "onset": "s",
    "no liquid": "X",
    "supersaturated": "D",
    "outside model": "P",
}
#: Fine steps near the first ice, wider ones below, K.
_NEAR_STEP_K, _FAR_STEP_K, _NEAR_C = 0.1, 0.3, -2.0
_DOTS_PER_INCH = 150
_COLUMNS = 3
_AXIS_OF_ONE = "Temperature, °C   (freezing to the right, thawing to the left)"
_SUBSCRIPTS = str.maketrans("0123456789", "₀₁₂₃₄₅₆₇₈₉")
#: Least distance between two labels, as a share of the height of the axes.
_LABEL_GAP = 0.055


@dataclass(frozen=True, slots=True)
class _Seen:
    """Observations drawn at one place, with what tells them apart."""

    temperature_c: float
    spread_c: tuple[float, float]
    ph: float
    error: float
    published: bool
    alike: bool
    label: str


def write_figure(result: FreezeThaw, path: Path) -> None:
    """Draw a result into a file; its ending, .svg or .png, decides the format.

    Raises
    ------
    OutputError
        Matplotlib is not installed, or the file cannot be written.
    """
    write_bytes(path, figure_bytes(result, path.suffix.lower().removeprefix(".")))


def figure_bytes(result: FreezeThaw, kind: str) -> bytes:
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
    nobody: dict[str, Any] = (
        {"Date": None, "Creator": None, "Title": title_of(result)}
        if kind == "svg"
        else {"Software": None, "Title": title_of(result)}
    )
    stream = io.BytesIO()
    with mpl.rc_context(settings):
        figure = draw(result)
        figure.savefig(stream, format=kind, dpi=_DOTS_PER_INCH, metadata=nobody)
    return stream.getvalue()


def draw(result: FreezeThaw) -> Figure:
    """Return the figure, one panel per system."""
    from matplotlib.figure import Figure as NewFigure

    count = len(result.systems)
    columns = min(count, _COLUMNS)
    rows = math.ceil(count / columns)
    size = (7.2, 5.2) if count == 1 else (3.0 * columns + 0.6, 2.5 * rows + 1.4)
    figure = NewFigure(figsize=size, layout="constrained")
    axes = figure.subplots(rows, columns, sharex=True, sharey=True, squeeze=False)
    panels = [panel for row in axes for panel in row]
    end = max(result.lowest_c, EXTRAPOLATION_LIMIT_C)
    room = 0.36 * abs(end) if count == 1 else 0.06 * abs(end)
    handles: dict[str, Any] = {}
    for panel, s in zip(panels, result.systems, strict=False):
        handles |= _panel(result, s, panel, end, single=count == 1)
        panel.set_xlim(0.03 * abs(end), end - room)
        panel.set_xticks([t for t in panel.get_xticks() if end <= t <= 0.0])
        head = (
            f"class: {class_words(s.frozen)}"
            if count == 1
            else f"{made(s)}: {class_words(s.frozen)}"
        )
        panel.set_title(_folded(head, 60 if count == 1 else 34), fontsize=9)
    for panel in panels[count:]:
        panel.set_visible(False)
    for panel in panels[max(count - columns, 0) : count]:
        panel.tick_params(labelbottom=True)
        panel.set_xlabel(_AXIS_OF_ONE if count == 1 else "Temperature, °C")
    if count == 1:
        _label_observations(result.systems[0], panels[0], end)
    figure.suptitle(_folded(title_of(result), 84 if columns > 1 else 76), fontsize=10)
    figure.supylabel("pH of the liquid", fontsize=9)
    figure.legend(
        list(handles.values()),
        [_folded(text, 40) for text in handles],
        loc="outside lower center",
        ncols=min(columns + 1, 3),
        frameon=False,
        fontsize=8,
    )
    return figure


def _folded(text: str, width: int) -> str:
    return "\n".join(textwrap.wrap(text, width))


def fine_temperatures(end_c: float, widen: float = 1.0) -> tuple[float, ...]:
    """Return the temperatures of a drawn path, falling from 0 C to its end.

    ``widen`` stretches the steps, for small panels.
    """
    found = []
    at = 0.0
    while at > end_c + 1e-9:
        found.append(round(at, 6))
        at -= widen * (_NEAR_STEP_K if at > _NEAR_C + 1e-9 else _FAR_STEP_K)
    return (*found, end_c)


def _panel(
    result: FreezeThaw, s: FreezeThawSystem, panel: Axes, end_c: float, *, single: bool
) -> dict[str, Any]:
    """Draw one system; return the handles of the legend by their text."""
    fine = fine_temperatures(end_c, 1.0 if single else 2.0)
    paths = s.trace(fine).assessment.paths
    handles: dict[str, Any] = {}
    at = result.brief.ph.measure_temperature_c
    line = panel.axhline(
        s.ph_before, color=_FAINT, linewidth=0.8, linestyle=(0, (1, 2))
    )
    handles[f"pH before, at {at:g} °C"] = line
    if len(paths) > 1:
        handles |= _band(panel, paths)
    for path in paths:
        handles |= _line(panel, path, single=single)
    for path in paths:
        handles |= _events(result, panel, path, single=single, alone=len(paths) == 1)
    for one in seen_of(s, end_c):
        handles |= _measured(panel, one)
    panel.grid(visible=True, color="#E4E4E4", linewidth=0.6)
    panel.spines[["top", "right"]].set_visible(False)
    panel.set_axisbelow(True)
    return handles


def _measured(panel: Axes, one: _Seen) -> dict[str, Any]:
    """Draw one observation: filled where published, grey under other conditions."""
    spread, ink = one.spread_c, _INK if one.alike else _FAINT
    drawn = panel.errorbar(
        [one.temperature_c],
        [one.ph],
        yerr=[[one.error], [one.error]] if one.error else None,
        xerr=[[one.temperature_c - spread[0]], [spread[1] - one.temperature_c]]
        if spread[0] != spread[1]
        else None,
        fmt="o" if one.alike else "^",
        color=ink,
        markerfacecolor=ink if one.published else "white",
        markersize=6.0 if one.alike else 5.0,
        capsize=3,
        elinewidth=1.1,
        zorder=7 if one.alike else 6,
    )
    basis = "published" if one.published else "memory"
    like = "" if one.alike else ", other conditions"
    return {f"measured, {basis}{like}": drawn}


def _curve(path: FreezingPath) -> tuple[list[float], list[float]]:
    """Return temperature and pH of a path, the events on it included."""
    found = {p.temperature_c: p.ph for p in path.points if p.ph is not None}
    for event in path.events:
        if event.ph is not None:
            found.setdefault(event.temperature_c, event.ph)
    ordered = sorted(found, reverse=True)
    return ordered, [found[t] for t in ordered]


def _line(panel: Axes, path: FreezingPath, *, single: bool) -> dict[str, Any]:
    at, ph = _curve(path)
    is_crystallising = path.assumption == "crystallising"
    (line,) = panel.plot(
        at,
        ph,
        color=_DARK if is_crystallising else _BRIGHT,
        linewidth=2.0 if is_crystallising else 1.6,
        linestyle="-" if is_crystallising else (0, (5, 2)),
        zorder=4,
    )
    error = f" (± {path.error_ph:g})" if path.error_ph and single else ""
    name = (
        f"bound: salts crystallise{error}"
        if is_crystallising
        else "bound: no salt crystallises"
    )
    handles: dict[str, Any] = {name: line}
    beyond = [p for p in path.metastable if p.ph is not None]
    if beyond:
        (line,) = panel.plot(
            [at[-1], *(p.temperature_c for p in beyond)],
            [ph[-1], *(p.ph for p in beyond if p.ph is not None)],
            color=_DARK,
            linewidth=1.2,
            linestyle=(0, (1, 1.5)),
            zorder=4,
        )
        handles["metastable: last salt held back"] = line
    return handles


def _band(panel: Axes, paths: Sequence[FreezingPath]) -> dict[str, Any]:
    import numpy as np

    (low_at, low), (high_at, high) = (_curve(path) for path in paths)
    end = max(low_at[-1], high_at[-1])
    at = np.array(sorted({t for t in (*low_at, *high_at) if t >= end}))
    one = np.interp(at, low_at[::-1], low[::-1])
    other = np.interp(at, high_at[::-1], high[::-1])
    band = panel.fill_between(at, one, other, color=_BAND, linewidth=0, zorder=1)
    return {"between the bounds": band}


def _events(
    result: FreezeThaw,
    panel: Axes,
    path: FreezingPath,
    *,
    single: bool,
    alone: bool,
) -> dict[str, Any]:
    """Mark events on a path; with one panel the legend gives their temperatures."""
    at, ph = _curve(path)
    handles: dict[str, Any] = {}
    for event in path.events:
        if event.event not in _SYMBOLS or (
            event.event == "supersaturated" and not alone
        ):
            continue
        if event.event == "onset" and _is_last(path, event):
            continue
        level = event.ph
        if level is None:
            near = min(range(len(at)), key=lambda i: abs(at[i] - event.temperature_c))
            level = ph[near]
        drawn = panel.plot(
            [event.temperature_c],
            [level],
            marker=_SYMBOLS[event.event],
            linestyle="none",
            color=_INK,
            markerfacecolor="white" if event.event != "no liquid" else _INK,
            markersize=6.5,
            zorder=5,
        )[0]
        handles[_event_label(result, event, single=single)] = drawn
    return handles


def _is_last(path: FreezingPath, event: FreezingEvent) -> bool:
    """Whether an onset takes the last liquid, so that another symbol stands there."""
    gone = path.event("no liquid")
    return gone is not None and gone.temperature_c == event.temperature_c


def _event_label(result: FreezeThaw, event: FreezingEvent, *, single: bool) -> str:
    if single:
        text = typeset(event_words(result, event))
        return f"{text}, {event.temperature_c:.1f} °C".replace("-", "−")
    return {
        "onset": "a salt begins to crystallise",
        "supersaturated": "a solid is supersaturated",
    }.get(event.event, event_words(result, event))


def typeset(text: str) -> str:
    """Return a text with the formulas in it as in print.

    Examples
    --------
    >>> typeset("Na2HPO4.12H2O crystallises")
    'Na₂HPO₄·12H₂O crystallises'
    """
    text = re.sub(r"(?<=[A-Za-z0-9])\.(?=\d*[A-Z])", "·", text)
    return re.sub(
        r"(?<=[A-Za-z)])\d+", lambda found: found[0].translate(_SUBSCRIPTS), text
    )


def seen_of(s: FreezeThawSystem, end_c: float) -> list[_Seen]:
    """Return the observations that have a place in the figure; equal ones as one."""
    groups: dict[tuple[Any, ...], list[Observation]] = {}
    for ranked in s.observations:
        one = ranked.observation
        numbers = one.numbers
        at = numbers.get("temperature_frozen_c")
        low = numbers.get("temperature_frozen_low_c", at)
        high = numbers.get("temperature_frozen_high_c", at)
        if "ph_frozen" not in numbers or low is None or high is None:
            continue
        middle = 0.5 * (low + high) if at is None else at
        if not end_c * 1.05 <= middle <= 0.0:
            continue
        key = (
            middle,
            max(low, end_c * 1.05),
            high,
            numbers["ph_frozen"],
            numbers.get("ph_frozen_error", 0.0),
            one.basis == "published",
            ranked.alike,
        )
        groups.setdefault(key, []).append(one)
    return [
        _Seen(at, (low, high), ph, error, is_published, is_alike, _seen_label(group))
        for (at, low, high, ph, error, is_published, is_alike), group in groups.items()
    ]


def _seen_label(group: Sequence[Observation]) -> str:
    amounts = [amount(one) for one in group if amount(one) not in (ABSENT, "any")]
    before = {interval(one, "ph_initial") for one in group} - {ABSENT}
    text = f"{', '.join(dict.fromkeys(amounts))} mmol/L" if amounts else "any mmol/L"
    return f"{text}, pH {' and '.join(sorted(before))}" if before else text


def _label_observations(s: FreezeThawSystem, panel: Axes, end_c: float) -> None:
    """Name each observation in the margin beside the coldest temperature."""
    low, high = panel.get_ylim()
    gap = _LABEL_GAP * (high - low)
    level = -math.inf
    for one in sorted(seen_of(s, end_c), key=lambda one: one.ph):
        level = max(one.ph, level + gap)
        panel.annotate(
            one.label,
            xy=(one.temperature_c, one.ph),
            xytext=(end_c * 1.07, level),
            fontsize=7.5,
            va="center",
            color=_INK,
            arrowprops={"arrowstyle": "-", "color": _FAINT, "linewidth": 0.5},
        )
