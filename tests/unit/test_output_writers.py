"""Formats, cells that no spreadsheet runs, and files written whole or not at all."""

from __future__ import annotations

import csv
import io
import json
import os
import stat
from pathlib import Path
from typing import Any

import pytest
from hypothesis import given
from hypothesis import strategies as st

from formbuf.cli.emit import Target
from formbuf.errors import OutputError, UsageError
from formbuf.output import writers
from formbuf.output.page import Page
from formbuf.output.writers import (
    FORMATS,
    as_format,
    csv_cell,
    json_text,
    render,
    write_file,
)

FORMULAS = ["=1+1", "+cmd", "-2+3", "@SUM(A1)", "\tx", "\nx", "=HYPERLINK(1)", "-", "+"]
NUMBERS = ["-40", "+0.35", "-1e-3", "-.5"]


def _page(*rows: dict[str, Any]) -> Page:
    return Page(lambda: {"a": 1}, lambda: rows, list)


@pytest.mark.parametrize("text", FORMULAS)
def test_formulas_are_made_inert(text: str) -> None:
    assert csv_cell(text) == f"'{text}"


@pytest.mark.parametrize("text", NUMBERS)
def test_numbers_stay_numbers(text: str) -> None:
    assert csv_cell(text) == text


@pytest.mark.parametrize(
    ("value", "cell"),
    [
        (None, ""),
        (True, "yes"),
        (False, "no"),
        (5, "5"),
        (0.1, "0.1"),
        (1 / 3, "0.3333333333333333"),
        (["a", "=b"], "a; '=b"),
        (["=a", "b"], "'=a; b"),
        ([], ""),
        ("plain", "plain"),
        (" =x", " =x"),
        ("a\r\nb\rc", "a\nb\nc"),
    ],
)
def test_cells(value: object, cell: str) -> None:
    assert csv_cell(value) == cell


@given(st.text(max_size=30))
def test_no_cell_begins_like_a_formula_unless_it_is_a_number(text: str) -> None:
    cell = csv_cell(text)
    if cell.startswith(("=", "+", "-", "@", "\t", "\n")):
        float(cell)
    lines = text.replace("\r\n", "\n").replace("\r", "\n")
    assert cell in (lines, f"'{lines}")


@given(st.lists(st.tuples(st.text(max_size=9), st.floats(allow_nan=False)), max_size=4))
def test_csv_is_read_back(rows: list[tuple[str, float]]) -> None:
    page = _page(*({"name": name, "value": value} for name, value in rows))
    read = list(csv.DictReader(io.StringIO(render(page, "csv"), newline="")))
    assert len(read) == len(rows)
    for (name, value), row in zip(rows, read, strict=True):
        assert row["name"] == csv_cell(name)
        assert float(row["value"]) == value


def test_csv_without_rows_is_empty() -> None:
    assert render(_page(), "csv") == ""


def test_json_is_plain_ascii_and_ends_in_a_line() -> None:
    text = json_text({"name": "Phosphat µ 緩"})
    assert text.isascii()
    assert text.endswith("}\n")
    assert json.loads(text) == {"name": "Phosphat µ 緩"}


@pytest.mark.parametrize("value", [float("nan"), float("inf"), -float("inf")])
def test_json_never_holds_what_is_no_number(value: float) -> None:
    with pytest.raises(ValueError, match="JSON"):
        json_text({"x": value})


@pytest.mark.parametrize("name", FORMATS)
def test_every_format_is_known_and_renders(name: str) -> None:
    assert render(_page({"a": 1}), as_format(name)).endswith("\n")


def test_an_unknown_format_names_the_nearest() -> None:
    with pytest.raises(UsageError, match="allowed table, json") as caught:
        as_format("jsn")
    assert caught.value.hint == "Did you mean json?"


@pytest.mark.parametrize(
    ("target", "expected"),
    [
        (Target(), "table"),
        (Target(json=True), "json"),
        (Target("csv", output="x.json"), "csv"),
        (Target(output="x.JSON"), "json"),
        (Target(output="x.md"), "markdown"),
        (Target(output="x.csv"), "csv"),
        (Target(output="x"), "table"),
        (Target("json", json=True), "json"),
    ],
)
def test_the_format_follows_the_options_then_the_ending(
    target: Target, expected: str
) -> None:
    assert target.chosen() == expected


def test_two_formats_contradict_each_other() -> None:
    with pytest.raises(UsageError, match="--json is given beside --format csv"):
        Target("csv", json=True).check()


def test_an_empty_file_name_is_refused() -> None:
    with pytest.raises(UsageError, match="file name is empty"):
        Target(output=" ").check()


def test_a_file_is_written_and_replaced(tmp_path: Path) -> None:
    path = tmp_path / "out.txt"
    write_file(path, "one µ\n")
    assert path.read_bytes() == "one µ\n".encode()
    write_file(path, "two\n")
    assert path.read_text() == "two\n"
    assert [p.name for p in tmp_path.iterdir()] == ["out.txt"]


def test_permissions_are_kept(tmp_path: Path) -> None:
    path = tmp_path / "out.txt"
    path.write_text("old")
    path.chmod(0o640)
    write_file(path, "new")
    assert stat.S_IMODE(path.stat().st_mode) == 0o640


def test_a_new_file_has_the_usual_permissions(tmp_path: Path) -> None:
    plain, ours = tmp_path / "plain", tmp_path / "ours"
    plain.write_text("x")
    write_file(ours, "x")
    assert plain.stat().st_mode == ours.stat().st_mode


def test_a_link_is_followed(tmp_path: Path) -> None:
    path, link = tmp_path / "real.txt", tmp_path / "link.txt"
    path.write_text("old")
    link.symlink_to(path)
    write_file(link, "new")
    assert link.is_symlink()
    assert path.read_text() == "new"


def test_a_full_disk_leaves_the_old_file(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    path = tmp_path / "out.txt"
    path.write_text("old")

    def full(*_: object) -> None:
        raise OSError(28, "No space left on device")

    monkeypatch.setattr(writers.os, "fsync", full)
    with pytest.raises(OutputError, match=r"out\.txt: cannot be written \(No space"):
        write_file(path, "new")
    assert path.read_text() == "old"
    assert [p.name for p in tmp_path.iterdir()] == ["out.txt"]


def test_a_read_only_file_is_left_alone(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    path = tmp_path / "out.txt"
    path.write_text("old")
    path.chmod(0o444)
    monkeypatch.setattr(writers.os, "access", lambda *_: False)  # the superuser may
    with pytest.raises(OutputError, match="read-only"):
        write_file(path, "new")
    assert path.read_text() == "old"


def test_a_read_only_folder(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    path = tmp_path / "out.txt"
    path.write_text("old")

    def refuse(**_: object) -> None:
        raise PermissionError(13, "Permission denied")

    monkeypatch.setattr(writers.tempfile, "mkstemp", refuse)
    with pytest.raises(OutputError, match="Permission denied"):
        write_file(path, "new")
    assert path.read_text() == "old"


@pytest.mark.parametrize(
    ("name", "words"),
    [
        ("nowhere/out.txt", "No such file"),
        ("x" * 300, "too long"),
        ("a\0b", "null"),
        (".", "is a directory"),
    ],
)
def test_places_where_nothing_can_be_written(
    tmp_path: Path, name: str, words: str
) -> None:
    with pytest.raises(OutputError, match=words) as caught:
        write_file(tmp_path / name, "x")
    assert len(caught.value.message.splitlines()) == 1


def test_a_device_is_written_to_as_it_is() -> None:
    write_file(Path(os.devnull), "x")
    assert not Path(os.devnull).is_file()
