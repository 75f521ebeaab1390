"""A report as one HTML file: no network, no script, inline drawings."""

from __future__ import annotations

import re
from collections.abc import Iterable
from functools import cache
from html import escape
from importlib.resources import files

from formbuf.report.content import (
    NO_BREAK,
    Block,
    Cite,
    Document,
    Figure,
    Items,
    Link,
    Note,
    Paragraph,
    Quote,
    ReferenceList,
    Section,
    SignatureTable,
    Span,
    Spans,
    Table,
    Text,
    Value,
    plain_text,
)

#: Rows up to which a printed table stays on one page.
SHORT_ROWS = 9
#: Longest text in the head of a printed page.
LONGEST_HEAD = 70
#: Nothing may be fetched or run.
POLICY = "default-src 'none'; style-src 'unsafe-inline'; img-src data:"
SIGN_HEADS = ("Role", "Name", "Date", "Signature")


def to_html(document: Document) -> str:
    """Return a report as HTML text.

    Parameters
    ----------
    document : Document

    Returns
    -------
    str
        One page that needs nothing else.
    """
    writer = _Html(document)
    return "\n".join(writer.page()) + "\n"


@cache
def _style() -> str:
    return (
        (files("formbuf") / "report" / "style.css").read_text(encoding="utf-8").strip()
    )


