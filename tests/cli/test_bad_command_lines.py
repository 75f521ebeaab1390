"""Broken command lines and broken briefs: one message, the right exit code.

The briefs are those of `bad_briefs`, given to the commands that read one.
"""

from __future__ import annotations

import os
from dataclasses import dataclass
from pathlib import Path

import pytest
from bad_briefs import BAD_BRIEFS, BAD_OPTIONS, FILES, BadBrief
from cli_runner import EXAMPLES, formbuf

ANTIBODY = str(EXAMPLES / "antibody.toml")
QUICK = ("shortlist", "--ph", "6", "--route", "subcutaneous")
PREDICT = ("predict", "--add", "sucrose=1")
#: Broken as a file rather than in what it says.
BROKEN_FILES = FILES[:9]


@dataclass(frozen=True)
class BadLine:
    """A command line, its exit code, and what must be said about it."""

    name: str
    args: tuple[str, ...]
    code: int
    words: tuple[str, ...]
    hint: str = ""


BAD_LINES = [
    BadLine("command", ("shorlist",), 2, ("no command 'shorlist'",), "shortlist"),
    BadLine("command_far_off", ("xyzzy",), 2, ("no command",), "formbuf --help"),
    BadLine("option", (*QUICK, "--storage", "5"), 2, ("No such option: --storage",)),
    BadLine("option_of_the_frame", ("--verson",), 2, ("No such option: --verson",)),
    BadLine("sub_command", ("knowledge", "lst"), 2, ("No such command 'lst'", "list")),
    BadLine("no_brief", ("shortlist",), 2, ("--ph and --route",), "Give a brief"),
    BadLine("no_route", ("shortlist", "--ph", "6"), 2, ("--route is not given",)),
    BadLine("no_ph", ("shortlist", "--route", "nasal"), 2, ("--ph is not given",)),
    BadLine(
        "brief_and_options",
        ("shortlist", ANTIBODY, "--ph", "6"),
        2,
        ("--ph is given beside the brief",),
    ),
    BadLine("two_briefs", ("shortlist", ANTIBODY, ANTIBODY), 2, ("unexpected extra",)),
    BadLine("ph_no_number", ("shortlist", "--ph", "six"), 3, ("--ph: must", "'six'")),
    BadLine("ph_comma", ("shortlist", "--ph", "6,0"), 3, ("--ph", "6,0"), "a point"),
    BadLine("store_no_number", (*QUICK, "--store", "cold"), 3, ("--store", "cold")),
    BadLine("value_missing", ("shortlist", "--ph"), 2, ("--ph", "requires an arg")),
    BadLine("top_zero", (*QUICK, "--top", "0"), 2, ("--top: 0", "1 or more")),
    BadLine("top_negative", (*QUICK, "--top", "-3"), 2, ("--top: -3",)),
    BadLine("top_no_number", (*QUICK, "--top", "many"), 3, ("--top", "many")),
    BadLine("format", (*QUICK, "--format", "xml"), 2, ("unknown format 'xml'",)),
    BadLine("format_near", (*QUICK, "--format", "jso"), 2, ("'jso'",), "json"),
    BadLine("format_case", (*QUICK, "--format", "JSON"), 2, ("'JSON'",)),
    BadLine("two_formats", (*QUICK, "--json", "--format", "csv"), 2, ("--json",)),
    BadLine("empty_file_name", (*QUICK, "-o", ""), 2, ("file name is empty",)),
    BadLine("folder_for_file", (*QUICK, "-o", "."), 3, ("is a directory",)),
    BadLine("no_such_folder", (*QUICK, "-o", "no/such/x.csv"), 3, ("No such file",)),
    BadLine("knowledge", (*QUICK, "--knowledge", "no/such"), 3, ("no directory",)),
    BadLine("ph_15", ("shortlist", "--ph", "15", "--route", "nasal"), 3, ("--ph",)),
    BadLine("ph_nan", ("shortlist", "--ph", "nan", "--route", "nasal"), 3, ("--ph",)),
    BadLine("ph_minus", ("shortlist", "--ph", "-1", "--route", "nasal"), 3, ("--ph",)),
    BadLine(
        "route", ("shortlist", "--ph", "6", "--route", "sc"), 3, ("--route",), "subcut"
    ),
    BadLine("explain_no_system", ("explain", ANTIBODY), 2, ("SYSTEM",)),
    BadLine(
        "explain_system",
        ("explain", ANTIBODY, "histidin_hydrochloride"),
        3,
        ("SYSTEM: unknown system",),
        "histidine_hydrochloride",
    ),
    BadLine(
        "explain_species",
        ("explain", ANTIBODY, "phosphate"),
        3,
        ("is a species",),
        "sodium_phosphate",
    ),
    BadLine("explain_no_brief", ("explain", "no.toml", "none"), 3, ("no such file",)),
    BadLine("predict_nothing", ("predict",), 2, ("--add is not given",)),
    BadLine("add_no_amount", ("predict", "--add", "sucrose"), 2, ("has no amount",)),
    BadLine("add_no_name", ("predict", "--add", "=5"), 2, ("has no amount",)),
    BadLine("add_empty", ("predict", "--add", ""), 2, ("has no amount",)),
    BadLine(
        "add_twice",
        (*PREDICT, "--add", "sucrose=2"),
        2,
        ("sucrose is given twice",),
        "sum of both",
    ),
    BadLine(
        "add_twice_by_another_name",
        (
            *("predict", "--add", "Na2HPO4=1"),
            *("--add", "disodium_hydrogen_phosphate_anhydrous=1"),
        ),
        2,
        ("given twice",),
    ),
    BadLine(
        "add_no_number",
        ("predict", "--add", "sucrose=a lot"),
        3,
        ("is no number", "'a lot'"),
    ),
    BadLine("add_comma", ("predict", "--add", "sucrose=1,5"), 3, ("1,5",), "point"),
    BadLine("add_negative", ("predict", "--add", "sucrose=-1"), 3, ("allowed 0 or",)),
    BadLine("add_nan", ("predict", "--add", "sucrose=nan"), 3, ("is nan",)),
    BadLine("add_inf", ("predict", "--add", "sucrose=inf"), 3, ("is inf",)),
    BadLine("add_enormous", ("predict", "--add", "sucrose=1e300"), 3, ("sucrose",)),
    BadLine(
        "add_too_much", ("predict", "--add", "sucrose=5000"), 3, ("of each litre",)
    ),
    BadLine(
        "add_unknown", ("predict", "--add", "sucros=1"), 3, ("unknown mat",), "sucrose"
    ),
    BadLine("add_unicode", ("predict", "--add", "蔗糖=1"), 3, ("蔗糖",)),
    BadLine("at_500", (*PREDICT, "--at", "500"), 3, ("temperature", "500")),
    BadLine("at_nan", (*PREDICT, "--at", "nan"), 3, ("temperature nan",)),
    BadLine("at_words", (*PREDICT, "--at", "room"), 3, ("--at", "room")),
    BadLine("basis", (*PREDICT, "--basis", "molar"), 2, ("'molar'",), "molal"),
    BadLine("amounts", (*PREDICT, "--amounts", "mg/mL"), 2, ("'mg/mL'", "g/L")),
    BadLine(
        "amounts_against_basis",
        (*PREDICT, "--amounts", "g/L", "--basis", "molal"),
        2,
        ("contradicts --basis molal",),
        "mmol/kg",
    ),
    BadLine(
        "pressure", (*PREDICT, "--open-to-carbon-dioxide", "-1"), 3, ("pressure", "-1")
    ),
    BadLine("table", ("knowledge", "show", "specis"), 3, ("unknown table",), "species"),
    BadLine("table_missing", ("knowledge", "show"), 2, ("TABLE",)),
    BadLine("row", ("knowledge", "show", "species", "triss"), 3, ("triss",), "tris"),
    BadLine(
        "source", ("knowledge", "sources", "goldberg"), 3, ("unknown source",), "2002"
    ),
    BadLine("brief_missing", ("brief", "check"), 2, ("BRIEF",)),
    BadLine("brief_folder", ("brief", "check", "."), 3, ("is a directory",)),
]


