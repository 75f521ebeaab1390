"""Draw a challenge: pH against strong acid and base, with and without buffer.

The same result gives the same bytes; lines differ in style, so that the figure holds
in greyscale.
"""

from __future__ import annotations

import io
from pathlib import Path
from typing import TYPE_CHECKING, Any

from formbuf.bench.challenge import Challenge
from formbuf.errors import OutputError
from formbuf.output.bench_words import made_words, target_words
from formbuf.output.writers import write_bytes

if TYPE_CHECKING:
    from matplotlib.figure import Figure

_DARK, _BRIGHT, _BAND, _GRID = "#004D7A", "#D55E00", "#CFDDE6", "#E4E4E4"
_STYLES = ("-", (0, (5, 2)), (0, (1, 1.5)), (0, (5, 1, 1, 1)))
_DOTS_PER_INCH = 150


def write_figure(result: Challenge, path: Path) -> None:
    """Draw a challenge into a file; its ending, .svg or .png, decides the format.

    Raises
    ------
    OutputError
        Matplotlib is not installed, or the file cannot be written.
    """
    write_bytes(path, figure_bytes(result, path.suffix.lower().removeprefix(".")))


def figure_bytes(result: Challenge, kind: str) -> bytes:
    """Return the figure as the bytes of a file of one kind, ``svg`` or ``png``."""
    try:
        import matplotlib as mpl
    except ImportError as error:
        msg = "--figure needs matplotlib, which is not installed"
        hint = "Install formbuf with its extra: report."
        raise OutputError(msg, hint=hint) from error
    settings: Any = {
        "svg.hashsalt": "formbuf",
        "svg.fonttype": "none",
        "font.family": "sans-serif",
        "font.sans-serif": ["DejaVu Sans"],
        "font.size": 9,
    }
    title = f"Challenge: {made_words(result.bench)}, {target_words(result.bench)}"
    nobody: dict[str, Any] = {"Title": title}
    nobody |= {"Date": None, "Creator": None} if kind == "svg" else {"Software": None}
    stream = io.BytesIO()
    with mpl.rc_context(settings):
        figure = draw(result, title)
        figure.savefig(stream, format=kind, dpi=_DOTS_PER_INCH, metadata=nobody)
    return stream.getvalue()


def draw(result: Challenge, title: str) -> Figure:
    """Return the figure: one line per temperature, and one without buffer for each."""
    from matplotlib.figure import Figure as NewFigure

    figure = NewFigure(figsize=(6.4, 4.4), layout="constrained")
    axes = figure.subplots()
    bench = result.bench
    axes.axhspan(
        bench.low_ph,
        bench.high_ph,
        color=_BAND,
        zorder=0,
        label=f"window at {bench.measure_temperature_c:g} °C",
    )
    temperatures = list(dict.fromkeys(p.temperature_c for p in result.points))
    for t, style in zip(temperatures, _STYLES * len(temperatures), strict=False):
        points = [p for p in result.points if p.temperature_c == t]
        added = [p.added_mmol_l for p in points]
        axes.plot(
            added,
            [p.ph for p in points],
            color=_DARK,
            linestyle=style,
            linewidth=1.8,
            label=f"with buffer, {t:g} °C",
        )
        axes.plot(
            added,
            [p.ph_unbuffered for p in points],
            color=_BRIGHT,
            linestyle=style,
            linewidth=1.2,
            label=f"without buffer, {t:g} °C",
        )
    axes.set_title(title, fontsize=10)
    axes.set_xlabel("Strong base added, mmol/L   (negative: strong acid)")
    axes.set_ylabel("pH")
    axes.grid(visible=True, color=_GRID, linewidth=0.6)
    axes.spines[["top", "right"]].set_visible(False)
    axes.set_axisbelow(True)
    axes.legend(frameon=False, fontsize=8)
    return figure
