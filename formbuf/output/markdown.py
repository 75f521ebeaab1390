"""Blocks as Markdown: every column, whatever the width."""

from __future__ import annotations

import re
from collections.abc import Sequence

from formbuf.output.page import Block, Grid, Heading, Items, Paragraph

_EDGE_UNDERSCORE = re.compile(r"(?<!\w)_|_(?!\w)")
_LIST_NUMBER = re.compile(r"^(\d+)([.)])(?=\s)")


def to_markdown(blocks: Sequence[Block]) -> str:
    """Return blocks as Markdown text (CommonMark with pipe tables)."""
    parts = [_block(block) for block in blocks]
    return "\n\n".join(part for part in parts if part) + "\n"


def _block(block: Block) -> str:
    if isinstance(block, Heading):
        return f"{'#' * block.level} {escaped(block.text)}"
    if isinstance(block, Paragraph):
        text = opened(block.text)
        return f"**{text}**" if block.strong and text else text
    if isinstance(block, Items):
        return "\n".join(f"- {opened(text)}" for text in block.texts)
    return _grid(block)


def _grid(grid: Grid) -> str:
    headers = [cell(column.header) for column in grid.columns]
    rules = ["---:" if c.align == "right" else "---" for c in grid.columns]
    rows = [[cell(text) for text in row] for row in grid.rows]
    return "\n".join(f"| {' | '.join(row)} |" for row in (headers, rules, *rows))


def cell(text: str) -> str:
    """Return a text that fits into one cell of a pipe table."""
    return escaped(text).replace("|", "\\|")


def escaped(text: str) -> str:
    r"""Return a text of which Markdown reads no part as markup, on one line.

    Examples
    --------
    >>> escaped("a_b _c_ <d> *e*")
    'a_b \\_c\\_ &lt;d> \\*e\\*'
    """
    line = " ".join(text.split()).replace("\\", "\\\\")
    for mark in "*`[]":
        line = line.replace(mark, f"\\{mark}")
    return _EDGE_UNDERSCORE.sub(r"\\_", line).replace("<", "&lt;")


def opened(text: str) -> str:
    r"""Return an escaped text that may also open a paragraph or an item.

    Examples
    --------
    >>> opened("# one"), opened("2. two"), opened("pH 6.0")
    ('\\# one', '2\\. two', 'pH 6.0')
    """
    line = escaped(text)
    if line[:1] in ("#", ">", "+") or line[:2] == "- ":
        return f"\\{line}"
    return _LIST_NUMBER.sub(r"\1\\\2", line)
