"""Blocks as text for the terminal.

Narrow terminals show the columns that matter, wide ones more. Numbers stand right.
Headings are bold on a terminal that can do it; there is no colour, so nothing is lost
in a pipe, in a file or on paper.
"""

from __future__ import annotations

import os
import unicodedata
from collections.abc import Iterable, Sequence
from typing import TextIO

from formbuf.output.page import WIDE, Block, Column, Grid, Heading, Items, Paragraph

#: Narrower terminals are written to as if they had this width [characters].
LEAST_WIDTH = 60
#: Longer words are broken where there is no room [characters].
LONGEST_WORD = 24
#: Least width of a column of texts [characters].
LEAST_TEXT = 8
GAP = 2
_BOLD, _PLAIN = "\x1b[1m", "\x1b[0m"


def to_text(blocks: Sequence[Block], width: int, *, bold: bool = False) -> str:
    """Return blocks as text.

    Parameters
    ----------
    blocks : sequence of Block
    width : int
        Longest line [characters], at least 60.
    bold : bool
        Whether headings are set bold for a terminal.
    """
    room = max(width, LEAST_WIDTH)
    lines: list[str] = []
    for position, block in enumerate(blocks):
        if position and not isinstance(blocks[position - 1], Heading):
            lines.append("")
        new = _lines(block, room)
        if bold and _is_strong(block):
            new = [f"{_BOLD}{line}{_PLAIN}" for line in new]
        lines += new
    return "\n".join(line.rstrip() for line in lines) + "\n"


def can_be_bold(stream: TextIO) -> bool:
    """Whether a stream is a terminal that may be sent bold type."""
    if os.environ.get("NO_COLOR") or os.environ.get("TERM", "") in ("dumb", "unknown"):
        return False
    return stream.isatty() and (os.name != "nt" or "WT_SESSION" in os.environ)


def _is_strong(block: Block) -> bool:
    return isinstance(block, Heading) or (isinstance(block, Paragraph) and block.strong)


def _lines(block: Block, width: int) -> list[str]:
    if isinstance(block, Heading | Paragraph):
        return wrapped(block.text, width)
    if isinstance(block, Items):
        return _items(block, width)
    return _grid(block, width)


def _items(items: Items, width: int) -> list[str]:
    lines = []
    for text in items.texts:
        first, *rest = wrapped(text, width - 2)
        lines += [f"* {first}", *(f"  {line}" for line in rest)]
    return lines


def _grid(grid: Grid, width: int) -> list[str]:
    """Columns without frames, a rule under each header."""
    shown, widths = layout(grid, width)
    headers = [
        [
            piece
            for line in _header(grid.columns[i], width).split("\n")
            for piece in wrapped(line, w)
        ]
        for i, w in zip(shown, widths, strict=True)
    ]
    tall = max(len(header) for header in headers)
    padded = [[""] * (tall - len(header)) + header for header in headers]
    columns = [grid.columns[i] for i in shown]
    lines = _row(padded, columns, widths)
    lines.append((" " * GAP).join("-" * w for w in widths))
    for row in grid.rows:
        cells = [_cell(row[i], w) for i, w in zip(shown, widths, strict=True)]
        lines += _row(cells, columns, widths)
    return lines


def _cell(text: str, width: int) -> list[str]:
    """Wrap a cell; what stands further right stays there on its next lines."""
    indent = len(text) - len(text.lstrip(" "))
    lines = wrapped(text.lstrip(" "), max(width - indent, 1))
    return [f"{' ' * indent}{line}" for line in lines]


def _row(
    cells: Sequence[Sequence[str]], columns: Sequence[Column], widths: Sequence[int]
) -> list[str]:
    lines = []
    for number in range(max(len(cell) for cell in cells)):
        parts = []
        for cell, column, width in zip(cells, columns, widths, strict=True):
            text = cell[number] if number < len(cell) else ""
            space = " " * (width - display_width(text))
            parts.append(space + text if column.align == "right" else text + space)
        lines.append((" " * GAP).join(parts))
    return lines


