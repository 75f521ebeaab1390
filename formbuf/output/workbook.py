"""A page as a workbook: the data on the first sheet, then one sheet per table.

Every text is written as a text: what begins like a formula stays one, also after
somebody edits the cell. Numbers of the first sheet keep their full precision.
"""

from __future__ import annotations

import io
import re
from collections.abc import Iterable, Mapping, Sequence
from typing import Any

from formbuf.output.page import Block, Grid, Heading, Page

#: Limits of the file format.
LONGEST_TITLE, LONGEST_CELL, MOST_ROWS = 31, 32767, 1_048_576
WIDEST_COLUMN = 60
FIRST_SHEET = "data"
_FORBIDDEN_IN_TITLE = re.compile(r"[\[\]:*?/\\']")
_UNPRINTABLE = re.compile(r"[\x00-\x08\x0b\x0c\x0e-\x1f\ud800-\udfff\ufffe\uffff]")
_NUMBER = re.compile(r"[+-]?\d+(\.\d+)?([eE][+-]?\d+)?")


def to_workbook(page: Page) -> bytes:
    """Return a page as the bytes of an ``.xlsx`` file.

    Parameters
    ----------
    page : Page
        Its rows make the first sheet, each of its tables one more.
    """
    from openpyxl import Workbook

    book = Workbook()
    first = book.active
    first.title = FIRST_SHEET
    rows = list(page.records())
    names = list(rows[0]) if rows else []
    _fill(first, names, ([row[name] for name in names] for row in rows))
    titles = {FIRST_SHEET}
    for heading, grid in titled_grids(page.blocks()):
        sheet = book.create_sheet(sheet_title(heading, titles))
        headers = [" ".join(column.header.split()) for column in grid.columns]
        numeric = [column.align == "right" for column in grid.columns]
        _fill(sheet, headers, (_cells(row, numeric) for row in grid.rows))
    stream = io.BytesIO()
    book.save(stream)
    return stream.getvalue()


def titled_grids(blocks: Iterable[Block]) -> Iterable[tuple[str, Grid]]:
    """Yield each table that holds rows with the heading above it.

    What stands right below the title is the summary.
    """
    heading = "summary"
    for block in blocks:
        if isinstance(block, Heading):
            heading = block.text if block.level > 1 else "summary"
        elif isinstance(block, Grid) and block.rows:
            yield heading, block


def sheet_title(text: str, taken: set[str]) -> str:
    """Return a title that a sheet may bear and no other sheet has; it is then taken."""
    plain = _UNPRINTABLE.sub(" ", _FORBIDDEN_IN_TITLE.sub(" ", text))
    base = " ".join(plain.split())[:LONGEST_TITLE].strip() or "table"
    title, count = base, 1
    while title.casefold() in taken:
        count += 1
        ending = f" {count}"
        title = base[: LONGEST_TITLE - len(ending)] + ending
    taken.add(title.casefold())
    return title


def _cells(row: Sequence[str], numeric: Sequence[bool]) -> list[Any]:
    """Return the texts of a table, those that are numbers of a numeric column as such."""
    return [
        float(text) if is_number and _NUMBER.fullmatch(text) else text
        for text, is_number in zip(row, numeric, strict=True)
    ]


def _fill(sheet: Any, names: Sequence[str], rows: Iterable[Sequence[Any]]) -> None:
    """Write a header and rows; the header stays in view."""
    from openpyxl.styles import Font
    from openpyxl.utils import get_column_letter

    widths = [len(name) for name in names]
    for place, name in enumerate(names, start=1):
        _put(sheet.cell(1, place), name).font = Font(bold=True)
    for line, row in enumerate(rows, start=2):
        if line > MOST_ROWS:
            break
        for place, value in enumerate(row, start=1):
            text = str(_put(sheet.cell(line, place), value).value or "")
            longest = max(map(len, text.split("\n")), default=0)
            widths[place - 1] = max(widths[place - 1], longest)
    for place, width in enumerate(widths, start=1):
        letter = get_column_letter(place)
        sheet.column_dimensions[letter].width = min(width, WIDEST_COLUMN) + 2
    if names:
        sheet.freeze_panes = "A2"


def _put(cell: Any, value: Any) -> Any:
    """Write one value: numbers as numbers, everything else as inert text."""
    if value is None or value == "":
        return cell
    if isinstance(value, int | float) and not isinstance(value, bool):
        cell.value = value
        return cell
    cell.value = plain_text(value)
    cell.data_type = "s"
    cell.quotePrefix = True
    return cell


def plain_text(value: object) -> str:
    """Return a value as the text of a cell.

    Examples
    --------
    >>> plain_text(True), plain_text(["a", 0.5]), plain_text("=1+1")
    ('yes', 'a; 0.5', '=1+1')
    """
    if isinstance(value, bool):
        return "yes" if value else "no"
    if isinstance(value, Mapping):
        return "; ".join(f"{k}: {plain_text(v)}" for k, v in value.items())
    if isinstance(value, list | tuple):
        return "; ".join(plain_text(item) for item in value)
    text = str(value).replace("\r\n", "\n").replace("\r", "\n")
    return _UNPRINTABLE.sub(" ", text)[:LONGEST_CELL]
