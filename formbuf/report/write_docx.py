"""A report as a Word file with real styles, numbering, captions and fields."""

from __future__ import annotations

import datetime as dt
import io
import zipfile
from collections.abc import Iterable, Sequence
from typing import TYPE_CHECKING, Any

from formbuf.report.content import (
    Block,
    Cite,
    Document,
    Figure,
    Items,
    Link,
    Note,
    Paragraph,
    ReferenceList,
    Section,
    SignatureTable,
    Span,
    Spans,
    Table,
    Text,
    plain_text,
)
from formbuf.report.docx_parts import (
    add_numbering,
    bookmark,
    field,
    grid,
    hyperlink,
    paragraph,
    run,
)
from formbuf.report.docx_styles import PAGE_WIDTH_CM, dress, edges
from formbuf.report.write_html import SIGN_HEADS, heading_number

if TYPE_CHECKING:
    from docx.document import Document as WordFile

#: Stands for the clock wherever the format asks for a time.
NO_TIME = dt.datetime(2000, 1, 1)
ZIP_TIME = (1980, 1, 1, 0, 0, 0)
LONGEST_HEAD = 80
FIGURE_WIDTH_CM = 16.0


def to_docx(document: Document) -> bytes:
    """Return a report as the bytes of a Word file.

    Parameters
    ----------
    document : Document

    Returns
    -------
    bytes
        The same for the same report: no time and no name of a user is in it.
    """
    import docx

    file = docx.Document()
    dress(file)
    add_numbering(file)
    writer = _Word(document, file)
    writer.write()
    stream = io.BytesIO()
    file.save(stream)
    return _without_times(stream.getvalue())


def _without_times(data: bytes) -> bytes:
    """Return a zip file whose entries bear a fixed time."""
    stream = io.BytesIO()
    with (
        zipfile.ZipFile(io.BytesIO(data)) as old,
        zipfile.ZipFile(stream, "w", zipfile.ZIP_DEFLATED) as new,
    ):
        for entry in old.infolist():
            kept = zipfile.ZipInfo(entry.filename, ZIP_TIME)
            kept.compress_type = zipfile.ZIP_DEFLATED
            kept.external_attr = 0o600 << 16
            new.writestr(kept, old.read(entry.filename))
    return stream.getvalue()