def layout(grid: Grid, width: int) -> tuple[list[int], list[int]]:
    """Return the columns that are shown at a width, and the width of each.

    Columns that need a wider terminal are left out first, the last one first; then
    texts are wrapped that should not be, then words broken, numbers last of all.
    """
    shown = [i for i, c in enumerate(grid.columns) if c.from_width <= width] or [0]
    while True:
        natural = [_natural(grid, i, width) for i in shown]
        least = [
            n if grid.columns[i].keep else min(n, _longest_word(grid, i, width))
            for i, n in zip(shown, natural, strict=True)
        ]
        room = width - GAP * (len(shown) - 1)
        optional = [i for i in shown if grid.columns[i].from_width]
        if sum(least) <= room or not optional or len(shown) == 1:
            break
        shown.remove(optional[-1])
    if sum(least) > room:
        words = [
            min(n, _longest_word(grid, i, width))
            for i, n in zip(shown, natural, strict=True)
        ]
        is_text = [grid.columns[i].align == "left" for i in shown]
        least = _pressed(least, words, room, is_text)
        least = _pressed(least, [LEAST_TEXT] * len(least), room, is_text)
        least = _pressed(least, [1] * len(least), room, [True] * len(least))
    return shown, _shared(least, natural, room)


def _pressed(
    widths: list[int], floors: list[int], room: int, may: list[bool]
) -> list[int]:
    """Take from the widest column that may give, down to its floor, until all fit."""
    pressed = list(widths)
    for _ in range(max(sum(widths) - room, 0)):
        giving = [i for i, w in enumerate(pressed) if may[i] and w > floors[i]]
        if not giving:
            break
        pressed[max(giving, key=lambda i: pressed[i])] -= 1
    return pressed


def _shared(least: list[int], natural: list[int], room: int) -> list[int]:
    """Give what room is left to the columns that lack most, letter by letter."""
    widths = list(least)
    for _ in range(max(room - sum(widths), 0)):
        lack = [n - w for n, w in zip(natural, widths, strict=True)]
        neediest = max(range(len(widths)), key=lambda i: lack[i])
        if lack[neediest] <= 0:
            break
        widths[neediest] += 1
    return widths


def _header(column: Column, width: int) -> str:
    return column.short if column.short and width < WIDE else column.header


def _natural(grid: Grid, index: int, width: int) -> int:
    header = _header(grid.columns[index], width).split("\n")
    return max(
        display_width(text) for text in (*header, *(row[index] for row in grid.rows))
    )


def _longest_word(grid: Grid, index: int, width: int) -> int:
    header = _header(grid.columns[index], width).split("\n")
    words = [w for row in grid.rows for w in row[index].split()]
    longest = max((display_width(word) for word in words), default=1)
    return max(min(longest, LONGEST_WORD), *(display_width(line) for line in header))


def wrapped(text: str, width: int) -> list[str]:
    """Return a text as lines of at most a width, at least one line.

    Words longer than a line are broken; what cannot be printed becomes a blank.
    """
    lines: list[str] = []
    line = ""
    for word in _pieces(printable(text).split(" "), width):
        if line and display_width(line) + 1 + display_width(word) > width:
            lines.append(line)
            line = word
        else:
            line = f"{line} {word}" if line else word
    return [*lines, line]


def _pieces(words: Iterable[str], width: int) -> Iterable[str]:
    for word in words:
        rest = word
        while display_width(rest) > width:
            cut = 1
            while cut < len(rest) and display_width(rest[: cut + 1]) <= width:
                cut += 1
            yield rest[:cut]
            rest = rest[cut:]
        if rest:
            yield rest


def printable(text: str) -> str:
    """Return a text without line ends and control characters."""
    if text.isprintable():
        return text
    return "".join(c if c.isprintable() else " " for c in text)


def display_width(text: str) -> int:
    """Return the number of character cells that a text takes."""
    if text.isascii():
        return len(text)
    wide = sum(unicodedata.east_asian_width(c) in "WF" for c in text)
    return len(text) + wide - sum(bool(unicodedata.combining(c)) for c in text)
