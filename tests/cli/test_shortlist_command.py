"""What ``formbuf shortlist`` shows: keys of its JSON, rows, words, exit code."""

from __future__ import annotations

import csv
import io
import json
import math
from pathlib import Path
from typing import Any

import pytest
from cli_runner import EXAMPLES, Done, formbuf

from formbuf.library import load_library

ANTIBODY = str(EXAMPLES / "antibody.toml")
QUICK = (
    *("shortlist", "--ph", "6.0", "--route", "subcutaneous"),
    *("--store", "5", "--drug-kind", "antibody"),
)
HEADER = ["schema", "formbuf_version", "knowledge"]
SHORTLIST_KEYS = [
    *HEADER,
    "brief",
    "assumptions",
    "verdict",
    "lead",
    "backup",
    "loads",
    "ranking",
    "candidates",
    "product_findings",
    "missing_facts",
    "warnings",
]
CANDIDATE_KEYS = [
    "system",
    "rank",
    "standing",
    "tied_with",
    "desirability",
    "desirability_deviation_ln",
    "limiting",
    "criteria",
    "name",
    "base_system",
    "species",
    "role",
    "is_own_formula",
    "is_mixture",
    "variant_of",
    "overlay",
    "required_mmol_l",
    "limiting_load",
    "carried_share",
    "concentration_mmol_l",
    "ceiling_mmol_l",
    "composition",
    "tonicity_fill",
    "states",
    "species_states",
    "ph_drift",
    "osmolality_mosm_kg",
    "buffer_osmolality_mosm_kg",
    "titratable_acidity_mmol_l",
    "exposures",
    "frozen",
    "findings",
    "screened_out_by",
    "screens_set_aside",
    "finding_counts",
    "notes",
]
CRITERION_KEYS = [
    "value",
    "unit",
    "desirability",
    "limiting",
    "sources",
    "text",
    "deviation_ln",
]
FINDING_KEYS = ["rule", "severity", "outcome", "text", "basis", "source"]
OUTCOMES = {"fired", "not fired", "not evaluable"}
STANDINGS = {"lead", "back-up", "viable", "not evaluable", "screened out"}


@pytest.fixture(scope="module")
def antibody() -> dict[str, Any]:
    done = formbuf("shortlist", ANTIBODY, "--format", "json")
    assert done.code == 0
    return done.data()


@pytest.fixture(scope="module")
def quick() -> Done:
    return formbuf(*QUICK)


def _rows(text: str) -> list[dict[str, str]]:
    return list(csv.DictReader(io.StringIO(text, newline="")))


def test_shortlist_json_keys(antibody: dict[str, Any]) -> None:
    assert list(antibody) == SHORTLIST_KEYS
    assert antibody["schema"] == "formbuf.shortlist/1"
    keys = ["version", "sha256", "overlay", "overlay_sha256", "precedent_file"]
    keys += ["overlay_changes"]
    assert list(antibody["knowledge"]) == keys
    for candidate in antibody["candidates"]:
        assert list(candidate) == CANDIDATE_KEYS
        for criterion in candidate["criteria"].values():
            assert list(criterion) == CRITERION_KEYS
        for finding in candidate["findings"]:
            assert list(finding)[:6] == FINDING_KEYS
            assert finding["outcome"] in OUTCOMES
        for row in candidate["composition"]:
            assert list(row) == ["material", "mmol_l", "g_l"]
        for state in candidate["states"]:
            keys = {"temperature_c", "kinds", "ph", "capacity_mmol_l_ph"}
            assert keys <= set(state)


