"""The HTML form in a browser: quiet, whole at every width, and clean on paper."""

from __future__ import annotations

import itertools
import shutil
import subprocess
from pathlib import Path

import pytest
from report_support import NAMES, Report, example
from reports.chromium import browse, probe

pytestmark = pytest.mark.browser

STATUS = "DRAFT - unsigned"
#: Points in A4.
A4 = (594.96, 841.92)


@pytest.fixture(params=[*NAMES, "antibody drawn", "hostile"])
def report(request: pytest.FixtureRequest) -> Report:
    name, _, drawn = str(request.param).partition(" ")
    if name == "hostile":
        from report_hostile import hostile

        return hostile("tags")
    return example(name, 200 if drawn else 0)


@pytest.fixture
def page(report: Report, tmp_path: Path) -> Path:
    path = tmp_path / "report.html"
    path.write_text(report.html, encoding="utf-8")
    return path


def test_no_word_on_the_console_and_no_request(page: Path) -> None:
    run = browse(page, "--dump-dom")
    assert run.console == []
    assert run.requests == ()


def test_the_checks_see_a_request_and_an_error(tmp_path: Path) -> None:
    bad = tmp_path / "bad.html"
    bad.write_text(
        "<!DOCTYPE html><title>x</title><img src='http://127.0.0.1:9/x.png'>"
        "<script>console.error('told'); nothing.at.all</script>",
        encoding="utf-8",
    )
    run = browse(bad, "--dump-dom")
    assert any("told" in line for line in run.console)
    assert run.requests == ("http://127.0.0.1:9/x.png",)


@pytest.mark.parametrize("width", [400, 900, 1400])
def test_nothing_overflows_and_every_figure_is_seen(
    report: Report, width: int, tmp_path: Path
) -> None:
    found = probe(report.html, tmp_path, width)
    assert found["width"] == width
    assert found["scroll"] <= width
    assert found["wide"] == []
    drawn = sum(1 for label in report.document.labels.values() if "Figure" in label)
    assert len(found["figures"]) == drawn > 0
    for size in found["figures"]:
        assert size[0] > 0.6 * min(width, 700)
        assert size[1] > 100
    levels = [int(tag[1]) for tag in found["headings"]]
    assert levels[0] == 1
    assert levels.count(1) == 1
    assert all(b - a <= 1 for a, b in itertools.pairwise(levels))
    assert found["title"].startswith("Rationale for the choice of buffer")


def test_the_probe_sees_an_overflow(tmp_path: Path) -> None:
    wide = example("ampoule").html.replace(
        "</main>", "<p style='width: 3000px'>wide</p></main>"
    )
    found = probe(wide, tmp_path, 400)
    assert found["scroll"] > 400
    assert found["wide"]


def test_it_needs_no_script_and_runs_none(report: Report, tmp_path: Path) -> None:
    assert "<script" not in report.html.replace("&lt;script", "")
    planted = tmp_path / "planted.html"
    script = "<script>document.title = 'ran'</script>"
    planted.write_text(
        report.html.replace("</main>", f"</main>{script}"), encoding="utf-8"
    )
    run = browse(planted, "--dump-dom")
    assert "<title>Rationale" in run.out
    assert any("Content Security Policy" in line for line in run.console)


def paper(page: Path, pdf: Path, *options: str) -> str:
    """Print a page and return the text of the sheets."""
    if shutil.which("pdftotext") is None:
        pytest.skip("pdftotext is not installed")
    browse(page, "--no-pdf-header-footer", f"--print-to-pdf={pdf}", *options)
    return subprocess.run(
        ["pdftotext", "-layout", str(pdf), "-"],
        capture_output=True,
        text=True,
        check=True,
    ).stdout


def test_paper_is_clean(page: Path, tmp_path: Path) -> None:
    pdf = tmp_path / "report.pdf"
    text = paper(page, pdf)
    info = subprocess.run(
        ["pdfinfo", str(pdf)], capture_output=True, text=True, check=True
    ).stdout
    size = next(line for line in info.splitlines() if line.startswith("Page size"))
    width, height = (float(x) for x in size.split()[2:5:2])
    assert (width, height) == pytest.approx(A4, abs=1.0)
    sheets = text.rstrip("\f\n").split("\f")
    assert len(sheets) > 8
    for number, sheet in enumerate(sheets, start=1):
        lines = [line.strip() for line in sheet.splitlines() if line.strip()]
        assert STATUS in lines[0], f"page {number} is not marked"
        assert f"Page {number} of {len(sheets)}" in lines[-1]
        body = [line for line in lines[1:-1] if line != STATUS]
        drawn = any(line.startswith("Figure ") for line in body)
        assert drawn or len(body) > 2, f"page {number} is all but empty"
        assert not body[-1].startswith("Table "), f"page {number}: {body[-1]}"


def test_tables_that_go_on_repeat_their_head(page: Path, tmp_path: Path) -> None:
    text = paper(page, tmp_path / "report.pdf")
    heads = sum("Item  " in line and "Basis" in line for line in text.splitlines())
    sheets = text.split("\f")
    first = next(
        i
        for i, s in enumerate(sheets)
        if "basis memory, practice or" in s and "Table" in s
    )
    last = next(i for i, s in enumerate(sheets) if "Ionization of the components" in s)
    assert heads >= 2 or last - first <= 1
