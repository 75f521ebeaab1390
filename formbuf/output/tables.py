"""Blocks as text for the terminal, set by rich.

Narrow terminals show the columns that matter, wide ones more; where even these do not
fit side by side without breaking words, each row is written as lines of its own.
Numbers stand right.
Headings are bold on a terminal that can do it; there is no colour, so nothing is lost
in a pipe, in a file or on paper.
"""

from __future__ import annotations

import io
import os
import textwrap
from collections.abc import Sequence
from typing import TYPE_CHECKING, TextIO

from formbuf.output.page import (
    NARROW,
    WIDE,
    Block,
    Column,
    Grid,
    Heading,
    Items,
    Paragraph,
)

if TYPE_CHECKING:
    from rich.console import Console, RenderableType

#: Narrower terminals are written to as if they had this width [characters].
LEAST_WIDTH = 40
#: Longer words are broken where there is no room [characters].
LONGEST_WORD = 24
#: Behind these a long word is broken rather than elsewhere.
SEAMS = "_./-,:=]"
GAP = 2
#: By which the lines of a row stand in [characters].
STEP = 2


def to_text(blocks: Sequence[Block], width: int, *, bold: bool = False) -> str:
    """Return blocks as text.

    Parameters
    ----------
    blocks : sequence of Block
    width : int
        Longest line [characters], at least 40.
    bold : bool
        Whether headings are set bold for a terminal.
    """
    from rich.console import Console

    room = max(width, LEAST_WIDTH)
    console = Console(
        file=io.StringIO(),
        width=room,
        force_terminal=bold,
        color_system="standard" if bold else None,
        highlight=False,
        markup=False,
        emoji=False,
        legacy_windows=False,
        _environ={},
    )
    with console.capture() as capture:
        for position, block in enumerate(blocks):
            if position and not isinstance(blocks[position - 1], Heading):
                console.print()
            _show(console, block, room)
    return "\n".join(line.rstrip() for line in capture.get().splitlines()) + "\n"


def can_be_bold(stream: TextIO) -> bool:
    """Whether a stream is a terminal that may be sent bold type."""
    if os.environ.get("NO_COLOR") or os.environ.get("TERM", "") in ("dumb", "unknown"):
        return False
    return stream.isatty() and (os.name != "nt" or "WT_SESSION" in os.environ)


def _show(console: Console, block: Block, room: int) -> None:
    from rich.table import Table
    from rich.text import Text

    if isinstance(block, Heading | Paragraph):
        strong = isinstance(block, Heading) or block.strong
        console.print(
            Text(printable(block.text), style="bold" if strong else "", overflow="fold")
        )
    elif isinstance(block, Items):
        for item in block.texts:
            line = Table.grid(padding=(0, 1, 0, 0))
            line.add_column(width=1)
            line.add_column(overflow="fold")
            line.add_row(Text("*"), Text(printable(item), overflow="fold"))
            console.print(line)
    elif _is_too_wide(block, room):
        _stack(console, block, room)
    else:
        console.print(_table(block, room))


def _is_too_wide(grid: Grid, room: int) -> bool:
    """Whether a narrow terminal would break words of a table."""
    if room >= NARROW or not grid.rows:
        return False
    shown = columns_shown(grid, room)
    return sum(_least(grid, i, room) for i in shown) + GAP * (len(shown) - 1) > room


def _stack(console: Console, grid: Grid, room: int) -> None:
    """Write each row as lines of header and value, what is empty left out."""
    from rich.padding import Padding
    from rich.text import Text

    shown = columns_shown(grid, room)
    for number, row in enumerate(grid.rows):
        if number:
            console.print()
        indent = 0
        for index in shown:
            value = printable(row[index]).strip(" ")
            if not value:
                continue
            header = " ".join(grid.columns[index].header.split())
            line = seamed(f"{header}: {value}" if header else value, room - indent)
            console.print(Padding(Text(line, overflow="fold"), (0, 0, 0, indent)))
            indent = STEP


