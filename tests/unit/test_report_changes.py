"""What differs between two results, and who moved and why."""

from __future__ import annotations

import copy
import json
from collections.abc import Callable
from pathlib import Path
from typing import Any

import pytest
from report_support import example, html_blocks, report_of

from formbuf.errors import EXIT_INPUT, InputError
from formbuf.output.writers import render
from formbuf.report.changes import Changes, compare, names_of
from formbuf.report.changes_page import SAME, changes_page
from formbuf.report.results_file import read_result

BRIEF = {
    "product": {"name": "Case", "route": "subcutaneous"},
    "ph": {"target": 6.0},
    "drug": {"kind": "antibody", "concentration_mg_ml": 50.0},
}
HEAVY = {**BRIEF, "loads": {"acid_mmol_l": 2.0, "base_mmol_l": 2.0}}

#: Long: left out of the everyday run.
pytestmark = pytest.mark.slow


def _moved(changes: Changes, system: str) -> Any:
    return next(m for m in changes.moved if m.system == system)


@pytest.fixture(scope="module")
def light() -> dict[str, Any]:
    return report_of(BRIEF).data


@pytest.fixture(scope="module")
def heavy() -> dict[str, Any]:
    return report_of(HEAVY).data


def test_a_result_is_the_same_as_itself(light: dict[str, Any]) -> None:
    changes = compare(light, copy.deepcopy(light))
    assert changes.is_empty
    page = changes_page(changes, names_of(light))
    assert SAME in render(page, "table")
    assert json.loads(render(page, "json"))["same"] is True
    assert render(page, "csv") == ""


def test_more_load_moves_brief_loads_and_candidates(
    light: dict[str, Any], heavy: dict[str, Any]
) -> None:
    changes = compare(light, heavy)
    keys = {c.key: (c.old, c.new) for c in changes.brief}
    assert keys["loads.acid_mmol_l"] == (0.2, 2.0)
    assert "ph.target" not in keys
    assert {c.key for c in changes.ranking} == {
        "loads.acid_mmol_l",
        "loads.base_mmol_l",
    }
    moved = _moved(changes, "histidine_hydrochloride")
    reasons = {r.what: (r.old, r.new) for r in moved.reasons}
    assert reasons["required_mmol_l"][1] > 5 * reasons["required_mmol_l"][0]
    assert reasons["criterion capacity"][0] > reasons["criterion capacity"][1]
    assert not changes.versions


def test_direction_matters(light: dict[str, Any], heavy: dict[str, Any]) -> None:
    there, back = compare(light, heavy), compare(heavy, light)
    assert {c.key: c.new for c in there.brief} == {c.key: c.old for c in back.brief}


def test_a_newly_dropped_candidate_is_told_with_its_screen(
    light: dict[str, Any], heavy: dict[str, Any]
) -> None:
    gone = [
        m
        for m in compare(light, heavy).moved
        if m.new_standing == "screened out" != m.old_standing
    ]
    assert gone, "the case has lost its point"
    for moved in gone:
        whats = [r.what for r in moved.reasons]
        assert whats[0].startswith("screen "), moved
        assert moved.new_rank is None


def test_other_knowledge_and_program_are_told(light: dict[str, Any]) -> None:
    other = copy.deepcopy(light)
    other["formbuf_version"] = "9.9.9"
    other["knowledge"]["sha256"] = "0" * 64
    changes = compare(light, other)
    assert [c.key for c in changes.versions] == ["formbuf_version", "knowledge.sha256"]
    assert not changes.moved
    assert not changes.is_empty


def test_a_swap_of_lead_and_backup_is_told(light: dict[str, Any]) -> None:
    other = copy.deepcopy(light)
    other["lead"], other["backup"] = light["backup"], light["lead"]
    changes = compare(light, other)
    assert changes.lead is not None
    assert (changes.lead.old, changes.lead.new) == (light["lead"], light["backup"])
    text = render(changes_page(changes, names_of(light)), "table")
    assert "The lead was histidine hydrochloride and is now" in text


