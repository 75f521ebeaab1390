"""``formbuf qualify``: table, JSON, and the record that people sign."""

from __future__ import annotations

import json
from pathlib import Path
from typing import Any

import pytest
from cli_runner import Done, formbuf
from qualify_support import change_one_cell

from formbuf.qualify import run as qualify_run

pytest.importorskip("docx")
#: A qualification takes 4 s; the everyday run has that of ``tests/unit/test_qualify.py``.
pytestmark = pytest.mark.slow


@pytest.fixture(scope="module")
def run(tmp_path_factory: pytest.TempPathFactory) -> tuple[Done, Path]:
    folder = tmp_path_factory.mktemp("records")
    done = formbuf(
        "qualify",
        "--record",
        str(folder / "record.md"),
        "--json",
        SOURCE_DATE_EPOCH="1700000000",
    )
    return done, folder / "record.md"


def test_it_passes_and_says_so(run: tuple[Done, Path]) -> None:
    done, _ = run
    assert done.code == 0
    data = done.data()
    assert data["schema"] == "formbuf.qualify/1"
    assert data["passed"] is True
    assert data["performed_utc"] == "2023-11-14T22:13:20Z"
    assert {"formbuf", "knowledge", "numpy"} <= set(data["versions"])
    assert len(data["sha256"]["program"]) == 64
    assert data["unsigned"] == {
        "performed_by": None,
        "reviewed_by": None,
        "approved_by": None,
    }


def test_every_group_tells_its_residuals(run: tuple[Done, Path]) -> None:
    groups: list[dict[str, Any]] = run[0].data()["groups"]
    assert len(groups) > 100
    for group in groups:
        misses = [case["miss"] for case in group["cases"]]
        assert group["mean"] == pytest.approx(sum(misses) / len(misses), abs=1e-12)
        assert abs(group["largest"]) == max(abs(m) for m in misses)
        assert group["verdict"] in ("pass", "known miss", "shown")
        assert bool(group["reason"]) == (group["verdict"] == "known miss")
        assert group["recorded"]["count"] == len(misses)


def test_the_record_is_to_be_signed(run: tuple[Done, Path]) -> None:
    text = run[1].read_text("utf-8")
    for part in (
        "# Qualification record",
        "| Performed by |  |  |  |",
        "| Reviewed by |  |  |  |",
        "| Approved by |  |  |  |",
        "SHA-256 of the knowledge",
        "Seed of random mixtures",
        "2023-11-14T22:13:20Z",
        "## Known misses",
        "## Every case",
    ):
        assert part in text


def _only_water(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(qualify_run, "PARTS", {"water": qualify_run.PARTS["water"]})


def test_records_in_word_and_json(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    import docx

    _only_water(monkeypatch)
    place = tmp_path / "record.docx"
    done = formbuf("qualify", "--record", str(place))
    assert done.code == 0
    assert done.err == f"Wrote {place}\n"
    document = docx.Document(str(place))
    assert document.paragraphs[0].text == "Qualification record"
    cells = {c.text for t in document.tables for row in t.rows for c in row.cells}
    assert {"Performed by", "Signature", "coefficients as coded"} <= cells
    formbuf("qualify", "--record", str(tmp_path / "record.json"))
    data = json.loads((tmp_path / "record.json").read_text("utf-8"))
    assert data["schema"] == "formbuf.qualify/1"


def test_a_failing_group_ends_with_exit_code_1(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    _only_water(monkeypatch)
    change_one_cell("water_properties.csv", tmp_path)
    done = formbuf("qualify", "--knowledge", str(tmp_path))
    assert done.code == 1
    assert "Failed" in done.out
    assert "cases: 1 fails" in done.out
    assert "lie over those of the installation" in " ".join(done.out.split())


@pytest.mark.parametrize("name", ["record.csv", "record", "record.xlsx"])
def test_other_records_are_refused(name: str, tmp_path: Path) -> None:
    done = formbuf("qualify", "--record", str(tmp_path / name))
    assert done.code == 2
    assert ".md, .docx or .json" in done.one_error()
