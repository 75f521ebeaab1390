"""What a report consists of, before any format.

Running text is made of spans. A number that comes from the result is a `Value`, a
text that comes from it a `Quote`; both carry the JSON pointer (RFC 6901) at which the
result holds them, so that every figure can be followed back. `Text` is the wording of
the report itself. Writers add nothing but form.
"""

from __future__ import annotations

import re
from collections.abc import Callable, Iterator, Mapping
from dataclasses import dataclass, field
from typing import Literal, TypeAlias

Align = Literal["left", "right"]

#: Kept together on one line.
NO_BREAK = "\u00a0"
#: Characters that turn or hide text, and those that XML does not know.
_TURNING = re.compile("[\u061c\u200b\u200e\u200f\u2028-\u202e\u2060-\u2069\ufeff]")
_CONTROL = re.compile(
    "[\u0000-\u0008\u000b\u000c\u000e-\u001f\u007f-\u009f\ud800-\udfff]"
)
_OTHER = re.compile("[\ufdd0-\ufdef\ufff9-\uffff]")
REPLACEMENT = "\ufffd"


def clean(text: str) -> str:
    r"""Return a text on one line, without characters that turn, hide or break it.

    Parameters
    ----------
    text : str
        Any text, a user's too.

    Returns
    -------
    str
        Blanks and line ends become one blank; control characters, marks that turn the
        direction of writing and characters that XML forbids become U+FFFD.

    Examples
    --------
    >>> clean("two\n lines"), clean("a\u202eb")
    ('two lines', 'a�b')
    """
    line = " ".join(text.split())
    for pattern in (_TURNING, _CONTROL, _OTHER):
        line = pattern.sub(REPLACEMENT, line)
    return line


@dataclass(frozen=True, slots=True)
class Text:
    """Wording of the report itself."""

    text: str
    strong: bool = False


@dataclass(frozen=True, slots=True)
class Value:
    """A number of the result as it is printed.

    Parameters
    ----------
    text : str
        The digits shown.
    number : float
        The number in full.
    unit : str
        Shown after the digits; empty where a heading or the wording tells it.
    path : str
        JSON pointer into the result.
    """

    text: str
    number: float
    unit: str
    path: str


@dataclass(frozen=True, slots=True)
class Quote:
    """A text of the result, shown as it stands but for characters that `clean` takes.

    Parameters
    ----------
    text : str
    path : str
        JSON pointer into the result.
    """

    text: str
    path: str


@dataclass(frozen=True, slots=True)
class Cite:
    """References by id of the source, shown as numbers in brackets.

    A blank goes before them where ``spaced``; nothing is shown where no source is known.
    """

    sources: tuple[str, ...]
    spaced: bool = True


@dataclass(frozen=True, slots=True)
class Link:
    """A mention of a section, table or figure of the report by its id."""

    target: str


Span: TypeAlias = Text | Value | Quote | Cite | Link
Spans: TypeAlias = tuple[Span, ...]


@dataclass(frozen=True, slots=True)
class Paragraph:
    """Running text."""

    spans: Spans


@dataclass(frozen=True, slots=True)
class Items:
    """A list of short texts."""

    items: tuple[Spans, ...]


@dataclass(frozen=True, slots=True)
class Note:
    """A caution, set off from the text."""

    spans: Spans


@dataclass(frozen=True, slots=True)
class Column:
    """One column of a table; the header holds the unit."""

    header: str
    align: Align = "left"
    width: float = 1.0


@dataclass(frozen=True, slots=True)
class Table:
    """A table; the first cell of a row is its header.

    Parameters
    ----------
    id : str
    caption : tuple of spans
    columns : tuple of Column
        Relative widths steer the paper forms.
    rows : tuple of tuple of spans
        Each as long as the columns.
    notes : tuple of spans
        Shown beneath.
    """

    id: str
    caption: Spans
    columns: tuple[Column, ...]
    rows: tuple[tuple[Spans, ...], ...]
    notes: tuple[Spans, ...] = ()

    def __post_init__(self) -> None:
        """Refuse rows of another length."""
        for row in self.rows:
            if len(row) != len(self.columns):
                msg = f"table {self.id}: row of {len(row)} cells, {len(self.columns)} columns"
                raise ValueError(msg)


