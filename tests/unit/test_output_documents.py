"""Workbooks and Word documents: one sheet per table, inert texts, clear refusals."""

from __future__ import annotations

import importlib.util
import io
from pathlib import Path
from typing import Any

import pytest
from cli_runner import EXAMPLES, formbuf
from hypothesis import given, settings
from hypothesis import strategies as st

from formbuf.output import documents
from formbuf.output.page import Column, Grid, Heading, Items, Page, Paragraph, number
from formbuf.output.word import to_word
from formbuf.output.workbook import FIRST_SHEET, sheet_title, to_workbook

openpyxl = pytest.importorskip("openpyxl")
ANTIBODY = str(EXAMPLES / "antibody.toml")
FORMULAS = ["=1+1", "+cmd", "-2+3", "@SUM(A1)", "=HYPERLINK(1)", "\t=1", "-", "{=A1}"]


def _page(rows: list[dict[str, Any]], *blocks: Any) -> Page:
    return Page(dict, lambda: rows, lambda: list(blocks))


def _book(page: Page) -> Any:
    return openpyxl.load_workbook(io.BytesIO(to_workbook(page)))


def test_a_shortlist_as_a_workbook(tmp_path: Path) -> None:
    place = tmp_path / "shortlist.xlsx"
    done = formbuf("shortlist", ANTIBODY, "-o", str(place))
    assert (done.code, done.out, done.err) == (0, "", f"Wrote {place}\n")
    book = openpyxl.load_workbook(place)
    assert book.sheetnames[:2] == [FIRST_SHEET, "summary"]
    assert len(book.sheetnames) > 4
    data = book[FIRST_SHEET]
    header = [cell.value for cell in data[1]]
    assert {"rank", "system", "concentration_mmol_l", "ph_drift"} <= set(header)
    lead = dict(zip(header, (cell.value for cell in data[2]), strict=True))
    assert lead["rank"] == 1
    wanted = formbuf("shortlist", ANTIBODY, "--json").data()["candidates"][0]
    assert lead["desirability"] == pytest.approx(wanted["desirability"], rel=1e-15)
    assert data.freeze_panes == "A2"


@pytest.mark.parametrize(
    "args",
    [
        ("explain", ANTIBODY, "none"),
        ("predict", "--add", "sucrose=1"),
        ("knowledge", "show", "species"),
        ("knowledge", "sources"),
        ("brief", "check", ANTIBODY),
        ("freeze-thaw", ANTIBODY),
    ],
    ids=lambda args: args[0],
)
@pytest.mark.parametrize("ending", ["xlsx", "docx"])
def test_every_listing_command(
    args: tuple[str, ...], ending: str, tmp_path: Path
) -> None:
    place = tmp_path / f"out.{ending}"
    assert formbuf(*args, "-o", str(place)).code == 0
    assert place.read_bytes()[:2] == b"PK"


@pytest.mark.parametrize("text", FORMULAS)
def test_formulas_are_inert(text: str) -> None:
    grid = Grid((Column("=name"), number("=1")), ((text, text),))
    book = _book(_page([{"=name": text}], Heading("T", 1), grid))
    for sheet in book:
        for row in sheet.iter_rows():
            for cell in row:
                assert cell.data_type != "f", (sheet.title, cell.value)


@given(st.text(max_size=40), st.floats(-1e300, 1e300))
@settings(max_examples=100, deadline=None)
def test_any_text_and_number_is_written(text: str, value: float) -> None:
    sheet = _book(_page([{"name": text, "value": value}]))[FIRST_SHEET]
    assert sheet["B2"].value == pytest.approx(value, rel=1e-15, abs=1e-300)
    assert sheet["A2"].data_type in ("s", "n")


def test_numbers_of_numeric_columns_are_numbers() -> None:
    grid = Grid((Column("Name"), number("mmol/L")), (("5", "10.5"), ("x", "-")))
    sheet = _book(_page([], Heading("One"), grid))["One"]
    assert [c.value for c in sheet[2]] == ["5", 10.5]
    assert [c.value for c in sheet[3]] == ["x", "-"]


@pytest.mark.parametrize(
    ("text", "title"),
    [
        ("Composition, per litre", "Composition, per litre"),
        ("a/b:c*d?[e]", "a b c d e"),
        ("x" * 50, "x" * 31),
        ("", "table"),
        ("'", "table"),
        ("\x00", "table"),
    ],
)
def test_titles_of_sheets(text: str, title: str) -> None:
    assert sheet_title(text, set()) == title


def test_titles_are_told_apart() -> None:
    taken: set[str] = set()
    titles = [sheet_title("Size " + "x" * 40, taken) for _ in range(12)]
    assert len({t.casefold() for t in titles}) == 12
    assert all(len(t) <= 31 for t in titles)


def test_an_empty_page() -> None:
    assert _book(_page([])).sheetnames == [FIRST_SHEET]


def test_a_word_document() -> None:
    docx = pytest.importorskip("docx")
    blocks = [
        Heading("Title \x07", 1),
        Paragraph("strong", strong=True),
        Items(("one", "two")),
        Heading("Table"),
        Grid(tuple(Column(f"c{i}") for i in range(7)), (tuple("abcdefg"),)),
    ]
    document = docx.Document(io.BytesIO(to_word(blocks)))
    assert document.paragraphs[0].text == "Title  "
    assert [c.text for c in document.tables[0].rows[1].cells] == list("abcdefg")
    section = document.sections[0]
    assert section.page_width > section.page_height


@pytest.mark.parametrize(
    ("ending", "package", "instead"),
    [("xlsx", "openpyxl", ".csv"), ("docx", "docx", ".md")],
)
def test_a_missing_package_is_told_before_anything_is_computed(
    ending: str,
    package: str,
    instead: str,
    tmp_path: Path,
    monkeypatch: pytest.MonkeyPatch,
) -> None:
    real = importlib.util.find_spec
    monkeypatch.setattr(
        documents.importlib.util,
        "find_spec",
        lambda name, *rest: None if name == package else real(name, *rest),
    )
    done = formbuf("shortlist", "no_such.toml", "-o", str(tmp_path / f"x.{ending}"))
    assert done.code == 2
    said = done.one_error()
    assert package in said
    assert "pip install '." in said
    assert instead in said


@pytest.mark.parametrize("kind", ["xlsx", "docx"])
def test_office_files_go_to_files_only(kind: str) -> None:
    done = formbuf("shortlist", ANTIBODY, "--format", kind)
    assert done.code == 2
    assert f"-o FILE.{kind}" in done.one_error()


def test_an_asked_for_format_wins_over_the_ending(tmp_path: Path) -> None:
    place = tmp_path / "x.xlsx"
    assert (
        formbuf("predict", "--add", "sucrose=1", "--json", "-o", str(place)).code == 0
    )
    assert place.read_text("utf-8").startswith("{")
