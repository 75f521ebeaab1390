"""Drawing figures: one look, SVG with ids of its own, PNG at 200 dots per inch.

Lines differ by style and marker besides their shade, so that they hold in greyscale.
The same input gives the same bytes.
"""

from __future__ import annotations

import io
import re
from collections.abc import Callable
from typing import TYPE_CHECKING, Any

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure as Canvas

Draw = Callable[["Canvas"], None]
Makers = tuple[Callable[[], str], Callable[[], bytes]]

DOTS_PER_INCH = 200
#: Shades from dark to light; each with a line and a marker of its own.
SHADES = ("#17324d", "#a4501f", "#4f7f8f", "#7a6a2f", "#6d5a7d", "#5c5c5c")
LINES: tuple[Any, ...] = (
    "-",
    "--",
    "-.",
    ":",
    (0, (6, 1.5, 1, 1.5, 1, 1.5)),
    (0, (1, 3)),
)
MARKERS = ("o", "s", "^", "D", "v", "P")
INK, PALE, BAND = "#222222", "#9a9a9a", "#e9e6dc"
LONGEST_LABEL = 38

_SETTINGS: Any = {
    "font.family": ["DejaVu Sans"],
    "font.size": 9.0,
    "axes.labelsize": 9.0,
    "axes.edgecolor": PALE,
    "axes.labelcolor": INK,
    "axes.spines.top": False,
    "axes.spines.right": False,
    "axes.linewidth": 0.8,
    "axes.unicode_minus": True,
    "xtick.color": INK,
    "ytick.color": INK,
    "xtick.labelsize": 8.0,
    "ytick.labelsize": 8.0,
    "legend.fontsize": 8.0,
    "legend.frameon": False,
    "svg.fonttype": "path",
    "svg.hashsalt": "formbuf",
    "path.simplify": True,
    "figure.facecolor": "white",
    "axes.facecolor": "white",
    "text.usetex": False,
    "text.parse_math": False,
}
_ID = re.compile(r'(\bid="|xlink:href="#|\bhref="#|url\(#)')
_HEAD = re.compile(r"^.*?(?=<svg)", re.DOTALL)
_METADATA = re.compile(r"\s*<metadata>.*?</metadata>", re.DOTALL)
_SIZE = re.compile(
    r'(<svg[^>]*?)\swidth="[^"]*"([^>]*?)\sheight="[^"]*"|(<svg[^>]*?)\sheight="[^"]*"([^>]*?)\swidth="[^"]*"'
)


def makers(name: str, width_in: float, height_in: float, draw: Draw) -> Makers:
    """Return what writes a figure as SVG text and as PNG bytes.

    Parameters
    ----------
    name : str
        Begins every id in the SVG, so that several can stand in one page.
    width_in, height_in : float
        Size [inches].
    draw : callable
        Puts the drawing on an empty canvas.
    """
    laid_out: list[Canvas] = []

    def canvas() -> Canvas:
        if not laid_out:
            laid_out.append(_lay_out(width_in, height_in, draw))
        return laid_out[0]

    def svg() -> str:
        return _own_ids(_save(canvas(), "svg").decode(), name)

    def png() -> bytes:
        return _save(canvas(), "png")

    return svg, png


def _lay_out(width_in: float, height_in: float, draw: Draw) -> Canvas:
    """Draw once and fix the places, so that every format shows the same."""
    import matplotlib as mpl
    from matplotlib.backends.backend_agg import FigureCanvasAgg
    from matplotlib.figure import Figure as Canvas

    with mpl.rc_context(_SETTINGS):
        made = Canvas(figsize=(width_in, height_in), layout="constrained")
        FigureCanvasAgg(made)
        draw(made)
        made.draw_without_rendering()
        made.set_layout_engine("none")
    return made


def _save(canvas: Canvas, kind: str) -> bytes:
    import matplotlib as mpl

    stream = io.BytesIO()
    metadata: dict[str, Any] = (
        {"Date": None, "Creator": None} if kind == "svg" else {"Software": None}
    )
    with mpl.rc_context(_SETTINGS):
        canvas.savefig(stream, format=kind, dpi=DOTS_PER_INCH, metadata=metadata)
    return stream.getvalue()


def _own_ids(svg: str, name: str) -> str:
    """Return SVG without prolog and fixed size, every id with a name before it."""
    body = _METADATA.sub("", _HEAD.sub("", svg, count=1))
    body = _SIZE.sub(lambda m: "".join(g for g in m.groups() if g), body, count=1)
    return _ID.sub(lambda m: f"{m.group(1)}{name}-", body).strip()


def label(text: str) -> str:
    """Return a name that fits into a legend and that the font holds."""
    shown = "".join(c if _is_drawn(c) else "?" for c in text.strip())
    if len(shown) > LONGEST_LABEL:
        shown = f"{shown[: LONGEST_LABEL - 1].rstrip()}…"
    return f" {shown}" if shown.startswith("_") else shown or "?"


def _is_drawn(letter: str) -> bool:
    code = ord(letter)
    return 0x20 <= code < 0x250 or 0x370 <= code < 0x400 or code in (0x2013, 0x2026)


def look(position: int) -> dict[str, Any]:
    """Return shade, line and marker of the n-th series."""
    return {
        "color": SHADES[position % len(SHADES)],
        "linestyle": LINES[position % len(LINES)],
        "marker": MARKERS[position % len(MARKERS)],
        "linewidth": 1.5,
        "markersize": 4.5,
    }


def legend_below(axes: Axes, columns: int = 2) -> None:
    """Put the legend beneath the axes, out of the way of the lines."""
    axes.legend(
        loc="upper center",
        bbox_to_anchor=(0.5, -0.16),
        ncols=columns,
        handlelength=3.2,
        columnspacing=1.6,
    )


def quiet(axes: Axes) -> None:
    """Put a pale grid behind the lines."""
    axes.grid(visible=True, color="#ededed", linewidth=0.7)
    axes.set_axisbelow(True)
