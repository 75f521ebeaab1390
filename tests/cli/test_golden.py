"""Whole outputs against kept texts, read in the diff when they change.

``FORMBUF_GOLDEN=write python -m pytest tests/cli/test_golden.py`` writes them anew.
"""

from __future__ import annotations

import os
from dataclasses import dataclass
from pathlib import Path

import pytest
from cli_runner import ROOT, formbuf

FOLDER = Path(__file__).resolve().parent.parent / "golden"


@dataclass(frozen=True)
class Golden:
    """One command line, its width, and the file with its output."""

    name: str
    args: tuple[str, ...]
    columns: int = 80


SHORTLIST = ("shortlist", "examples/antibody.toml")
GOLDEN = [
    Golden("shortlist_antibody_80.txt", SHORTLIST),
    Golden("shortlist_antibody_120.txt", SHORTLIST, 120),
    Golden("shortlist_antibody.md", (*SHORTLIST, "--format", "markdown")),
    Golden(
        "explain_phosphate_80.txt",
        ("explain", "examples/eye_drop.toml", "sodium_phosphate"),
    ),
    Golden(
        "predict_phosphate_80.txt",
        (
            *("predict", "--add", "potassium_dihydrogen_phosphate=25"),
            *("--add", "disodium_hydrogen_phosphate_anhydrous=25"),
            *("--basis", "molal", "--at", "25", "--at", "5"),
        ),
    ),
    Golden("brief_check_enzyme_80.txt", ("brief", "check", "examples/enzyme.toml")),
]


@pytest.mark.parametrize("golden", GOLDEN, ids=lambda golden: golden.name)
def test_output_is_as_kept(golden: Golden, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.chdir(ROOT)
    done = formbuf(*golden.args, columns=golden.columns)
    assert done.code == 0, done.err
    assert done.err == ""
    path = FOLDER / golden.name
    if os.environ.get("FORMBUF_GOLDEN") == "write":
        path.write_text(done.out, encoding="utf-8")
    assert done.out == path.read_text(encoding="utf-8")


@pytest.mark.parametrize("golden", GOLDEN, ids=lambda golden: golden.name)
def test_kept_texts_fit_their_width(golden: Golden) -> None:
    lines = (FOLDER / golden.name).read_text(encoding="utf-8").splitlines()
    if golden.name.endswith(".txt"):
        assert max(map(len, lines)) <= golden.columns
    assert all("\x1b" not in line for line in lines)


def test_no_kept_text_is_forgotten() -> None:
    ours = {golden.name for golden in GOLDEN}
    prefixes = ("shortlist_", "explain_", "predict_", "brief_check_")
    kept = {p.name for p in FOLDER.iterdir() if p.name.startswith(prefixes)}
    assert kept == ours