def test_shortlist_json_tells_the_whole_story(antibody: dict[str, Any]) -> None:
    library = load_library()
    assert antibody["knowledge"]["sha256"] == library.sha256
    assert antibody["brief"]["ph"]["target"] == 6.0
    assert antibody["assumptions"]
    assert {a["basis"] for a in antibody["assumptions"]} <= {
        "published",
        "derived",
        "memory",
        "practice",
        "judgement",
    }
    by_system = {c["system"]: c for c in antibody["candidates"]}
    assert len(by_system) == len(antibody["candidates"])
    assert {c["standing"] for c in by_system.values()} <= STANDINGS
    assert antibody["lead"] in by_system
    dropped = [c for c in by_system.values() if c["standing"] == "screened out"]
    assert dropped
    for c in dropped:
        assert c["rank"] is None
        assert c["screened_out_by"]
        for screen in c["screened_out_by"]:
            assert screen["id"]
            assert screen["text"]
            assert screen["basis"]
            assert screen["overridden_by"] == ""
    assert "none" in by_system
    lead = by_system[antibody["lead"]]
    assert lead["rank"] == 1
    assert sum(c["limiting"] for c in lead["criteria"].values()) == 1
    assert any(c["findings"] for c in by_system.values())
    assert lead["frozen"] is not None


def test_frozen_says_its_class_its_paths_and_what_it_rests_on(
    antibody: dict[str, Any],
) -> None:
    lead = next(c for c in antibody["candidates"] if c["rank"] == 1)
    frozen = lead["frozen"]
    keys = {"freezing_class", "counted_class", "basis", "reason", "sources", "paths"}
    assert keys <= set(frozen)
    for path in frozen["paths"]:
        assert path["assumption"] in ("crystallising", "supersaturated")
        assert {"temperature_c", "ph", "ice_fraction"} <= set(path["points"][0])


def test_a_row_of_the_shortlist_can_be_rechecked(antibody: dict[str, Any]) -> None:
    """The materials of the lead alone give back its pH with predict."""
    lead = next(c for c in antibody["candidates"] if c["rank"] == 1)
    materials = [*lead["composition"], lead["tonicity_fill"]]
    added = [f"--add={row['material']}={row['mmol_l']!r}" for row in materials if row]
    found = formbuf("predict", *added, "--at", "25", "--json").data()["states"][0]
    state = next(s for s in lead["states"] if "measure" in s["kinds"])
    # the drug takes up volume and is left out here, so the ionic strength is lower
    assert found["ph"] == pytest.approx(state["ph"], abs=0.02)


def test_numbers_keep_their_precision(antibody: dict[str, Any]) -> None:
    lead = next(c for c in antibody["candidates"] if c["rank"] == 1)
    assert len(repr(lead["states"][0]["ph"])) > 8


def test_shortlist_csv_has_one_flat_row_per_candidate(antibody: dict[str, Any]) -> None:
    done = formbuf("shortlist", ANTIBODY, "--format", "csv")
    rows = _rows(done.out)
    assert [row["system"] for row in rows] == [
        c["system"] for c in antibody["candidates"]
    ]
    first, c = rows[0], antibody["candidates"][0]
    assert float(first["concentration_mmol_l"]) == c["concentration_mmol_l"]
    assert float(first["desirability"]) == c["desirability"]
    assert float(first["ph_drift"]) == c["ph_drift"]
    assert "=" in first["composition_mmol_l"]
    assert first["capacity_desirability"]
    assert first["frozen_class"] == c["frozen"]["counted_class"]
    assert None not in first


def test_shortlist_markdown() -> None:
    text = formbuf("shortlist", ANTIBODY, "--format", "markdown").out
    assert text.startswith("# Example antibody A")
    for heading in ("## Screened out", "## Assumptions", "## Warnings"):
        assert heading in text
    tables = [line for line in text.splitlines() if line.startswith("| ---")]
    assert len(tables) >= 4


def test_the_table_says_what_the_data_say(antibody: dict[str, Any]) -> None:
    text = formbuf("shortlist", ANTIBODY, columns=2000).out
    flat = " ".join(text.split())
    assert antibody["verdict"] in flat
    for c in antibody["candidates"]:
        assert c["system"] == "none" or c["name"] in flat, c["name"]
    for one in antibody["assumptions"]:
        assert one["key"] in flat
    for warning in antibody["warnings"]:
        assert warning in flat
    assert "Without a buffer: " in flat
    assert flat.endswith("local rules and qualified staff decide.")


def test_json_is_the_short_form() -> None:
    long = formbuf(*QUICK, "--format", "json")
    short = formbuf(*QUICK, "--json")
    assert long.out == short.out
    assert long.data()["schema"] == "formbuf.shortlist/1"