class _Html:
    """Writes the parts of one document."""

    def __init__(self, document: Document) -> None:
        self.document = document

    def page(self) -> Iterable[str]:
        d = self.document
        subject = plain_text(d.subject)
        title = f"{d.title}: {_shortened(subject)}"
        yield "<!DOCTYPE html>"
        yield f'<html lang="{d.language}">'
        yield "<head>"
        yield '<meta charset="utf-8">'
        yield f'<meta http-equiv="Content-Security-Policy" content="{POLICY}">'
        yield '<meta name="viewport" content="width=device-width, initial-scale=1">'
        yield f"<title>{escape(title)}</title>"
        yield f"<style>\n{_style()}\n{self._page_rule(title)}\n</style>"
        yield "</head>"
        yield "<body>"
        yield '<a class="skip" href="#main">Skip to the content</a>'
        yield f'<div class="strip" aria-hidden="true">{escape(d.status)}</div>'
        yield "<header>"
        yield f'<p class="status">{escape(d.status)}</p>'
        yield f"<h1>{escape(d.title)}</h1>"
        yield f'<p class="subject">{self.spans(d.subject)}</p>'
        if d.story:
            yield f'<p class="story">{self.spans(d.story)}</p>'
        if d.stamp:
            yield f'<p class="story">{escape(d.stamp)}</p>'
        yield "</header>"
        yield from self._contents()
        yield '<main id="main">'
        for section in d.sections:
            yield from self._section(section, 2)
        yield "</main>"
        yield f"<footer>{escape(d.footer)}. {escape(d.status)}.</footer>"
        yield "</body>"
        yield "</html>"

    def _page_rule(self, title: str) -> str:
        d = self.document
        return (
            "@page { size: A4; margin: 20mm 16mm 18mm 12mm;\n"
            f"  @top-left {{ content: {_css(title)}; {_SMALL} }}\n"
            f"  @top-right {{ content: {_css(d.status)}; {_SMALL} }}\n"
            f"  @bottom-left {{ content: {_css(d.footer)}; {_SMALL} }}\n"
            f'  @bottom-right {{ content: "Page " counter(page) " of " counter(pages); {_SMALL} }} }}'
        )

    def _contents(self) -> Iterable[str]:
        yield '<nav aria-labelledby="contents">'
        yield '<h2 id="contents">Contents</h2>'
        yield "<ul>"
        for section in self.document.sections:
            yield f"<li>{self._entry(section)}"
            if section.sections:
                yield "<ul>"
                for part in section.sections:
                    yield f"<li>{self._entry(part)}</li>"
                yield "</ul>"
            yield "</li>"
        yield "</ul>"
        yield "</nav>"

    def _entry(self, section: Section) -> str:
        name = f"{heading_number(section)} {self.spans(section.title)}"
        return f'<a href="#{section.id}">{name}</a>'

    def _section(self, section: Section, level: int) -> Iterable[str]:
        head = f"h-{section.id}"
        yield f'<section id="{section.id}" aria-labelledby="{head}">'
        name = f"{heading_number(section)} {self.spans(section.title)}"
        yield f'<h{level} id="{head}">{name}</h{level}>'
        if section.placement:
            yield f'<p class="placement">Placement: {escape(section.placement)}</p>'
        for block in section.blocks:
            yield from self._block(block)
        for part in section.sections:
            yield from self._section(part, level + 1)
        yield "</section>"

    def _block(self, block: Block) -> Iterable[str]:
        if isinstance(block, Paragraph):
            yield f"<p>{self.spans(block.spans)}</p>"
        elif isinstance(block, Note):
            yield f'<div class="note" role="note"><p>{self.spans(block.spans)}</p></div>'
        elif isinstance(block, Items):
            yield "<ul>"
            for item in block.items:
                yield f"<li>{self.spans(item)}</li>"
            yield "</ul>"
        elif isinstance(block, Table):
            yield from self._table(block)
        elif isinstance(block, Figure):
            yield from self._figure(block)
        elif isinstance(block, SignatureTable):
            yield from self._signatures(block)
        elif isinstance(block, ReferenceList):
            yield from self._references()

    def _caption(self, block: Table | Figure) -> str:
        label = self.document.labels[block.id]
        return f'<span class="label">{label}.</span> {self.spans(block.caption)}'

    def _table(self, block: Table) -> Iterable[str]:
        short = ' class="short"' if len(block.rows) <= SHORT_ROWS else ""
        total = sum(column.width for column in block.columns)
        yield f'<table id="{block.id}"{short}>'
        yield f"<caption>{self._caption(block)}</caption>"
        widths = (
            f'<col style="width:{100 * c.width / total:.1f}%">' for c in block.columns
        )
        yield f"<colgroup>{''.join(widths)}</colgroup>"
        heads = "".join(
            f'<th scope="col"{_right(column.align)}>{escape(column.header)}</th>'
            for column in block.columns
        )
        yield f"<thead><tr>{heads}</tr></thead>"
        yield "<tbody>"
        for row in block.rows:
            first = block.columns[0]
            cells = [f'<th scope="row"{_right(first.align)}>{self.spans(row[0])}</th>']
            for column, cell in zip(block.columns[1:], row[1:], strict=True):
                cells.append(
                    f'<td{_right(column.align)} data-head="{escape(column.header)}">'
                    f"{self.spans(cell)}</td>"
                )
            yield f"<tr>{''.join(cells)}</tr>"
        yield "</tbody>"
        yield "</table>"
        for note in block.notes:
            yield f'<p class="tnote">{self.spans(note)}</p>'

    def _signatures(self, block: SignatureTable) -> Iterable[str]:
        yield '<table class="sign short">'
        yield f"<caption>Signatures ({escape(self.document.status)})</caption>"
        heads = "".join(f'<th scope="col">{head}</th>' for head in SIGN_HEADS)
        yield f"<thead><tr>{heads}</tr></thead>"
        yield "<tbody>"
        empty = "".join(f'<td data-head="{head}"></td>' for head in SIGN_HEADS[1:])
        for role in block.roles:
            yield f'<tr><th scope="row">{escape(role)}</th>{empty}</tr>'
        yield "</tbody>"
        yield "</table>"

    def _figure(self, block: Figure) -> Iterable[str]:
        svg = block.svg().replace(
            "<svg", f'<svg role="img" aria-label="{escape(block.alt)}"', 1
        )
        yield f'<figure id="{block.id}">'
        yield svg
        yield f"<figcaption>{self._caption(block)}</figcaption>"
        yield "</figure>"

    def _references(self) -> Iterable[str]:
        yield '<ol class="refs">'
        for r in self.document.references:
            text = f'<bdi title="{escape(r.path)}/text">{escape(r.text)}</bdi>'
            doi = f' doi:<bdi title="{escape(r.path)}/doi">{escape(r.doi)}</bdi>'
            yield f'<li id="ref-{r.number}">{text}{doi if r.doi else ""}{r.remark}</li>'
        yield "</ol>"

    def spans(self, spans: Spans) -> str:
        """Return spans as HTML."""
        return "".join(self._span(span) for span in spans)

    def _span(self, span: Span) -> str:
        if isinstance(span, Text):
            text = escape(span.text)
            return f"<strong>{text}</strong>" if span.strong else text
        if isinstance(span, Value):
            shown = escape(self.document.shown(span))
            return f'<data value="{span.number!r}" title="{escape(span.path)}">{shown}</data>'
        if isinstance(span, Quote):
            text = escape(span.text).replace("_", "_<wbr>")
            return f'<bdi title="{escape(span.path)}">{text}</bdi>'
        if isinstance(span, Link):
            return f'<a href="#{span.target}">{escape(self.document.shown(span))}</a>'
        return self._citation(span)

    def _citation(self, span: Cite) -> str:
        known = self.document.numbers
        numbers = sorted({known[s] for s in span.sources if s in known})
        if not numbers:
            return ""
        links = ", ".join(f'<a href="#ref-{n}">{n}</a>' for n in numbers)
        blank = NO_BREAK if span.spaced else ""
        return f'{blank}<span class="keep">[{links}]</span>'


_SMALL = "font: 7.5pt Arial, 'Liberation Sans', sans-serif; color: #55595c;"


def heading_number(section: Section) -> str:
    """Return the number that stands before a heading."""
    if section.annex and "." not in section.number:
        return f"Annex {section.number}."
    return section.number


def _right(align: str) -> str:
    return ' class="n"' if align == "right" else ""


def _shortened(text: str) -> str:
    return (
        text if len(text) <= LONGEST_HEAD else f"{text[: LONGEST_HEAD - 1].rstrip()}…"
    )


def _css(text: str) -> str:
    """Return a text as a string of a style sheet that nothing can leave."""
    inner = re.sub(
        r"[^A-Za-z0-9 ,.:;()-]", lambda found: f"\\{ord(found.group()):06x} ", text
    )
    return f'"{inner}"'