def test_a_rule_that_turns_for_all_is_told_once(light: dict[str, Any]) -> None:
    other = copy.deepcopy(light)
    for c in other["candidates"]:
        for f in c["findings"]:
            if f["rule"] == "R126":
                f["outcome"] = "fired"
    changes = compare(light, other)
    assert [(c.key, c.old, c.new) for c in changes.rules] == [
        ("R126", "not evaluable", "fired")
    ]
    assert not any("R126" in r.what for m in changes.moved for r in m.reasons)


def test_tiny_differences_are_no_change(light: dict[str, Any]) -> None:
    other = copy.deepcopy(light)
    other["brief"]["ph"]["target"] *= 1.0 + 1e-15
    for c in other["candidates"]:
        if c["required_mmol_l"]:
            c["required_mmol_l"] *= 1.001
    assert compare(light, other).is_empty


def test_the_report_carries_the_changes(light: dict[str, Any]) -> None:
    report = report_of(HEAVY, old=light)
    section = next(s for s in report.document.sections if s.id == "changes")
    assert section.annex
    blocks = html_blocks(report.html)
    assert "loads.acid_mmol_l" in blocks
    assert "Candidates that moved, or differ in what is proposed" in " ".join(blocks)
    assert "changes" not in [s.id for s in report_of(HEAVY).document.sections]


def test_a_report_against_itself_says_so(light: dict[str, Any]) -> None:
    blocks = html_blocks(report_of(BRIEF, old=light).html)
    assert "No candidate moved." in blocks
    assert "The lead is the same. The back-up is the same." in blocks


def test_a_rationale_and_a_shortlist_can_be_compared(light: dict[str, Any]) -> None:
    import formbuf
    from formbuf.library import load_library
    from formbuf.output.serialise import shortlist_dict
    from formbuf.product.brief import brief_from_mapping

    result = formbuf.shortlist(brief_from_mapping(BRIEF), load_library())
    assert compare(json.loads(json.dumps(shortlist_dict(result))), light).is_empty


def _write(path: Path, text: str | bytes) -> str:
    path.write_bytes(text if isinstance(text, bytes) else text.encode("utf-8"))
    return str(path)


GOOD = {
    "schema": "formbuf.shortlist/1",
    "knowledge": {},
    "brief": {},
    "candidates": [{"system": "a"}],
}


@pytest.mark.parametrize(
    ("text", "words"),
    [
        ("", "is no JSON"),
        ("{", "(line 1): is no JSON"),
        ("[1, 2]", "no result of formbuf"),
        ('{"schema": 3}', "schema 3 cannot be compared"),
        ('{"schema": "other/1"}', "allowed formbuf.shortlist/1"),
        ('{"schema": "formbuf.shortlist/2"}', "version '2'"),
        ('{"schema": "formbuf.shortlist/1"}', "brief is missing"),
        (json.dumps({**GOOD, "candidates": [{}]}), "candidates[0].system is missing"),
        (
            json.dumps({**GOOD, "candidates": [{"system": "a", "criteria": 3}]}),
            "criteria",
        ),
        ('{"schema": NaN}', "NaN is no number of JSON"),
        (b"\xff\xfe\x00", "is no text in UTF-8"),
        ("[" * 100_000, "is no JSON"),
    ],
    ids=range(12),
)
def test_what_is_no_result_is_refused(
    text: str | bytes, words: str, tmp_path: Path
) -> None:
    path = _write(tmp_path / "old.json", text)
    with pytest.raises(InputError) as caught:
        read_result(path)
    assert caught.value.exit_code == EXIT_INPUT
    assert caught.value.message.startswith(path)
    assert words in caught.value.message


@pytest.mark.parametrize(
    "make",
    [lambda folder: str(folder / "none.json"), str, lambda folder: f"{folder}/a\0b"],
    ids=["missing", "folder", "null"],
)
def test_what_cannot_be_read_is_told(
    make: Callable[[Path], str], tmp_path: Path
) -> None:
    with pytest.raises(InputError, match="cannot be read"):
        read_result(make(tmp_path))


def test_a_good_file_is_read(tmp_path: Path) -> None:
    path = _write(tmp_path / "old.json", "\ufeff" + json.dumps(GOOD))
    assert read_result(path)["candidates"] == [{"system": "a"}]
    data = example("ampoule").data
    path = _write(tmp_path / "new.json", json.dumps(data))
    assert compare(read_result(path), data).is_empty
