"""What every command shows, before any format: data, flat rows, and blocks to read.

A `Page` holds three functions, so that only what a format needs is computed: the
JSON-ready data, the rows of a CSV file, and the blocks that the table for the
terminal and the Markdown text are made of.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass
from typing import Any, Literal, TypeAlias

Record: TypeAlias = Mapping[str, Any]
Align = Literal["left", "right"]

#: Width in characters up to which a table is narrow, and from which it is wide.
NARROW, WIDE = 80, 120


@dataclass(frozen=True, slots=True)
class Column:
    """One column of a grid.

    Parameters
    ----------
    header : str
        With its unit.
    short : str
        What a narrow terminal shows instead, where the header is long.
    align : {"left", "right"}
        Numbers stand right.
    from_width : int
        Width of the terminal from which the column is shown; Markdown shows all.
    keep : bool
        Whether cells stay on one line where possible.
    """

    header: str
    align: Align = "left"
    from_width: int = 0
    keep: bool = False
    short: str = ""


def number(header: str, from_width: int = 0, *, short: str = "") -> Column:
    """Return a column of numbers."""
    return Column(header, "right", from_width, keep=True, short=short)


@dataclass(frozen=True, slots=True)
class Heading:
    """A heading; level 1 is the title."""

    text: str
    level: int = 2


@dataclass(frozen=True, slots=True)
class Paragraph:
    """Running text."""

    text: str
    strong: bool = False


@dataclass(frozen=True, slots=True)
class Items:
    """A list of short texts."""

    texts: tuple[str, ...]


@dataclass(frozen=True, slots=True)
class Grid:
    """A table: one tuple of texts per row, as long as the columns."""

    columns: tuple[Column, ...]
    rows: tuple[tuple[str, ...], ...]

    def __post_init__(self) -> None:
        """Refuse rows of another length."""
        for row in self.rows:
            if len(row) != len(self.columns):
                msg = f"row of {len(row)} cells in a grid of {len(self.columns)}"
                raise ValueError(msg)


Block: TypeAlias = Heading | Paragraph | Items | Grid


@dataclass(frozen=True, slots=True)
class Page:
    """What one command has to show.

    Parameters
    ----------
    payload : callable
        Returns the JSON-ready data.
    records : callable
        Returns flat rows for CSV; all with the same keys, in the same order.
    blocks : callable
        Returns the blocks to read.
    """

    payload: Callable[[], Mapping[str, Any]]
    records: Callable[[], Sequence[Record]]
    blocks: Callable[[], Sequence[Block]]


def section(title: str, *blocks: Block | None, level: int = 2) -> list[Block]:
    """Return a heading with its blocks, or nothing where every block is empty."""
    kept = [block for block in blocks if block is not None and not is_empty(block)]
    return [Heading(title, level), *kept] if kept else []


def is_empty(block: Block) -> bool:
    """Whether a block holds nothing to read."""
    if isinstance(block, Grid):
        return not block.rows
    if isinstance(block, Items):
        return not block.texts
    return not block.text
