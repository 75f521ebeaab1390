"""Broken briefs and options: one clear message each, with file, key and line, exit 3."""

from __future__ import annotations

import os
from pathlib import Path
from typing import Any

import pytest
from bad_briefs import (
    BAD_BRIEFS,
    BAD_OPTIONS,
    FILES,
    GOOD_HEAD,
    NAMES,
    PARTS,
    VALUES,
    BadBrief,
)

from formbuf.errors import EXIT_INPUT, InputError
from formbuf.library import Library, load_library
from formbuf.product.brief import brief_from_options, complete, read_brief


@pytest.fixture(scope="module")
def library() -> Library:
    return load_library()


def _write(bad: BadBrief, folder: Path) -> Path:
    path = folder / "brief.toml"
    text = bad.text
    path.write_bytes(text if isinstance(text, bytes) else text.encode("utf-8"))
    return path


def test_the_table_is_large_and_names_are_unique() -> None:
    names = [bad.name for bad in BAD_BRIEFS]
    assert len(names) >= 40
    assert len(set(names)) == len(names)


@pytest.mark.parametrize("bad", BAD_BRIEFS, ids=lambda bad: bad.name)
def test_bad_brief(bad: BadBrief, tmp_path: Path, library: Library) -> None:
    path = _write(bad, tmp_path)
    with pytest.raises(InputError) as caught:
        complete(read_brief(path), library)
    error = caught.value
    assert error.exit_code == EXIT_INPUT
    lines = error.message.splitlines()
    assert all(line.startswith(str(path)) for line in lines), error.message
    head = (
        f"{path} {bad.where}" if bad.where.startswith("(") else f"{path}: {bad.where}"
    )
    assert any(line.startswith(head) for line in lines), error.message
    for word in bad.words:
        assert word in error.message, error.message
    assert bad.hint in error.hint, error.hint
    assert all(len(line) < len(str(path)) + 330 for line in lines), error.message


@pytest.mark.parametrize("bad", [*FILES, *VALUES, *PARTS], ids=lambda bad: bad.name)
def test_one_mistake_makes_one_line(bad: BadBrief, tmp_path: Path) -> None:
    with pytest.raises(InputError) as caught:
        read_brief(_write(bad, tmp_path))
    assert len(caught.value.message.splitlines()) == 1


@pytest.mark.parametrize(
    "bad", [bad for bad in BAD_BRIEFS if bad not in NAMES], ids=lambda bad: bad.name
)
def test_mistakes_of_form_need_no_library(bad: BadBrief, tmp_path: Path) -> None:
    with pytest.raises(InputError):
        read_brief(_write(bad, tmp_path))


def test_missing_file_names_the_nearest(tmp_path: Path) -> None:
    (tmp_path / "antibody.toml").write_text(GOOD_HEAD)
    with pytest.raises(InputError, match="no such file") as caught:
        read_brief(tmp_path / "antibdy.toml")
    assert "antibody.toml" in caught.value.hint


def test_missing_folder() -> None:
    with pytest.raises(InputError, match="no such file"):
        read_brief("nowhere/at/all.toml")


def test_directory(tmp_path: Path) -> None:
    (tmp_path / "one.toml").write_text(GOOD_HEAD)
    with pytest.raises(InputError, match="is a directory") as caught:
        read_brief(tmp_path)
    assert "one.toml" in caught.value.hint


def test_unreadable_file(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    path = tmp_path / "brief.toml"
    path.write_text(GOOD_HEAD)
    path.chmod(0)
    if os.access(path, os.R_OK):  # the superuser reads everything

        def refuse(*_: Any, **__: Any) -> None:
            raise PermissionError(13, "Permission denied")

        monkeypatch.setattr(Path, "open", refuse)
    with pytest.raises(InputError, match=r"brief\.toml: .*permission denied"):
        read_brief(path)


def test_path_that_cannot_exist() -> None:
    with pytest.raises(InputError, match="cannot be read"):
        read_brief("a\0b.toml")
    with pytest.raises(InputError, match="cannot be read"):
        read_brief("x" * 5000)


def test_all_mistakes_at_once_in_the_order_of_the_file(tmp_path: Path) -> None:
    text = (
        '[product]\nroute = "iv"\n[ph]\ntarget = 15\n[dose]\nvolume_ml = -1\n'
        '[drug]\nkind = "mab"\n'
    )
    path = tmp_path / "brief.toml"
    path.write_text(text)
    with pytest.raises(InputError) as caught:
        read_brief(path)
    lines = caught.value.message.splitlines()
    keys = [line.removeprefix(f"{path}: ").split(" (line")[0] for line in lines]
    assert keys == ["product.route", "ph.target", "dose.volume_ml", "drug.kind"]
    assert "'intravenous'" in caught.value.hint
    assert "'antibody'" in caught.value.hint


def test_very_many_mistakes_are_cut(tmp_path: Path) -> None:
    path = tmp_path / "brief.toml"
    many = "".join(f"x{number} = 1\n" for number in range(200))
    path.write_text(GOOD_HEAD + many)
    with pytest.raises(InputError) as caught:
        read_brief(path)
    lines = caught.value.message.splitlines()
    assert len(lines) == 26
    assert lines[-1].endswith("and 175 more faults")


@pytest.mark.parametrize(
    ("options", "start", "hint"),
    [row[1:] for row in BAD_OPTIONS],
    ids=[row[0] for row in BAD_OPTIONS],
)
def test_bad_options(
    options: dict[str, Any], start: str, hint: str, library: Library
) -> None:
    good: dict[str, Any] = {"ph": 6.0, "route": "subcutaneous"}
    with pytest.raises(InputError) as caught:
        complete(brief_from_options(**(good | options)), library)
    assert caught.value.message.startswith(start)
    assert len(caught.value.message.splitlines()) == 1
    assert hint in caught.value.hint
