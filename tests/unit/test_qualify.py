"""The qualification: what it computes, how it judges, and that a change is seen."""

from __future__ import annotations

import json
import time
from pathlib import Path

import pytest
from qualify_support import TELLING, change_one_cell, tables
from reference_tables import library

from formbuf.chemistry import activity, water
from formbuf.errors import FormbufError
from formbuf.library import load_library
from formbuf.library.loader import open_library
from formbuf.library.store import Store, knowledge_root
from formbuf.qualify import Case, Group, Qualification, qualify
from formbuf.qualify import run as qualify_run
from formbuf.qualify.installed import digests
from formbuf.qualify.record import as_text, load_record
from formbuf.qualify.records import Statistics, difference, judge


@pytest.fixture(scope="module")
def result() -> Qualification:
    return qualify(library())


def _group(*misses: float, allowed: float | None = 0.02, **more: object) -> Group:
    cases = tuple(Case(f"{m}", 7.0, 7.0 + m, allowed) for m in misses)
    return Group("one", "kind", "title", "pH", cases, **more)  # type: ignore[arg-type]


# --- on this installation


def test_every_group_passes_or_says_why_not(result: Qualification) -> None:
    for entry in result.groups:
        s = entry.group.statistics
        print(
            f"{entry.verdict:10s} {entry.group.kind}: {entry.group.title}: {s.count} "
            f"cases, mean {s.mean:+.4f}, rms {s.rms:.4f}, largest {s.largest:+.4f}"
        )
    assert not result.failed, [f"{e.group.id}: {e.reason}" for e in result.failed]
    assert result.passed


def test_all_kinds_of_checks_are_there(result: Qualification) -> None:
    kinds = {entry.group.kind for entry in result.groups}
    assert kinds == {
        "water",
        "pH of standard solutions",
        "pH of buffer tables",
        "pK with temperature",
        "worked examples",
        "osmolality",
        "concentrated brines",
        "freezing points",
        "eutectics",
        "pH of frozen buffers",
        "numerics",
        "tables",
        "shortlists",
    }
    assert result.cases > 1500
    ids = [entry.group.id for entry in result.groups]
    assert len(set(ids)) == len(ids)


def test_every_published_case_names_its_source(result: Qualification) -> None:
    for entry in result.groups:
        assert all(case.source for case in entry.group.cases), entry.group.id


def test_rows_marked_test_are_all_used(result: Qualification) -> None:
    """No row of the tables that is good for a test is left out silently."""
    labels = [c.label for e in result.groups for c in e.group.cases]
    rows = [
        row
        for name in ("handbook_buffers", "pharmacopoeia_buffers")
        for row in library().check_table(name)
        if row.text("use") == "test"
    ]
    buffer_groups = [e for e in result.groups if e.group.kind == "pH of buffer tables"]
    judged = sum(len(e.group.cases) for e in buffer_groups if not e.group.is_shown_only)
    assert judged == len(rows)
    coded = next(
        e for e in result.groups if e.group.id == "water coefficients as coded"
    )
    assert len(coded.group.cases) == 32
    assert len(labels) == result.cases


def test_the_record_is_that_of_the_checkout(result: Qualification) -> None:
    """After a meant change run ``tests/tools/record_qualification.py``."""
    kept = load_record()
    fresh = json.loads(as_text(library(), (e.group for e in result.groups)))
    assert fresh["tables"] == kept["tables"]
    assert set(fresh["groups"]) == set(kept["groups"])
    assert fresh["knowledge"] == kept["knowledge"] == library().version


@pytest.mark.bench
def test_it_takes_less_than_20_seconds() -> None:
    start = time.perf_counter()
    qualify(open_library(Store(knowledge_root())))
    assert time.perf_counter() - start < 20.0


# --- verdicts


RECORDED = Statistics(2, 0.0, 0.01, 0.01)


def test_a_group_within_its_tolerance_passes() -> None:
    assert judge(_group(0.01, -0.01), RECORDED).verdict == "pass"


def test_a_group_outside_its_tolerance_fails_and_names_the_case() -> None:
    found = judge(_group(0.03, -0.01), RECORDED)
    assert found.verdict == "fail"
    assert "published 7.000, found 7.030, allowed 0.02" in found.reason


def test_a_mean_outside_its_tolerance_fails() -> None:
    found = judge(
        _group(0.02, 0.02, mean_allowed=0.01), Statistics(2, 0.02, 0.02, 0.02)
    )
    assert found.verdict == "fail"
    assert "mean +0.020" in found.reason


def test_a_known_miss_is_no_pass_and_must_be_as_recorded() -> None:
    group = _group(0.03, -0.01, known_miss="a table contradicts another")
    kept = group.statistics
    assert judge(group, kept).verdict == "known miss"
    other = Statistics(kept.count, kept.mean + 0.001, kept.rms, kept.largest)
    assert judge(group, other).verdict == "fail"


def test_a_known_miss_that_is_gone_is_told() -> None:
    found = judge(_group(0.01, -0.01, known_miss="a reason"), RECORDED)
    assert found.verdict == "fail"
    assert "within tolerance" in found.reason


