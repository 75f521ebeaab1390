"""The Word form in an office program: pages, numbering, headings, marks."""

from __future__ import annotations

import functools
import io
import re
import shutil
import subprocess
import tempfile
from pathlib import Path

import pytest
from report_support import NAMES, Report, example

pytestmark = pytest.mark.office

SECONDS = 180
STATUS = "DRAFT - unsigned"


@functools.cache
def pages(name: str) -> tuple[str, ...]:
    """Text of each page after conversion by LibreOffice."""
    office = shutil.which("soffice")
    if office is None or shutil.which("pdftotext") is None:
        pytest.skip("LibreOffice or pdftotext is not installed")
    with tempfile.TemporaryDirectory() as text:
        folder = Path(text)
        (folder / "report.docx").write_bytes(_report(name).docx)
        done = subprocess.run(
            [
                office,
                f"-env:UserInstallation={(folder / 'profile').as_uri()}",
                "--headless",
                "--convert-to",
                "pdf",
                "--outdir",
                str(folder),
                str(folder / "report.docx"),
            ],
            capture_output=True,
            text=True,
            timeout=SECONDS,
            check=False,
        )
        assert (folder / "report.pdf").is_file(), done.stderr
        read = subprocess.run(
            ["pdftotext", "-layout", str(folder / "report.pdf"), "-"],
            capture_output=True,
            text=True,
            check=True,
        )
        return tuple(read.stdout.rstrip("\f\n").split("\f"))


def _report(name: str) -> Report:
    if name == "hostile":
        from report_hostile import hostile

        return hostile("tags")
    return example(name)


@pytest.fixture(params=[*NAMES, "hostile"])
def name(request: pytest.FixtureRequest) -> str:
    return str(request.param)


def test_every_page_is_marked_and_numbered(name: str) -> None:
    sheets = pages(name)
    assert len(sheets) > 8
    for number, sheet in enumerate(sheets, start=1):
        lines = [line.strip() for line in sheet.splitlines() if line.strip()]
        assert lines[0].endswith(STATUS), f"page {number}: {lines[0]}"
        assert lines[-1].endswith(f"Page {number} of {len(sheets)}"), lines[-1]


def test_headings_are_numbered_by_the_program(name: str) -> None:
    text = "\n".join(pages(name))
    for section in _report(name).document.sections:
        mark = f"Annex {section.number}." if section.annex else section.number
        title = "".join(s.text for s in section.title if hasattr(s, "text"))
        shown = re.escape(title).replace("\\ ", r"\s+")
        found = re.findall(rf"^\s*{re.escape(mark)}\s+{shown}", text, re.MULTILINE)
        assert len(found) >= 2, (mark, title)  # in the contents and in the text


def test_captions_are_counted_and_no_field_is_broken(name: str) -> None:
    text = "\n".join(pages(name))
    assert "Error!" not in text
    labels = _report(name).document.labels.values()
    last = sum(label.startswith("Table") for label in labels)
    for number in (1, 2, last):
        assert re.search(rf"^\s*Table {number}\. ", text, re.MULTILINE), number


def test_no_section_is_empty_and_headings_can_be_walked(name: str) -> None:
    import docx

    file = docx.Document(io.BytesIO(_report(name).docx))
    body = list(file.element.body.iterchildren())
    heads = [
        i
        for i, element in enumerate(body)
        if element.tag.endswith("}p")
        and element.style in ("Heading1", "Heading2", "Annex", "AnnexPart")
    ]
    assert len(heads) > 20
    for here, there in zip(heads, [*heads[1:], len(body)], strict=True):
        deeper = there < len(body) and (
            body[here].style in ("Heading1", "Annex")
            and body[there].style in ("Heading2", "AnnexPart")
        )
        assert there - here > 1 or deeper, "".join(body[here].itertext())


def test_tables_can_be_edited_and_repeat_their_head(name: str) -> None:
    import docx

    file = docx.Document(io.BytesIO(_report(name).docx))
    assert len(file.tables) > 15
    for table in file.tables:
        assert table.rows[0]._tr.trPr.xpath("w:tblHeader")
        assert len({len(row.cells) for row in table.rows}) == 1
