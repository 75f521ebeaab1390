"""The forms of a report: they say the same, and the same input gives the same bytes."""

from __future__ import annotations

import difflib
import io
import itertools
import subprocess
import sys
from pathlib import Path

import pytest
from report_support import (
    EXAMPLES,
    NAMES,
    Page,
    Report,
    docx_blocks,
    example,
    html_blocks,
    markdown_blocks,
    parts,
)

from formbuf.report.content import every_section

#: Long: left out of the everyday run.
pytestmark = pytest.mark.slow

LARGEST_BYTES = 1_000_000
ROOT = Path(__file__).resolve().parent.parent.parent


@pytest.fixture(params=[*NAMES, "antibody drawn"])
def report(request: pytest.FixtureRequest) -> Report:
    name, _, drawn = str(request.param).partition(" ")
    return example(name, 200 if drawn else 0)


def _same(one: list[str], other: list[str]) -> None:
    differing = list(difflib.unified_diff(one, other, lineterm="", n=0))
    assert not differing, "\n".join(differing[:12])


def test_html_and_markdown_say_the_same(report: Report) -> None:
    _same(html_blocks(report.html), markdown_blocks(report.markdown))


def test_html_and_word_say_the_same(report: Report) -> None:
    _same(html_blocks(report.html), docx_blocks(report.docx))


def test_the_comparison_sees_a_changed_number(report: Report) -> None:
    first = next(e for e in Page(report.html).all("data") if e.text == "0.1")
    changed = report.html.replace(f">{first.text}</data>", ">0.7</data>", 1)
    with pytest.raises(AssertionError, match=r"0\.7"):
        _same(html_blocks(changed), markdown_blocks(report.markdown))


def test_html_is_one_small_file_that_needs_nothing(report: Report) -> None:
    assert len(report.html.encode("utf-8")) < LARGEST_BYTES
    page = Page(report.html)
    assert not page.all("script", "link", "img", "iframe", "object", "form", "base")
    for element in page.elements:
        for name, value in element.attributes.items():
            assert not name.startswith("on"), (element.tag, name)
            if name in ("href", "src", "xlink:href", "action", "data"):
                assert value.startswith("#"), (element.tag, name, value)
    style = page.all("style")[0].text
    assert "@import" not in style
    assert "url(" not in style


def test_html_is_built_for_every_reader(report: Report) -> None:
    page = Page(report.html)
    assert page.all("html")[0].attributes["lang"] == "en-GB"
    for tag in ("header", "nav", "main", "footer", "h1"):
        assert len(page.all(tag)) == 1, tag
    assert page.all("a")[0].attributes["href"] == "#main"
    for head in page.all("th"):
        assert head.attributes.get("scope") in ("col", "row")
    for table in page.all("table"):
        assert "Table" in table.text or "Signatures" in table.text
    for drawing in page.all("svg"):
        assert drawing.attributes["role"] == "img"
        assert len(drawing.attributes["aria-label"]) > 60
    levels = [int(e.tag[1]) for e in page.all("h1", "h2", "h3")]
    assert all(b - a <= 1 for a, b in itertools.pairwise(levels))


def test_ids_are_unique_and_links_meet_them(report: Report) -> None:
    page = Page(report.html)
    ids = [e.attributes["id"] for e in page.elements if "id" in e.attributes]
    assert len(ids) == len(set(ids)), {i for i in ids if ids.count(i) > 1}
    for link in page.all("a"):
        assert link.attributes["href"][1:] in ids, link.attributes["href"]


def test_no_section_and_no_table_is_empty(report: Report) -> None:
    for section in every_section(report.document.sections):
        assert section.blocks or section.sections, section.id
    for table in Page(report.html).all("tbody"):
        assert table.text


def test_word_has_styles_captions_and_repeating_heads(report: Report) -> None:
    import docx
    from docx.oxml.ns import qn

    file = docx.Document(io.BytesIO(report.docx))
    names = [p.style.name for p in file.paragraphs if p.style is not None]
    for wanted in ("Title", "Heading 1", "Heading 2", "Annex", "Caption", "Body Text"):
        assert wanted in names, wanted
    for table in file.element.body.iter(qn("w:tbl")):
        first = table.find(qn("w:tr"))
        assert first.find(qn("w:trPr")).find(qn("w:tblHeader")) is not None
    xml = parts(report.docx)["word/document.xml"].decode("utf-8")
    assert xml.count(" SEQ Table ") == sum(
        label.startswith("Table") for label in report.document.labels.values()
    )
    pictures = list(file.element.body.iter(qn("wp:docPr")))
    assert pictures
    assert all(len(p.get("descr") or "") > 60 for p in pictures)
    edge = parts(report.docx)
    assert b"DRAFT - unsigned" in edge["word/header1.xml"]
    assert b" NUMPAGES " in edge["word/footer1.xml"]


def test_draft_and_unsigned_in_every_form(report: Report) -> None:
    for text in (report.html, report.markdown):
        assert text.count("DRAFT - unsigned") >= 2
    rows = [e.text for e in Page(report.html).all("tr")]
    for role in ("Author (formulation)", "Checker of inputs and calculations"):
        assert role in rows, "a field for signing is filled"
    assert "Approver (quality assurance)" in rows


def test_the_same_input_gives_the_same_bytes() -> None:
    code = (
        "import sys, hashlib\n"
        "from report_support import example\n"
        "r = example('eye_drop')\n"
        "for b in (r.html.encode(), r.markdown.encode(), r.docx):\n"
        "    print(hashlib.sha256(b).hexdigest())\n"
    )
    runs = [
        subprocess.run(
            [sys.executable, "-c", code],
            capture_output=True,
            text=True,
            check=True,
            env={
                "PYTHONPATH": f"{ROOT}:{ROOT / 'tests'}",
                "PYTHONHASHSEED": seed,
                "TZ": zone,
            },
        ).stdout
        for seed, zone in (("1", "UTC"), ("2", "Asia/Tokyo"))
    ]
    assert runs[0] == runs[1]
    assert len(set(runs[0].split())) == 3


def test_word_parts_bear_no_time_and_no_user() -> None:
    for name, data in parts(example("ampoule").docx).items():
        if name == "docProps/core.xml":
            assert b"2000-01-01T00:00:00Z" in data
            assert b"<dc:creator>formbuf</dc:creator>" in data
        assert str(Path.home()).encode() not in data
        assert str(EXAMPLES).encode() not in data


def test_no_path_of_the_machine_is_printed() -> None:
    for text in (example("ampoule").html, example("ampoule").markdown):
        assert str(EXAMPLES) not in text
        assert str(Path.home()) not in text