@dataclass(frozen=True, slots=True)
class Figure:
    """A figure, drawn when a writer asks for it.

    Parameters
    ----------
    id : str
    caption : tuple of spans
    alt : str
        What the figure shows, for who cannot see it.
    svg : callable
        Returns SVG text.
    png : callable
        Returns PNG bytes at 200 dots per inch.
    """

    id: str
    caption: Spans
    alt: str
    svg: Callable[[], str] = field(repr=False, compare=False)
    png: Callable[[], bytes] = field(repr=False, compare=False)


@dataclass(frozen=True, slots=True)
class OpenPoint:
    """Something that is not settled, and the smallest experiment that would settle it.

    Parameters
    ----------
    id : str
    statement : spans
        What is open and what hangs on it.
    experiment : spans
    decides : spans
        Which outcome means what.
    weight : int
        1 could overturn the choice, 2 could change the formula, 3 confirms it.
    """

    id: str
    statement: Spans
    experiment: Spans
    decides: Spans
    weight: int


@dataclass(frozen=True, slots=True)
class Reference:
    """One entry of the reference list; ``remark`` stands behind it."""

    number: int
    source: str
    text: str
    doi: str
    path: str
    remark: str = ""


@dataclass(frozen=True, slots=True)
class ReferenceList:
    """Stands where the reference list goes."""


@dataclass(frozen=True, slots=True)
class SignatureTable:
    """Empty fields for those who sign; one row per role."""

    roles: tuple[str, ...]


Block: TypeAlias = (
    Paragraph | Items | Note | Table | Figure | ReferenceList | SignatureTable
)


@dataclass(frozen=True, slots=True)
class Section:
    """A section with its blocks and sub-sections.

    Parameters
    ----------
    id : str
    number : str
        ``3``, ``3.1``, ``A``; filled by `formbuf.report.assemble`.
    title : spans
    placement : str
        Where it belongs in a dossier; empty where nowhere.
    blocks : tuple of Block
    sections : tuple of Section
    """

    id: str
    title: Spans
    blocks: tuple[Block, ...] = ()
    sections: tuple[Section, ...] = ()
    placement: str = ""
    number: str = ""
    annex: bool = False

    @property
    def is_empty(self) -> bool:
        """Whether nothing stands in it."""
        return not self.blocks and all(s.is_empty for s in self.sections)


@dataclass(frozen=True, slots=True)
class Document:
    """A whole report.

    Parameters
    ----------
    title : str
    subject : spans
        Name and version of the product.
    story : spans
        The title of the brief; empty where it has none.
    status : str
        Stands on every page.
    footer : str
        Versions of program and knowledge.
    sections : tuple of Section
    labels : mapping of str to str
        Id of a section, table or figure -> ``section 8.1``, ``Table 3``.
    references : tuple of Reference
    open_points : tuple of OpenPoint
    language : str
    """

    title: str
    subject: Spans
    story: Spans
    status: str
    footer: str
    sections: tuple[Section, ...]
    labels: Mapping[str, str]
    references: tuple[Reference, ...]
    open_points: tuple[OpenPoint, ...]
    stamp: str = ""
    language: str = "en-GB"

    @property
    def numbers(self) -> Mapping[str, int]:
        """Number of each reference by id of its source."""
        return {r.source: r.number for r in self.references}

    def shown(self, span: Span) -> str:
        """Return the text of a span as every writer shows it."""
        if isinstance(span, Cite):
            known = self.numbers
            numbers = sorted({known[s] for s in span.sources if s in known})
            if not numbers:
                return ""
            blank = NO_BREAK if span.spaced else ""
            return f"{blank}[{', '.join(str(n) for n in numbers)}]"
        if isinstance(span, Link):
            return self.labels[span.target]
        if isinstance(span, Value) and span.unit:
            return f"{span.text}{NO_BREAK}{span.unit}"
        return span.text


def every_section(sections: tuple[Section, ...]) -> Iterator[Section]:
    """Return sections and their sub-sections in reading order."""
    for section in sections:
        yield section
        yield from every_section(section.sections)


def spans_of(block: Block) -> Iterator[Span]:
    """Return every span of a block in reading order."""
    if isinstance(block, Paragraph | Note):
        yield from block.spans
    elif isinstance(block, Items):
        for item in block.items:
            yield from item
    elif isinstance(block, Figure):
        yield from block.caption
    elif isinstance(block, Table):
        yield from block.caption
        for row in block.rows:
            for cell in row:
                yield from cell
        for note in block.notes:
            yield from note


def plain_text(spans: Spans) -> str:
    """Return spans without citations and links as text."""
    return "".join(s.text for s in spans if isinstance(s, Text | Value | Quote))
