"""What ``knowledge``, ``brief`` and ``predict`` show."""

from __future__ import annotations

import csv
import io
import json
from pathlib import Path

import pytest
from cli_runner import EXAMPLES, formbuf

from formbuf.library import load_library

HEADER = ["schema", "formbuf_version", "knowledge"]


def _rows(text: str) -> list[dict[str, str]]:
    return list(csv.DictReader(io.StringIO(text, newline="")))


def test_knowledge_list_counts_every_table() -> None:
    rows = formbuf("knowledge", "list", "--json").data()["tables"]
    counts = {row["table"]: row["rows"] for row in rows}
    assert counts["species.csv"] == len(load_library().species)
    assert {"criteria.toml", "defaults.toml"} <= set(counts)


@pytest.mark.parametrize("name", ["species", "species.csv"])
def test_knowledge_show_gives_all_of_a_table(name: str) -> None:
    data = formbuf("knowledge", "show", name, "--json").data()
    assert data["table"] == "species.csv"
    assert len(data["rows"]) == len(load_library().species)
    rows = _rows(formbuf("knowledge", "show", name, "--format", "csv").out)
    assert [row["id"] for row in rows] == [row["id"] for row in data["rows"]]


def test_knowledge_show_one_row() -> None:
    data = formbuf("knowledge", "show", "ionization", "tris", "--json").data()
    assert [row["species"] for row in data["rows"]] == ["tris"]
    text = formbuf("knowledge", "show", "ionization", "tris").out
    assert "pka_source" in text


def test_knowledge_show_settings() -> None:
    rows = formbuf("knowledge", "show", "criteria", "--json").data()["rows"]
    assert {"key": "floor_value", "value": 0.05} in rows


def test_knowledge_show_marks_rows_of_the_user(tmp_path: Path) -> None:
    ours = Path(str(load_library().store.root)) / "ions.csv"
    head, first = ours.read_text().splitlines()[:2]
    (tmp_path / "ions.csv").write_text(f"{head}\n{first}\n")
    done = formbuf("knowledge", "show", "ions", "--knowledge", str(tmp_path), "--json")
    marked = [row["overlay"] for row in done.data()["rows"]]
    assert sum(marked) == 1
    table = formbuf("knowledge", "show", "ions", "--knowledge", str(tmp_path)).out
    assert "overlay" in table.splitlines()[1]


def test_knowledge_sources() -> None:
    data = formbuf("knowledge", "sources", "--json").data()
    assert len(data["sources"]) == len(load_library().sources)
    one = formbuf("knowledge", "sources", "goldberg_2002", "--json").data()
    assert one["sources"][0]["doi"] == "10.1063/1.1416902"
    assert any(use.startswith("ionization.csv:") for use in one["used_in"])


def test_knowledge_check_finds_no_fault() -> None:
    done = formbuf("knowledge", "check")
    assert done.code == 0
    assert "no fault" in done.out


def test_knowledge_check_of_a_broken_table_is_exit_code_4(
    monkeypatch: pytest.MonkeyPatch,
) -> None:
    from formbuf.bench import knowledge_audit

    fault = "species.csv:2:id: planted"
    monkeypatch.setattr(knowledge_audit, "audit", lambda _: [fault])
    done = formbuf("knowledge", "check")
    assert done.code == 4
    assert done.one_error() == f"Error: {fault}\n"
    machine = formbuf("knowledge", "check", "--json")
    assert machine.code == 4
    assert machine.data()["faults"] == [fault]


@pytest.mark.parametrize("path", sorted(EXAMPLES.glob("*.toml")), ids=lambda p: p.stem)
def test_brief_check_of_the_examples(path: Path) -> None:
    done = formbuf("brief", "check", str(path), "--json")
    assert done.code == 0
    data = done.data()
    assert list(data) == [*HEADER, "brief", "assumptions", "warnings"]
    assert f"{path}: no fault found." in " ".join(
        formbuf("brief", "check", str(path), columns=200).out.split()
    )


def test_brief_check_refuses_an_override_of_nothing(tmp_path: Path) -> None:
    path = tmp_path / "brief.toml"
    path.write_text(
        '[product]\nroute = "nasal"\n[ph]\ntarget = 6\n[[override]]\nrule = "R999"\n'
        'reason = "measured and fine"\nname = "N. N."\ndate = 2026-01-31\n'
    )
    done = formbuf("brief", "check", str(path))
    assert done.code == 3
    assert "R999" in done.one_error()


def test_brief_schema_is_a_json_schema(tmp_path: Path) -> None:
    done = formbuf("brief", "schema")
    schema = json.loads(done.out)
    assert schema["$schema"].startswith("https://json-schema.org/")
    assert {"product", "ph"} <= set(schema["properties"])
    path = tmp_path / "schema.json"
    assert formbuf("brief", "schema", "-o", str(path)).code == 0
    assert path.read_text() == done.out


def test_predict_as_the_outside_checks_call_it() -> None:
    done = formbuf(
        *("predict", "--add", "potassium_dihydrogen_phosphate=25"),
        *("--add", "disodium_hydrogen_phosphate_anhydrous=25"),
        *("--basis", "molal", "--at", "25", "--at", "5", "--format", "json"),
    )
    states = done.data()["states"]
    assert [s["temperature_c"] for s in states] == [25.0, 5.0]
    # published: 6.865 (Bates 1973)
    assert states[0]["ph"] == pytest.approx(6.865, abs=0.02)


def test_predict_in_grams() -> None:
    moles = formbuf("predict", "--add", "sucrose=100", "--json").data()
    grams = formbuf(
        "predict", "--add", "sucrose=34.23", "--amounts", "g/L", "--json"
    ).data()
    one, other = moles["states"][0], grams["states"][0]
    assert one["osmolality_mosm_kg"] == pytest.approx(
        other["osmolality_mosm_kg"], rel=1e-3
    )
