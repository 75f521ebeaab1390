"""Blocks as a Word document: headings, paragraphs, lists and tables, nothing more."""

from __future__ import annotations

import io
import re
from collections.abc import Sequence
from typing import Any

from formbuf.output.page import Block, Grid, Heading, Items, Paragraph

#: Tables with more columns than this stand on pages turned sideways.
UPRIGHT_COLUMNS = 5
BODY_POINTS, CELL_POINTS = 10, 8
MARGIN_CM = 2.0
_UNPRINTABLE = re.compile(r"[\x00-\x08\x0b\x0c\x0e-\x1f\ud800-\udfff\ufffe\uffff]")


def to_word(blocks: Sequence[Block]) -> bytes:
    """Return blocks as the bytes of a ``.docx`` file.

    Parameters
    ----------
    blocks : sequence of Block
        The first heading of level 1 becomes the title.
    """
    from docx import Document
    from docx.shared import Cm, Pt

    document = Document()
    document.styles["Normal"].font.size = Pt(BODY_POINTS)
    section = document.sections[0]
    widest = max((len(b.columns) for b in blocks if isinstance(b, Grid)), default=0)
    if widest > UPRIGHT_COLUMNS:
        section.page_width, section.page_height = (
            section.page_height,
            section.page_width,
        )
    for side in ("left_margin", "right_margin", "top_margin", "bottom_margin"):
        setattr(section, side, Cm(MARGIN_CM))
    for block in blocks:
        _add(document, block)
    title = next((b.text for b in blocks if isinstance(b, Heading)), "")
    document.core_properties.title = clean(title)
    document.core_properties.author = ""
    document.core_properties.comments = ""
    stream = io.BytesIO()
    document.save(stream)
    return stream.getvalue()


def _add(document: Any, block: Block) -> None:
    if isinstance(block, Heading):
        document.add_heading(clean(block.text), 0 if block.level == 1 else block.level)
    elif isinstance(block, Paragraph):
        document.add_paragraph().add_run(clean(block.text)).bold = block.strong or None
    elif isinstance(block, Items):
        for text in block.texts:
            document.add_paragraph(clean(text), style="List Bullet")
    else:
        _add_grid(document, block)


def _add_grid(document: Any, grid: Grid) -> None:
    from docx.enum.text import WD_ALIGN_PARAGRAPH
    from docx.oxml import OxmlElement
    from docx.shared import Pt

    table = document.add_table(rows=1 + len(grid.rows), cols=len(grid.columns))
    table.style = "Table Grid"
    headers = tuple(" ".join(c.header.split()) for c in grid.columns)
    for line, row in enumerate((headers, *grid.rows)):
        for cell, text, column in zip(
            table.rows[line].cells, row, grid.columns, strict=True
        ):
            paragraph = cell.paragraphs[0]
            paragraph.paragraph_format.space_after = Pt(0)
            run = paragraph.add_run(clean(text))
            run.font.size = Pt(CELL_POINTS)
            run.bold = True if line == 0 else None
            if column.align == "right":
                paragraph.alignment = WD_ALIGN_PARAGRAPH.RIGHT
    repeated = OxmlElement("w:tblHeader")
    table.rows[0]._tr.get_or_add_trPr().append(repeated)
    document.add_paragraph()


def clean(text: str) -> str:
    """Return a text without characters that the file format cannot hold."""
    return _UNPRINTABLE.sub(" ", text)