def _table(grid: Grid, room: int) -> RenderableType:
    """Columns without frames, a rule under each header."""
    from rich.box import Box
    from rich.padding import Padding
    from rich.table import Table
    from rich.text import Text

    rule_under_header = Box("    \n    \n -  \n    \n    \n    \n    \n    \n")
    table = Table(
        box=rule_under_header,
        show_edge=False,
        pad_edge=False,
        padding=(0, 1, 0, 0),
        collapse_padding=False,
        header_style="",
    )
    shown = columns_shown(grid, room)
    widths = dict(zip(shown, _widths(grid, shown, room), strict=True))
    for index, width in widths.items():
        column = grid.columns[index]
        table.add_column(
            Text(_header(column, room)),
            justify=column.align,
            width=width,
            overflow="fold",
            vertical="top",
        )
    for row in grid.rows:
        cells: list[RenderableType] = []
        for index in shown:
            text = printable(row[index])
            indent = len(text) - len(text.lstrip(" "))
            folded = seamed(text.lstrip(" "), widths[index] - indent)
            cell = Text(folded, overflow="fold")
            cells.append(Padding(cell, (0, 0, 0, indent)) if indent else cell)
        table.add_row(*cells)
    return table


def columns_shown(grid: Grid, room: int) -> list[int]:
    """Return the columns that a width has room for.

    Columns that need a wider terminal are left out first, the last one first.
    """
    shown = [i for i, c in enumerate(grid.columns) if c.from_width <= room] or [0]
    while len(shown) > 1:
        needed = sum(_least(grid, i, room) for i in shown) + GAP * (len(shown) - 1)
        optional = [i for i in shown if grid.columns[i].from_width]
        if needed <= room or not optional:
            break
        shown.remove(optional[-1])
    return shown


def _widths(grid: Grid, shown: Sequence[int], room: int) -> list[int]:
    """Return the width of each column: as wide as it is, or pressed until all fit.

    The widest gives first, down to its longest word; where that is not enough, words
    are broken. The terminal library would crop what does not fit instead.
    """
    least = [_least(grid, index, room) for index in shown]
    widths = [_natural(grid, index, room) for index in shown]
    for floors in (least, [1] * len(shown)):
        for _ in range(sum(widths)):
            if sum(widths) + GAP * (len(shown) - 1) <= room:
                return widths
            giving = [i for i, width in enumerate(widths) if width > floors[i]]
            if not giving:
                break
            widths[max(giving, key=lambda i: widths[i])] -= 1
    return widths


def _natural(grid: Grid, index: int, room: int) -> int:
    """Width that a column takes where there is room [characters]."""
    from rich.cells import cell_len

    texts = [printable(row[index]) for row in grid.rows]
    texts += _header(grid.columns[index], room).split("\n")
    return max(1, *(cell_len(text) for text in texts))


def _header(column: Column, room: int) -> str:
    return column.short if column.short and room < WIDE else column.header


def _least(grid: Grid, index: int, room: int) -> int:
    """Width below which a column should not be pressed [characters]."""
    from rich.cells import cell_len

    column = grid.columns[index]
    cells = [printable(row[index]) for row in grid.rows]
    if not column.keep:
        cells = [word for cell in cells for word in cell.split()]
    longest = max((cell_len(cell) for cell in cells), default=1)
    if not column.keep:
        longest = min(longest, LONGEST_WORD)
    return max(longest, *(cell_len(h) for h in _header(column, room).split("\n")))


def seamed(text: str, width: int) -> str:
    r"""Return a text whose words longer than a width are broken behind a seam.

    Examples
    --------
    >>> seamed("candidate[1].concentration_mmol_l", 24).split("\n")
    ['candidate[1].', 'concentration_mmol_l']
    >>> seamed("a hydrochloride", 9)
    'a hydrochloride'
    """
    words = text.split(" ")
    if width < 1 or all(len(word) <= width for word in words):
        return text
    return " ".join(_broken(word, width) for word in words)


def _broken(word: str, width: int) -> str:
    pieces: list[str] = []
    while len(word) > width:
        cut = max((word.rfind(seam, 0, width) for seam in SEAMS), default=-1) + 1
        if cut < 2:
            break
        pieces.append(word[:cut])
        word = word[cut:]
    return "\n".join([*pieces, word])


def wrapped(text: str, width: int) -> list[str]:
    """Return a text as lines of at most a width [characters], at least one line."""
    return textwrap.wrap(printable(text), width) or [""]


def printable(text: str) -> str:
    """Return a text without line ends and control characters."""
    if text.isprintable():
        return text
    return "".join(c if c.isprintable() else " " for c in text)
