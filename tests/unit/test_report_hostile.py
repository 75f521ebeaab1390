"""Hostile text in every free-text field is harmless in every form."""

from __future__ import annotations

import csv
import io
import re

import pytest
from report_hostile import HOSTILE, LONG, brief, hostile, tame
from report_support import Page, docx_blocks, parts, report_of

from formbuf.output.writers import render
from formbuf.report.changes import compare, names_of
from formbuf.report.changes_page import changes_page
from formbuf.report.content import clean
from formbuf.report.drawing import label
from formbuf.report.write_html import _css
from formbuf.report.write_markdown import escaped, opened

#: Long: left out of the everyday run.
pytestmark = pytest.mark.slow

EVERY_DAY = ("tags", "markdown", "setext", "turned", "long")
KINDS = [
    name if name in EVERY_DAY else pytest.param(name, marks=pytest.mark.slow)
    for name in (*HOSTILE, "long")
]


@pytest.fixture(params=KINDS)
def kind(request: pytest.FixtureRequest) -> str:
    return str(request.param)


def _text(kind: str) -> str:
    return LONG if kind == "long" else HOSTILE[kind]


TAGS = {
    "html",
    "head",
    "meta",
    "title",
    "style",
    "body",
    "a",
    "div",
    "header",
    "p",
    "h1",
    "h2",
    "h3",
    "nav",
    "ul",
    "li",
    "main",
    "section",
    "table",
    "caption",
    "colgroup",
    "col",
    "thead",
    "tbody",
    "tr",
    "th",
    "td",
    "ol",
    "data",
    "bdi",
    "strong",
    "span",
    "figure",
    "figcaption",
    "footer",
    "wbr",
    "svg",
    "defs",
    "g",
    "path",
    "use",
    "rect",
    "clippath",
}


def test_html_holds_the_text_and_no_markup_of_it(kind: str) -> None:
    report = hostile(kind)
    page = Page(report.html)
    assert {e.tag for e in page.elements} <= TAGS
    for element in page.elements:
        assert not [name for name in element.attributes if name.startswith("on")]
        href = element.attributes.get("href", element.attributes.get("xlink:href", "#"))
        assert href.startswith("#")
    styles = page.all("style")
    assert len([s for s in styles if "@page" in s.text]) == 1
    shown = " ".join(clean(_text(kind)).split())
    quotes = [e.text for e in page.all("bdi")]
    assert sum(shown == q for q in quotes) >= 5, shown[:80]
    assert page.all("title")[0].text.startswith("Rationale for the choice of buffer")


def test_the_style_sheet_keeps_its_shape(kind: str) -> None:
    style = next(
        e.text for e in Page(hostile(kind).html).all("style") if "@page" in e.text
    )
    rule = style[style.rindex("@page") :]
    assert rule.count("{") == rule.count("}") == 5
    assert rule.count('"') % 2 == 0
    strings = re.findall(r'content: "([^"]*)"', rule)
    assert all(re.fullmatch(r"[A-Za-z0-9 ,.:;()\\-]*", s) for s in strings)


def test_markdown_reads_none_of_it_as_markup(kind: str) -> None:
    from markdown_it import MarkdownIt

    shape = _shape(tame().markdown)
    parser = MarkdownIt("commonmark", {"html": True, "linkify": False}).enable("table")
    assert _shape(hostile(kind).markdown) == shape
    for token in parser.parse(hostile(kind).markdown):
        kinds = {c.type for c in token.children or ()}
        assert kinds <= {"text", "strong_open", "strong_close", "text_special"}, kinds


def _shape(text: str) -> list[str]:
    from markdown_it import MarkdownIt

    parser = MarkdownIt("commonmark", {"html": True}).enable("table")
    return [t.type for t in parser.parse(text)]


def test_word_holds_the_text_as_text(kind: str) -> None:
    from lxml import etree

    report = hostile(kind)
    shown = " ".join(clean(_text(kind)).split())
    assert sum(shown == b for b in docx_blocks(report.docx)) >= 4
    for name, data in parts(report.docx).items():
        if name.endswith((".xml", ".rels")):
            root = etree.fromstring(data)
            if name.endswith(".rels"):
                modes = [r.get("TargetMode") for r in root]
                assert "External" not in modes, name
            for code in root.iter("{*}instrText"):
                assert re.fullmatch(
                    r"( (SEQ (Table|Figure) \\\* ARABIC|PAGE|NUMPAGES|TOC .*) )",
                    code.text or "",
                ), code.text
            assert not list(root.iter("{*}fldSimple"))


def test_csv_of_changes_runs_nothing(kind: str) -> None:
    old, new = tame().data, hostile(kind).data
    page = changes_page(compare(old, new), names_of(old, new))
    rows = list(csv.reader(io.StringIO(render(page, "csv"))))
    assert len({len(row) for row in rows}) == 1
    for row in rows[1:]:
        for cell in row:
            assert not re.match(r"[=@\t\r]|[+-](?![\d.])|[+-][\d.]+[^\d.e+-]", cell), (
                cell
            )


def test_text_and_json_of_changes_can_be_written(kind: str) -> None:
    import json

    old, new = hostile(kind).data, tame().data
    page = changes_page(compare(old, new), names_of(old, new))
    assert json.loads(render(page, "json"))["same"] is False
    for form in ("table", "markdown"):
        assert "\u202e" not in render(page, form)  # type: ignore[arg-type]


@pytest.mark.parametrize("name", ["tags", "formula", "emoji", "dollars", "css"])
def test_a_brief_that_takes_the_text_is_reported(name: str) -> None:
    report = report_of(brief(HOSTILE[name]))
    told = [e.text for e in Page(report.html).all("bdi")]
    assert clean(HOSTILE[name]) in told


def test_turning_marks_are_shown_as_replaced() -> None:
    assert clean("a\u202eb\u2066c\u200b\ufeffd") == "a\ufffdb\ufffdc\ufffd\ufffdd"
    assert clean("a\x00b\x1bc\ud800d\uffff") == "a\ufffdb\ufffdc\ufffdd\ufffd"
    assert clean("zero\u200djoiner stays") == "zero\u200djoiner stays"


@pytest.mark.parametrize("text", HOSTILE.values(), ids=list(HOSTILE))
def test_a_legend_is_short_and_drawn_as_it_stands(text: str) -> None:
    shown = label(text)
    assert 0 < len(shown) <= 39
    assert not shown.startswith("_")
    assert all(ord(letter) < 0x2027 for letter in shown)


def test_escapes_of_markdown_and_style() -> None:
    assert escaped("<a> [b](c) `d` *e* _f_ g_h") == (
        "\\<a\\> \\[b\\](c) \\`d\\` \\*e\\* \\_f\\_ g_h"
    )
    assert opened("12) twelve") == "12\\) twelve"
    assert opened("=== x") == "\\=== x"
    assert (
        _css('a"}</style>') == '"a\\000022 \\00007d \\00003c \\00002f style\\00003e "'
    )
