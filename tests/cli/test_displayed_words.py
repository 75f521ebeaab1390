"""Words on the terminal: one name for one thing, one back-up, endings of files."""

from __future__ import annotations

import os
import threading
from pathlib import Path

import pytest
from cli_runner import EXAMPLES, formbuf

from formbuf.advice.requirement_changes import RequirementChange
from formbuf.advice.scan_grid import bracketed, dotted
from formbuf.library import load_library
from formbuf.output.qualify_page import qualify_page
from formbuf.output.sensitivity_page import _requirement
from formbuf.output.writers import render
from formbuf.qualify.records import Qualification

BULK = str(EXAMPLES / "antibody_bulk.toml")
ANTIBODY = str(EXAMPLES / "antibody.toml")
QUICK = ("shortlist", "--ph", "6.0", "--route", "subcutaneous", "--top", "1")
ENDINGS = ".txt, .json, .csv, .md, .docx or .xlsx"


def _flat(*args: str) -> str:
    return " ".join(formbuf(*args, columns=300).out.split())


def test_there_is_one_back_up() -> None:
    data = formbuf("shortlist", BULK, "--json").data()
    (bare,) = [c for c in data["candidates"] if c["system"] == "none"]
    assert bare["standing"] == "back-up"  # the word of the data stays
    share = round(100.0 * bare["carried_share"])
    assert share > 100
    flat = _flat("shortlist", BULK)
    assert flat.count("Back-up:") == 1
    assert (
        "Without a buffer: enough by calculation, to be confirmed by a titration. The "
        f"product by itself carries {share} % of the loads, estimated from its "
        "isoelectric point and net charge." in flat
    )
    assert "back-up" not in _flat("explain", BULK, "none").split(";")[0]


def test_an_unknown_protein_is_open() -> None:
    flat = _flat("shortlist", ANTIBODY)
    assert "Without a buffer: open. What the protein itself buffers" in flat
    assert "not evaluable" not in flat


def test_rules_apply_or_stay_open() -> None:
    flat = _flat("shortlist", ANTIBODY)
    assert "Rules that apply or stay open, by candidate" in flat
    assert "warning: amine buffer stored away" in flat
    told = _flat("explain", ANTIBODY, "sodium_phosphate")
    assert " applies " in told
    assert " exclusion " in told
    for text in (flat, told):
        assert "fired" not in text
        assert " warn " not in text


def test_the_rule_stands_behind_what_it_says() -> None:
    data = formbuf("shortlist", ANTIBODY, "--json").data()
    lead = data["candidates"][0]
    text = lead["criteria"]["compatibility"]["text"]
    assert text.endswith("(R065)")
    assert ":" not in text


def test_shares_have_a_unit_and_pressures_three_digits() -> None:
    told = formbuf("explain", ANTIBODY, "sodium_phosphate", columns=300).out
    rows = [x for x in told.splitlines() if x.startswith(("tonicity sh", "dose bu"))]
    assert [row.split()[3] for row in rows] == ["share", "share"]
    assert "43.1 Pa" in told
    assert "43.06" not in told


def test_a_requirement_that_changes_nothing_says_which_way() -> None:
    for way, limit, words in (
        ("up", 8.2, "not up to 8.20"),
        ("down", 3.1, "not down to 3.10"),
    ):
        row = RequirementChange("target_ph", way, 6.0, None, limit, "pH", None, "")
        assert words in _requirement(row)


def test_a_qualification_that_passes_does_not_say_that_it_suits() -> None:
    versions = dict.fromkeys(("formbuf", "knowledge", "numpy"), "1")
    platform = dict.fromkeys(("python", "system", "machine"), "x")
    hashes = {"knowledge": "0" * 64}
    empty = Qualification((), versions, platform, hashes, 1, 0.0, "2026-01-01")
    text = render(qualify_page(empty, load_library()), "table")
    assert text.rstrip().endswith("Passing does not say that it suits your use.")


# -- endings of --output -------------------------------------------------------------


@pytest.mark.parametrize("name", ["x.pdf", "x.html", "x.CVS", "x.2026"])
def test_an_ending_that_says_nothing_is_refused(name: str, tmp_path: Path) -> None:
    place = tmp_path / name
    done = formbuf(*QUICK, "-o", str(place))
    assert done.code == 2
    assert f"{place} has '{place.suffix}', allowed {ENDINGS}" in done.one_error()
    assert not place.exists()


@pytest.mark.parametrize(
    "name", ["x", "x.TXT", "x.json", "x.csv", "x.md", "x.markdown"]
)
def test_these_files_are_written(name: str, tmp_path: Path) -> None:
    assert formbuf(*QUICK, "-o", str(tmp_path / name)).code == 0
    assert (tmp_path / name).stat().st_size > 100


@pytest.mark.parametrize("option", [("--format", "csv"), ("--json",)])
def test_a_format_that_is_said_goes_into_any_file(
    option: tuple[str, ...], tmp_path: Path
) -> None:
    place = tmp_path / "x.dat"
    assert formbuf(*QUICK, *option, "-o", str(place)).code == 0
    assert place.stat().st_size > 100


def test_a_pipe_of_any_name_is_written_to(tmp_path: Path) -> None:
    pipe = tmp_path / "x.out"
    os.mkfifo(pipe)
    read: list[str] = []
    reader = threading.Thread(target=lambda: read.append(pipe.read_text()))
    reader.start()
    done = formbuf(*QUICK, "-o", str(pipe))
    reader.join(timeout=30)
    assert done.code == 0
    assert read[0].startswith("Product: pH 6.00")


# -- keys of a scan ------------------------------------------------------------------


@pytest.mark.parametrize("key", ["storage[1].temperature_c", "storage.1.temperature_c"])
def test_an_entry_of_a_list_has_two_spellings(key: str) -> None:
    done = formbuf("scan", ANTIBODY, "--over", f"{key}=5", "--top", "1")
    assert done.code == 0
    assert ",storage[1].temperature_c,rank," in done.out.splitlines()[0]
    wrong = key.replace("1", "9")
    refused = formbuf("scan", ANTIBODY, "--over", f"{wrong}=5").one_error()
    assert "storage[9].temperature_c: '9' is no entry" in refused


def test_both_spellings_are_one_key() -> None:
    keys = ("storage[1].temperature_c", "storage.1.temperature_c")
    over = [word for key in keys for word in ("--over", f"{key}=5,8")]
    done = formbuf("scan", ANTIBODY, *over)
    assert "storage[1].temperature_c is varied twice" in done.one_error()
    assert dotted(keys[0]) == keys[1]
    assert bracketed(keys[1]) == keys[0]
    assert bracketed("target_ph") == "target_ph"


# -- help ----------------------------------------------------------------------------


def test_help_in_plain_words() -> None:
    assert "`" not in formbuf("changes", "-h").out
    flat = " ".join(formbuf("-h").out.split())
    assert "C means degrees Celsius" in flat
    assert "130 interrupted" in flat
    assert "1 no acceptable candidate or a qualification group failed" in flat
    assert "pH is computed to -20." in " ".join(
        formbuf("freeze-thaw", "-h").out.split()
    )


@pytest.mark.parametrize("option", ["--kcl", "--potassium-chloride", "--potassium"])
def test_potassium_chloride_goes_by_its_name(option: str) -> None:
    line = ("freeze-thaw", "--system", "potassium_phosphate", "--concentration", "20")
    done = formbuf(*line, "--ph", "7", "--to", "-2", option, "10")
    assert done.code == 0
    assert "10 mmol/L potassium chloride" in done.out