def test_the_table_is_large_and_names_are_unique() -> None:
    names = [bad.name for bad in BAD_LINES]
    assert len(names) >= 40
    assert len(set(names)) == len(names)


@pytest.mark.parametrize("bad", BAD_LINES, ids=lambda bad: bad.name)
def test_bad_command_line(
    bad: BadLine, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.chdir(tmp_path)
    done = formbuf(*bad.args)
    assert done.code == bad.code, done.err
    said = done.one_error()
    for word in bad.words:
        assert word in said
    assert bad.hint in said.partition("Hint: ")[2]
    assert list(tmp_path.iterdir()) == []


@pytest.mark.parametrize("bad", BAD_BRIEFS, ids=lambda bad: bad.name)
@pytest.mark.parametrize(
    "command", [("brief", "check"), ("shortlist",)], ids=["check", "shortlist"]
)
def test_bad_brief_on_the_command_line(
    bad: BadBrief, command: tuple[str, ...], tmp_path: Path
) -> None:
    path = _write(bad, tmp_path)
    done = formbuf(*command, str(path))
    assert done.code == 3
    said = done.one_error()
    assert said.startswith(f"Error: {path}")
    for word in bad.words:
        assert word in said


@pytest.mark.parametrize("bad", BROKEN_FILES, ids=lambda bad: bad.name)
def test_broken_file_for_explain(bad: BadBrief, tmp_path: Path) -> None:
    done = formbuf("explain", str(_write(bad, tmp_path)), "none")
    assert done.code == 3
    assert done.one_error().startswith("Error: ")


def _write(bad: BadBrief, folder: Path) -> Path:
    path = folder / "brief.toml"
    text = bad.text
    path.write_bytes(text if isinstance(text, bytes) else text.encode("utf-8"))
    return path


#: A number written as a text is right on a command line, wrong from Python.
QUICK_OPTIONS = [row for row in BAD_OPTIONS if not isinstance(row[1].get("ph"), str)]


@pytest.mark.parametrize("row", QUICK_OPTIONS, ids=lambda row: row[0])
def test_bad_option_of_the_quick_form(
    row: tuple[str, dict[str, object], str, str],
) -> None:
    _, options, start, hint = row
    args = {"ph": 6.0, "route": "subcutaneous"} | options
    line = ["shortlist"]
    for name, value in args.items():
        for item in value if isinstance(value, list) else [value]:
            line += [f"--{name.replace('_', '-')}", str(item)]
    done = formbuf(*line)
    assert done.code == 3
    said = done.one_error()
    assert said.startswith(f"Error: {start}")
    assert hint in said


@pytest.mark.skipif(os.name == "nt", reason="permissions of another kind")
def test_a_file_that_may_not_be_read(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    path = tmp_path / "brief.toml"
    path.write_text("[ph]\n")
    path.chmod(0)
    if os.access(path, os.R_OK):  # the superuser reads everything

        def refuse(*_: object, **__: object) -> None:
            raise PermissionError(13, "Permission denied")

        monkeypatch.setattr(Path, "open", refuse)
    done = formbuf("shortlist", str(path))
    assert done.code == 3
    assert "permission denied" in done.one_error()