def test_the_same_question_gives_the_same_bytes(quick: Done) -> None:
    assert formbuf(*QUICK).out == quick.out


def test_quick_form_prints_every_assumption(quick: Done) -> None:
    assert quick.code == 0
    for key in ("ph.low", "loads.acid_mmol_l", "dose.volume_ml", "container.type"):
        assert key in quick.out


def test_the_quick_form_of_the_readme_with_every_option() -> None:
    done = formbuf(
        *("shortlist", "--ph", "6.0", "--route", "subcutaneous"),
        *("--store", "5", "--store", "-40", "--form", "liquid"),
        *("--drug-kind", "antibody", "--drug-mg-ml", "50"),
        *("--tonicity-agent", "sucrose", "--volume-ml", "1", "--json"),
    )
    data = done.data()
    brief = data["brief"]
    assert [s["temperature_c"] for s in brief["storage"]][:2] == [5.0, -40.0]
    assert brief["drug"]["concentration_mg_ml"] == 50.0
    assert brief["tonicity"]["agent"] == "sucrose"
    assert brief["dose"]["volume_ml"] == 1.0


def test_top_shows_the_best_places_only(antibody: dict[str, Any]) -> None:
    done = formbuf("shortlist", ANTIBODY, "--top", "2", "--json")
    kept = done.data()["candidates"]
    assert {c["rank"] for c in kept} == {1, 2, None}
    dropped = [c for c in antibody["candidates"] if c["rank"] is None]
    assert [c for c in kept if c["rank"] is None] == dropped
    places = max(c["rank"] or 0 for c in antibody["candidates"])
    text = formbuf("shortlist", ANTIBODY, "--top", "2").out
    assert f"Showing 2 of {places} places" in text


def test_no_acceptable_candidate_is_exit_code_1(tmp_path: Path) -> None:
    systems = load_library().systems.values()
    species = sorted({n for s in systems if s.role == "buffer" for n in s.species})
    path = tmp_path / "brief.toml"
    path.write_text(
        f"exclude = {json.dumps(species)}\n"
        '[product]\nroute = "subcutaneous"\n[ph]\ntarget = 6.0\n'
    )
    done = formbuf("shortlist", str(path), "--json")
    assert done.code == 1
    data = done.data()
    assert data["lead"] is None
    assert all(c["rank"] is None for c in data["candidates"])
    table = formbuf("shortlist", str(path))
    assert table.code == 1
    said = " ".join(table.out.split())
    assert "No buffer is acceptable: every buffer system is screened out" in said
    assert "Whether the product stands without one is open" in said
    assert table.err == ""


def test_a_table_of_the_user_shows_in_every_result(tmp_path: Path) -> None:
    (tmp_path / "glass_alkali.csv").write_text(
        (Path(load_library().store.root) / "glass_alkali.csv").read_text()
    )
    done = formbuf(*QUICK, "--knowledge", str(tmp_path), "--json")
    data = done.data()
    assert data["knowledge"]["overlay"] == str(tmp_path)
    assert len(data["knowledge"]["overlay_sha256"]) == 64


def test_formulas_in_a_product_name_stay_inert(tmp_path: Path) -> None:
    text = (
        Path(ANTIBODY)
        .read_text()
        .replace(
            'system = "histidine_hydrochloride"',
            'name = "=cmd|x"\nsystem = "histidine_hydrochloride"',
        )
    )
    path = tmp_path / "brief.toml"
    path.write_text(text)
    rows = _rows(formbuf("shortlist", str(path), "--format", "csv").out)
    names = [row["name"] for row in rows]
    assert "'=cmd|x" in names
    markdown = formbuf("shortlist", str(path), "--format", "markdown").out
    assert "=cmd\\|x" in markdown


@pytest.mark.parametrize("path", sorted(EXAMPLES.glob("*.toml")), ids=lambda p: p.stem)
def test_every_example_has_a_lead(path: Path) -> None:
    done = formbuf("shortlist", str(path), "--json")
    assert done.code == 0, done.err
    data = done.data()
    assert data["lead"] is not None
    for c in data["candidates"]:
        for state in c["states"]:
            assert math.isfinite(state["ph"])