class _Word:
    """Writes the parts of one document into a Word file."""

    def __init__(self, document: Document, file: WordFile) -> None:
        self.document = document
        self.file = file
        self.body = file.element.body
        self.last = self.body.sectPr
        self.marks = 0

    def write(self) -> None:
        d = self.document
        subject = plain_text(d.subject)
        head = f"{d.title}: {subject}"
        short = head if len(head) <= LONGEST_HEAD else f"{head[: LONGEST_HEAD - 1]}…"
        edges(self.file, short, d.status, d.footer)
        self._properties(head)
        self.add(paragraph("Status", run(d.status)))
        self.add(paragraph("Title", run(d.title)))
        self.add(paragraph("Subtitle", *self.runs(d.subject)))
        if d.story:
            self.add(paragraph("Story", *self.runs(d.story)))
        if d.stamp:
            self.add(paragraph("Story", run(d.stamp)))
        self._contents()
        for section in d.sections:
            self._section(section, 1)
        self.add(paragraph("Story", run(f"{d.footer}. {d.status}.")))

    def add(self, made: Any) -> None:
        """Put an element at the end of the text."""
        self.last.addprevious(made)

    def _properties(self, head: str) -> None:
        core = self.file.core_properties
        core.title = head[:255]
        core.author = "formbuf"
        core.last_modified_by = ""
        core.comments = ""
        core.subject = ""
        core.keywords = self.document.status
        core.language = self.document.language
        core.revision = 1
        core.created = core.modified = NO_TIME

    def _contents(self) -> None:
        """Write a table of contents, filled, that Word can renew."""
        self.add(paragraph("ContentsHead", run("Contents"), keep_next=True))
        entries = []
        for section in self.document.sections:
            entries.append((section, "TOC1"))
            entries += [(part, "TOC2") for part in section.sections]
        begin = field('TOC \\o "1-2" \\h \\z \\n', "")
        for position, (section, style) in enumerate(entries):
            text = f"{heading_number(section)} {plain_text(section.title)}"
            line: list[Any] = [hyperlink(_anchor(section.id), run(text))]
            if position == 0:
                line = [*begin[:3], *line]
            if position == len(entries) - 1:
                line.append(begin[4])
            self.add(paragraph(style, *line))

    def _section(self, section: Section, level: int) -> None:
        style = (
            ("Annex", "AnnexPart")[level - 1] if section.annex else f"Heading{level}"
        )
        start, end = self._mark(_anchor(section.id))
        self.add(paragraph(style, start, *self.runs(section.title), end))
        if section.placement:
            text = f"Placement: {section.placement}"
            self.add(paragraph("Placement", run(text), keep_next=True))
        for block in section.blocks:
            self._block(block)
        for part in section.sections:
            self._section(part, level + 1)

    def _mark(self, name: str) -> tuple[Any, Any]:
        self.marks += 1
        return bookmark(name, self.marks)

    def _block(self, block: Block) -> None:
        if isinstance(block, Paragraph):
            self.add(paragraph("BodyText", *self.runs(block.spans)))
        elif isinstance(block, Note):
            self.add(paragraph("Caution", *self.runs(block.spans)))
        elif isinstance(block, Items):
            for item in block.items:
                self.add(paragraph("ListBullet", *self.runs(item)))
        elif isinstance(block, Table):
            self._table(block)
        elif isinstance(block, Figure):
            self._figure(block)
        elif isinstance(block, SignatureTable):
            self._signatures(block)
        elif isinstance(block, ReferenceList):
            self._references()

    def _caption(self, block: Table | Figure) -> list[Any]:
        kind, _, number = self.document.labels[block.id].partition(" ")
        start, end = self._mark(_anchor(block.id))
        return [
            start,
            run(f"{kind} "),
            *field(f"SEQ {kind} \\* ARABIC", number),
            end,
            run(". "),
            *self.runs(block.caption),
        ]

    def _table(self, block: Table) -> None:
        self.add(paragraph("Caption", *self._caption(block), keep_next=True))
        self.add(
            grid(
                [[run(column.header)] for column in block.columns],
                [[self.runs(cell) for cell in row] for row in block.rows],
                [column.width for column in block.columns],
                [column.align == "right" for column in block.columns],
                PAGE_WIDTH_CM,
            )
        )
        for note in block.notes:
            self.add(paragraph("TableNote", *self.runs(note)))
        self.add(paragraph("AfterTable"))

    def _signatures(self, block: SignatureTable) -> None:
        caption = run(f"Signatures ({self.document.status})")
        self.add(paragraph("SignatureHead", caption, keep_next=True))
        self.add(
            grid(
                [[run(head)] for head in SIGN_HEADS],
                [[[run(role)], [], [], []] for role in block.roles],
                [2.2, 1.6, 1.0, 1.6],
                [False] * 4,
                PAGE_WIDTH_CM,
            )
        )
        self.add(paragraph("AfterTable"))

    def _figure(self, block: Figure) -> None:
        from docx.shared import Cm

        holder = self.file.add_paragraph(style="Figure")
        inline = holder.add_run().add_picture(
            io.BytesIO(block.png()), width=Cm(FIGURE_WIDTH_CM)
        )
        properties = inline._inline.docPr
        properties.set("descr", block.alt)
        properties.set("title", plain_text(block.caption))
        self.add(paragraph("Caption", *self._caption(block)))

    def _references(self) -> None:
        for r in self.document.references:
            start, end = self._mark(f"ref_{r.number}")
            doi = f" doi:{r.doi}" if r.doi else ""
            self.add(
                paragraph(
                    "Reference",
                    start,
                    run(f"{r.number}.\u2002{r.text}{doi}{r.remark}"),
                    end,
                )
            )

    def runs(self, spans: Spans) -> list[Any]:
        """Return spans as runs and links."""
        found: list[Any] = []
        for span in spans:
            found += self._runs_of(span)
        return found

    def _runs_of(self, span: Span) -> Iterable[Any]:
        shown = self.document.shown(span)
        if not shown:
            return []
        if isinstance(span, Link):
            return [hyperlink(_anchor(span.target), run(shown))]
        if isinstance(span, Cite):
            return self._citation(span)
        return [run(shown, bold=isinstance(span, Text) and span.strong)]

    def _citation(self, span: Cite) -> Sequence[Any]:
        known = self.document.numbers
        numbers = sorted({known[s] for s in span.sources if s in known})
        found: list[Any] = [run("\u00a0[" if span.spaced else "[")]
        for position, number in enumerate(numbers):
            if position:
                found.append(run(", "))
            found.append(hyperlink(f"ref_{number}", run(str(number))))
        return [*found, run("]")]


def _anchor(name: str) -> str:
    """Return the name of a bookmark; Word knows letters, digits and underscores."""
    return f"b_{name.replace('-', '_')}"[:40]
