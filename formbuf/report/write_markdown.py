"""A report as Markdown (CommonMark with pipe tables); drawings by their description."""

from __future__ import annotations

import re
from collections.abc import Iterable

from formbuf.report.content import (
    Block,
    Document,
    Figure,
    Items,
    Note,
    Paragraph,
    ReferenceList,
    Section,
    SignatureTable,
    Span,
    Spans,
    Table,
    Text,
)
from formbuf.report.write_html import SIGN_HEADS, heading_number

#: Said once, before the first figure.
WHERE_FIGURES_ARE = (
    "in the HTML and Word forms of this report only; here each figure has its caption "
    "and a description, and the tables beside it hold the values."
)
_ALWAYS = re.compile(r"([\\`*\[\]<>&|~$])")
_EDGE_UNDERSCORE = re.compile(r"(?<![^\W_])_|_(?![^\W_])")
_OPENING = re.compile(r"^([#+=-]|\d+[.)](?=\s|$))")
_ADDRESS = re.compile(r"(:)(?=//)|(?<=www)(\.)|(@)")


def to_markdown(document: Document) -> str:
    """Return a report as Markdown text.

    Parameters
    ----------
    document : Document

    Returns
    -------
    str
        Without HTML; nothing that stands in a brief is read as markup.
    """
    writer = _Markdown(document)
    return "\n\n".join(part for part in writer.parts() if part) + "\n"


class _Markdown:
    """Writes the parts of one document."""

    def __init__(self, document: Document) -> None:
        self.document = document
        self.has_told_of_figures = False

    def parts(self) -> Iterable[str]:
        d = self.document
        yield f"**{escaped(d.status)}**"
        yield f"# {escaped(d.title)}"
        yield opened(self.spans(d.subject))
        yield opened(self.spans(d.story))
        yield opened(escaped(d.stamp))
        for section in d.sections:
            yield from self._section(section, 2)
        yield f"{opened(escaped(d.footer))}. {escaped(d.status)}."

    def _section(self, section: Section, level: int) -> Iterable[str]:
        name = f"{heading_number(section)} {self.spans(section.title)}"
        yield f"{'#' * level} {name}"
        if section.placement:
            yield f"Placement: {escaped(section.placement)}"
        for block in section.blocks:
            yield from self._block(block)
        for part in section.sections:
            yield from self._section(part, level + 1)

    def _block(self, block: Block) -> Iterable[str]:
        if isinstance(block, Paragraph):
            yield opened(self.spans(block.spans))
        elif isinstance(block, Note):
            yield f"> {opened(self.spans(block.spans))}"
        elif isinstance(block, Items):
            yield "\n".join(f"- {opened(self.spans(item))}" for item in block.items)
        elif isinstance(block, Table):
            yield from self._table(block)
        elif isinstance(block, Figure):
            if not self.has_told_of_figures:
                self.has_told_of_figures = True
                yield f"> Drawing: {escaped(WHERE_FIGURES_ARE)}"
            yield f"**{self.document.labels[block.id]}.** {self.spans(block.caption)}"
            yield f"> Drawing: {escaped(block.alt)}"
        elif isinstance(block, SignatureTable):
            yield f"Signatures ({escaped(self.document.status)})"
            yield _grid(
                SIGN_HEADS,
                ["left"] * len(SIGN_HEADS),
                [(escaped(role), "", "", "") for role in block.roles],
            )
        elif isinstance(block, ReferenceList):
            lines = []
            for r in self.document.references:
                doi = f" doi:{escaped(r.doi)}" if r.doi else ""
                lines.append(
                    f"{r.number}. {opened(escaped(r.text))}{doi}{escaped(r.remark)}"
                )
            yield "\n".join(lines)

    def _table(self, block: Table) -> Iterable[str]:
        yield f"**{self.document.labels[block.id]}.** {self.spans(block.caption)}"
        yield _grid(
            [escaped(column.header) for column in block.columns],
            [column.align for column in block.columns],
            [[self.spans(cell) for cell in row] for row in block.rows],
        )
        for note in block.notes:
            yield opened(self.spans(note))

    def spans(self, spans: Spans) -> str:
        """Return spans as one line of Markdown."""
        return "".join(self._span(span) for span in spans).strip()

    def _span(self, span: Span) -> str:
        text = escaped(self.document.shown(span))
        return f"**{text}**" if isinstance(span, Text) and span.strong else text


def _grid(
    heads: Iterable[str], aligns: Iterable[str], rows: Iterable[Iterable[str]]
) -> str:
    rules = ["---:" if align == "right" else "---" for align in aligns]
    lines = [heads, rules, *rows]
    return "\n".join(f"| {' | '.join(line)} |" for line in lines)


def escaped(text: str) -> str:
    r"""Return a text of which Markdown reads no part as markup.

    Examples
    --------
    >>> escaped("<b> *x* a_b _c_ [d](e)")
    '\\<b\\> \\*x\\* a_b \\_c\\_ \\[d\\](e)'
    """
    line = _ALWAYS.sub(r"\\\1", text)
    line = _EDGE_UNDERSCORE.sub(r"\\_", line)
    return _ADDRESS.sub(lambda found: f"\\{found.group()}", line)


def opened(text: str) -> str:
    r"""Return an escaped text that may also open a paragraph or an item.

    Examples
    --------
    >>> opened("# one"), opened("2. two"), opened("-x")
    ('\\# one', '2\\. two', '\\-x')
    """
    found = _OPENING.match(text)
    if found is None:
        return text
    mark = found.group()
    return f"{mark[:-1]}\\{mark[-1]}{text[len(mark) :]}"
