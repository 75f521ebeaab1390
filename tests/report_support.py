"""Reports of the examples, and what a reader finds in each of their forms."""

from __future__ import annotations

import functools
import io
import re
import zipfile
from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field
from html.parser import HTMLParser
from pathlib import Path
from typing import Any

import formbuf
from formbuf.library import load_library
from formbuf.product.brief import Brief, brief_from_mapping, read_brief
from formbuf.report.assemble import document
from formbuf.report.content import Document
from formbuf.report.data import origin_of, rationale_dict
from formbuf.report.write_docx import to_docx
from formbuf.report.write_html import to_html
from formbuf.report.write_markdown import to_markdown

EXAMPLES = Path(__file__).resolve().parent.parent / "examples"
NAMES = ("ampoule", "antibody", "enzyme", "eye_drop")
VOID = {"meta", "link", "br", "wbr", "col", "img", "hr", "input", "use", "path"}


@dataclass(frozen=True)
class Report:
    """A result with its document."""

    data: dict[str, Any]
    document: Document

    @functools.cached_property
    def html(self) -> str:
        return to_html(self.document)

    @functools.cached_property
    def markdown(self) -> str:
        return to_markdown(self.document)

    @functools.cached_property
    def docx(self) -> bytes:
        return to_docx(self.document)


@functools.cache
def example(name: str, draws: int = 0) -> Report:
    """The report of one example, with draws where they are wanted."""
    path = EXAMPLES / f"{name}.toml"
    result = formbuf.shortlist(read_brief(path), load_library())
    if draws:
        from formbuf.advice.confidence import with_confidence

        result = with_confidence(result, draws=draws)
    data = rationale_dict(result, origin_of(str(path)))
    return Report(data, document(data))


def report_of(brief: Mapping[str, Any] | Brief, old: Any = None) -> Report:
    """The report of a brief given as plain data."""
    read = brief if isinstance(brief, Brief) else brief_from_mapping(brief)
    data = rationale_dict(formbuf.shortlist(read, load_library()), old=old)
    return Report(data, document(data))


@dataclass
class Element:
    """One element of a page, with its text."""

    tag: str
    attributes: dict[str, str]
    pieces: list[str] = field(default_factory=list)

    @property
    def text(self) -> str:
        return tidy("".join(self.pieces))


class Page(HTMLParser):
    """Every element of a page in order, each with the text inside it."""

    def __init__(self, html: str) -> None:
        super().__init__(convert_charrefs=True)
        self.elements: list[Element] = []
        self.open: list[Element] = []
        self.loose: list[str] = []
        self.feed(html)
        self.close()
        assert not self.open, f"left open: {[e.tag for e in self.open]}"

    def handle_starttag(
        self, tag: str, attrs: Sequence[tuple[str, str | None]]
    ) -> None:
        element = Element(tag, {k: v or "" for k, v in attrs})
        self.elements.append(element)
        if tag not in VOID:
            self.open.append(element)

    def handle_startendtag(
        self, tag: str, attrs: Sequence[tuple[str, str | None]]
    ) -> None:
        self.elements.append(Element(tag, {k: v or "" for k, v in attrs}))

    def handle_endtag(self, tag: str) -> None:
        if tag in VOID:
            return
        assert self.open, tag
        assert self.open[-1].tag == tag, (tag, [e.tag for e in self.open])
        self.open.pop()

    def handle_data(self, data: str) -> None:
        for element in self.open:
            element.pieces.append(data)
        hidden = {"style", "svg", "title", "data", "bdi", "script"}
        if not hidden & {e.tag for e in self.open}:
            self.loose.append(data)

    def all(self, *tags: str) -> list[Element]:
        return [e for e in self.elements if e.tag in tags]


def tidy(text: str) -> str:
    """Text with single blanks."""
    return " ".join(text.replace("\u2002", " ").split())


def html_blocks(html: str) -> list[str]:
    """Texts of a page in reading order, contents and drawings left out."""
    body = re.sub(r"<nav.*?</nav>", "", html, flags=re.DOTALL)
    body = re.sub(r"<svg.*?</svg>", "", body, flags=re.DOTALL)
    body = re.sub(r'<a class="skip".*?</a>', "", body)
    body = re.sub(r'<div class="strip".*?</div>', "", body)
    page = Page(body)
    tags = ("h1", "h2", "h3", "p", "li", "caption", "th", "td", "figcaption", "footer")
    return [e.text for e in page.all(*tags) if e.text]


def markdown_blocks(text: str) -> list[str]:
    """Texts of a Markdown document in reading order, read by a parser of CommonMark."""
    from markdown_it import MarkdownIt

    found = []
    for token in MarkdownIt("commonmark", {"html": True}).enable("table").parse(text):
        assert token.type not in ("html_block", "fence", "code_block"), token.content
        if token.type != "inline":
            continue
        for child in token.children or ():
            assert child.type not in ("html_inline", "link_open", "image"), (
                token.content
            )
        line = tidy("".join(c.content for c in token.children or ()))
        if line and not line.startswith("Drawing: "):
            found.append(line)
    return found


def docx_blocks(data: bytes) -> list[str]:
    """Texts of a Word file in reading order, with the numbers that Word gives."""
    import docx
    from docx.oxml.ns import qn

    body = docx.Document(io.BytesIO(data)).element.body
    counts = {"Heading1": 0, "Heading2": 0, "Annex": 0, "AnnexPart": 0}
    found = []
    for paragraph in body.iter(qn("w:p")):
        style = _style(paragraph)
        text = tidy("".join(t.text or "" for t in paragraph.iter(qn("w:t"))))
        if not text or style in ("TOC1", "TOC2", "ContentsHead"):
            continue
        if style == "Reference":
            text = re.sub(r"^\d+\. ", "", text)
        found.append(tidy(f"{_number(style, counts)} {text}"))
    return found


def _style(paragraph: Any) -> str:
    from docx.oxml.ns import qn

    properties = paragraph.find(qn("w:pPr"))
    style = None if properties is None else properties.find(qn("w:pStyle"))
    return "" if style is None else str(style.get(qn("w:val")))


def _number(style: str, counts: dict[str, int]) -> str:
    if style == "Heading1":
        counts["Heading1"] += 1
        counts["Heading2"] = 0
        return str(counts["Heading1"])
    if style == "Heading2":
        counts["Heading2"] += 1
        return f"{counts['Heading1']}.{counts['Heading2']}"
    if style == "Annex":
        counts["Annex"] += 1
        counts["AnnexPart"] = 0
        return f"Annex {_letter(counts)}."
    if style == "AnnexPart":
        counts["AnnexPart"] += 1
        return f"{_letter(counts)}.{counts['AnnexPart']}"
    return ""


def _letter(counts: Mapping[str, int]) -> str:
    return chr(ord("A") + counts["Annex"] - 1)


def parts(data: bytes) -> dict[str, bytes]:
    """Parts of a Word file by name."""
    with zipfile.ZipFile(io.BytesIO(data)) as file:
        return {name: file.read(name) for name in file.namelist()}