def test_residuals_that_are_not_recorded_fail() -> None:
    assert judge(_group(0.01, -0.01), None).verdict == "fail"
    assert judge(_group(0.01), RECORDED).reason.startswith("not as recorded: 1 cases")
    assert judge(_group(0.015, -0.015), RECORDED).verdict == "fail"


def test_shown_groups_must_be_as_recorded_too() -> None:
    group = _group(0.5, allowed=None)
    assert judge(group, group.statistics).verdict == "shown"
    assert judge(group, RECORDED).verdict == "fail"


@pytest.mark.parametrize("shift", [0.0, 0.9e-4, -0.9e-4])
def test_the_last_bits_of_another_machine_count_as_none(shift: float) -> None:
    moved = Statistics(2, shift, 0.01, 0.01)
    assert difference(moved, RECORDED, 3) == ""


def test_empty_groups_and_nan_are_refused() -> None:
    with pytest.raises(ValueError, match="no cases"):
        _group()
    with pytest.raises(ValueError, match="not finite"):
        _group(float("nan"))


def test_what_cannot_be_computed_is_a_failing_group(
    monkeypatch: pytest.MonkeyPatch,
) -> None:
    def broken(*_: object) -> object:
        raise FormbufError("planted")
        yield

    monkeypatch.setattr(qualify_run, "PARTS", {"water": broken})
    (only,) = qualify(library()).groups
    assert only.verdict == "fail"
    assert only.group.cases[0].label == "planted"


def test_checks_of_the_user_that_cannot_be_computed_fail(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    """A step that the species does not have; without an overlay it would be a bug."""
    place = tmp_path / "checks" / "pka_by_temperature.csv"
    place.parent.mkdir()
    text = (Path(str(knowledge_root())) / "checks" / place.name).read_text("utf-8")
    header, *rows = text.splitlines()
    row = next(r for r in rows if r.split(",")[1:3] == ["tris", "1"])
    place.write_text(f"{header}\n{row.replace(',tris,1,', ',tris,2,')}\n", "utf-8")
    library = open_library(Store(knowledge_root(), tmp_path))
    parts = {"pk_series": qualify_run.PARTS["pk_series"]}
    monkeypatch.setattr(qualify_run, "PARTS", parts)
    groups = list(qualify_run.all_groups(library, {}))
    assert "pk_series not computed" in {group.id for group in groups}


# --- a change is seen


@pytest.mark.parametrize("name", tables())
def test_a_changed_cell_of_any_table_is_seen(name: str, tmp_path: Path) -> None:
    """By the content of the table; what a calculation sees is the slow test's."""
    change = change_one_cell(name, tmp_path)
    print(change)
    try:
        changed = open_library(Store(knowledge_root(), tmp_path))
        found = digests(changed, [name])
    except FormbufError as error:
        print(f"refused: {error}")
        return
    assert found[name] != load_record()["tables"][name]


@pytest.mark.slow
@pytest.mark.parametrize("name", sorted(tables()))
def test_a_changed_cell_fails_the_qualification_or_the_check(
    name: str, tmp_path: Path
) -> None:
    change = change_one_cell(name, tmp_path)
    try:
        found = qualify(open_library(Store(knowledge_root(), tmp_path)))
    except FormbufError as error:
        print(f"{change}: refused: {error}")
        return
    seen = [e.group.id for e in found.failed]
    computed = [s for s in seen if s != "tables content"]
    print(f"{change}: {len(computed)} groups besides the content: {computed[:6]}")
    assert not found.passed
    assert "tables content" in seen
    if name in TELLING:
        assert computed, f"{change} is seen by the checksum only"


@pytest.mark.parametrize(
    ("module", "name", "factor"),
    [
        (water, "PKW_ALPHA", 1.002),
        (water, "PKW_GAMMA", 1.001),
        (water, "OSMOTIC_SLOPE_CHEBYSHEV", 1.002),
        (activity, "ION_SIZE_FACTOR", 1.05),
    ],
    ids=lambda value: str(value),
)
def test_a_changed_constant_of_the_program_fails(
    module: object, name: str, factor: float, monkeypatch: pytest.MonkeyPatch
) -> None:
    kept = getattr(module, name)
    changed = (
        tuple(factor * x for x in kept) if isinstance(kept, tuple) else factor * kept
    )
    monkeypatch.setattr(module, name, changed)
    parts = {k: qualify_run.PARTS[k] for k in ("water", "standards")}
    monkeypatch.setattr(qualify_run, "PARTS", parts)
    found = qualify(open_library(Store(knowledge_root())))
    seen = {e.group.id for e in found.failed}
    print(name, sorted(seen)[:8])
    assert "water coefficients as coded" in seen


def test_an_overlay_is_named_in_the_notes(tmp_path: Path) -> None:
    change_one_cell("ionization.csv", tmp_path)
    found = qualify_run._notes(load_library(tmp_path))
    assert str(tmp_path) in found[0]
