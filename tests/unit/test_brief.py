"""The product brief: reading, lines of keys, quick form, schema, examples."""

from __future__ import annotations

import dataclasses
import json
import math
import subprocess
import sys
import tomllib
import typing
from pathlib import Path
from typing import Any

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from formbuf.errors import InputError
from formbuf.library import Library, load_library
from formbuf.product import vocabulary
from formbuf.product.brief import (
    Brief,
    Origin,
    brief_from_mapping,
    brief_from_options,
    brief_from_text,
    brief_schema,
    check_against_library,
    complete,
    read_brief,
)
from formbuf.product.brief_lines import index_lines
from formbuf.product.brief_origin import key_path
from formbuf.product.product_brief import ProductBrief

ROOT = Path(__file__).resolve().parents[2]
EXAMPLES = sorted((ROOT / "examples").glob("*.toml"))
HEAD = '[product]\nroute = "subcutaneous"\n[ph]\ntarget = 6.0\n'


@pytest.fixture(scope="module")
def library() -> Library:
    return load_library()


# ---------------------------------------------------------------- lines of a file


def test_lines_of_every_kind_of_key() -> None:
    text = "\n".join(
        [
            "# [not.a.table]",  # 1
            'title = "a # b = c [x]"',  # 2
            "exclude = [ # comment ]",  # 3
            '  "tris",',  # 4
            '  "bor]ate",',  # 5
            "]",  # 6
            "",  # 7
            "[ ph ]  # the target",  # 8
            "target = 6.0",  # 9
            '"low" = 5.0',  # 10
            "[[storage]]",  # 11
            "temperature_c = 5",  # 12
            "[[storage]]",  # 13
            "temperature_c = { x = 1, 'y z' = [1, {q = 2}] }",  # 14
            "[ranking.weights]",  # 15
            "capacity = 1",  # 16
            "[ranking]",  # 17
            "anchors.capacity.full = 5",  # 18
            "anchors.capacity.floor = 50",  # 19
            "[loads]",  # 20
            'note = """',  # 21
            "acid_mmol_l = 3",  # 22
            '\\"""""',  # 23
            "acid_mmol_l = 1",  # 24
            "[drug]",  # 25
            "[[drug.pka]]",  # 26
            "pka = 3",  # 27
            "[[drug.pka]]",  # 28
            "pka = 9",  # 29
            "name = '''it''s'''",  # 30
            '"a\\u0041.b" = 1',  # 31
        ]
    )
    tomllib.loads(text)
    index = index_lines(text)
    assert index.complete
    assert not index.repeated
    expected = {
        ("title",): 2,
        ("exclude",): 3,
        ("exclude", 0): 4,
        ("exclude", 1): 5,
        ("ph",): 8,
        ("ph", "target"): 9,
        ("ph", "low"): 10,
        ("storage", 0, "temperature_c"): 12,
        ("storage", 1): 13,
        ("storage", 1, "temperature_c", "y z", 1, "q"): 14,
        ("ranking", "weights", "capacity"): 16,
        ("ranking",): 15,
        ("ranking", "anchors", "capacity", "full"): 18,
        ("ranking", "anchors", "capacity", "floor"): 19,
        ("loads", "note"): 21,
        ("loads", "acid_mmol_l"): 24,
        ("drug", "pka", 0, "pka"): 27,
        ("drug", "pka", 1, "pka"): 29,
        ("drug", "pka", 1, "name"): 30,
        ("drug", "pka", 1, "aA.b"): 31,
    }
    assert {key: index.lines[key] for key in expected} == expected
    assert ("not", "a") not in index.lines


def _locations(value: Any, here: tuple[str | int, ...] = ()) -> list[Any]:
    items: list[Any] = []
    if isinstance(value, dict):
        items = list(value.items())
    elif isinstance(value, list):
        items = list(enumerate(value))
    found: list[Any] = [here] if here else []
    for key, below in items:
        found += _locations(below, (*here, key))
    return found


@pytest.mark.parametrize("path", EXAMPLES, ids=lambda path: path.stem)
def test_every_key_of_the_examples_has_its_line(path: Path) -> None:
    text = path.read_text(encoding="utf-8")
    lines = text.splitlines()
    index = index_lines(text)
    locations = _locations(tomllib.loads(text))
    assert len(locations) > 25
    for location in locations:
        line = lines[index.lines[location] - 1]
        last_key = [part for part in location if isinstance(part, str)][-1]
        assert last_key in line, location


KEYS = st.text("abcxyz_-09", min_size=1, max_size=4)
SCALARS = st.one_of(
    st.integers(-9, 9).map(str),
    st.sampled_from(["true", "1.5", "nan", '"t"', "'#'", '"""m\n]\n"""', "2026-01-02"]),
)
VALUES = st.recursive(
    SCALARS,
    lambda inner: st.lists(inner, max_size=3).map(
        lambda items: "[ # c ]\n" + "".join(f" {item},\n" for item in items) + "]"
    ),
    max_leaves=5,
)


@given(st.dictionaries(KEYS, st.dictionaries(KEYS, VALUES, max_size=4), max_size=4))
@settings(max_examples=150, deadline=None)
def test_lines_of_generated_files(tables: dict[str, dict[str, str]]) -> None:
    rows: list[str] = []
    expected: dict[tuple[str, ...], int] = {}

    def line() -> int:
        return "\n".join(rows).count("\n") + 1

    for name, pairs in tables.items():
        rows.append(f"[{name}]")
        expected[(name,)] = line()
        for key, value in pairs.items():
            rows.append(f"{key} = {value}".split("\n")[0])
            expected[(name, key)] = line()
            rows[-1] = f"{key} = {value}"
    text = "\n".join(rows)
    tomllib.loads(text)
    index = index_lines(text)
    assert index.complete
    assert not index.repeated
    assert {key: index.lines[key] for key in expected} == expected


def test_places_fall_back_to_the_table_around() -> None:
    origin = Origin("b.toml", {("ph",): 3, ("ph", "low"): 5})
    assert origin.where(("ph", "low")) == "b.toml: ph.low (line 5)"
    assert origin.where(("ph", "target")) == "b.toml: ph.target (line 3)"
    assert origin.where(("dose",)) == "b.toml: dose"
    assert origin.where(()) == "b.toml: top of the file"
    assert key_path(("storage", 0, "temperature_c")) == "storage[1].temperature_c"


# ---------------------------------------------------------------- reading


def test_a_brief_is_kept_as_written() -> None:
    brief = brief_from_text(HEAD + "[dose]\nvolume_ml = 1\n", name="b.toml")
    assert brief.ph.target == 6.0
    assert brief.ph.low is None
    assert brief.dose.volume_ml == 1.0
    assert (
        brief.origin.where(("dose", "volume_ml")) == "b.toml: dose.volume_ml (line 6)"
    )
    assert brief.to_dict() == {
        "product": {"route": "subcutaneous"},
        "ph": {"target": 6.0},
        "dose": {"volume_ml": 1.0},
    }


def test_a_brief_cannot_be_changed() -> None:
    brief = brief_from_text(HEAD)
    with pytest.raises(ValueError, match="frozen"):
        brief.ph.target = 7.0  # type: ignore[misc]


@pytest.mark.parametrize("encoding", ["utf-8", "utf-8-sig"])
@pytest.mark.parametrize("line_end", ["\n", "\r\n"])
def test_encodings_and_line_ends(tmp_path: Path, encoding: str, line_end: str) -> None:
    text = 'title = "Tröpfchen für 点眼剤, μ = 0.1"\n' + HEAD
    path = tmp_path / "Entwurf für 点.toml"
    path.write_bytes(text.replace("\n", line_end).encode(encoding))
    brief = read_brief(str(path))
    assert brief.title == "Tröpfchen für 点眼剤, μ = 0.1"
    assert brief.origin.line(("ph", "target")) == 5


def test_mapping_without_a_file() -> None:
    with pytest.raises(InputError, match=r"^brief: ph\.target: is too large, value 15"):
        brief_from_mapping({"product": {"route": "nasal"}, "ph": {"target": 15}})


def test_dates_may_be_quoted() -> None:
    tail = '[[override]]\nrule = "R1"\nreason = "seen in study 4"\nname = "N. N."\n'
    for date in ("2026-03-31", '"2026-03-31"'):
        brief = brief_from_text(f"{HEAD}{tail}date = {date}\n")
        assert brief.override[0].date.isoformat() == "2026-03-31"


PIECES = [
    "[[",
    "]",
    '"',
    "'''",
    "=",
    ",",
    "nan",
    "1e400",
    "{",
    "\n",
    "#",
    "\\",
    "é",
    ".",
]


@given(data=st.data())
@settings(max_examples=300, deadline=None)
def test_a_damaged_brief_never_ends_in_anything_but_an_input_error(
    data: st.DataObject,
) -> None:
    text = data.draw(st.sampled_from(EXAMPLES)).read_text(encoding="utf-8")
    for _ in range(data.draw(st.integers(1, 3))):
        at = data.draw(st.integers(0, len(text)))
        length = data.draw(st.integers(0, 12))
        text = text[:at] + data.draw(st.sampled_from(PIECES)) + text[at + length :]
    message = ""
    try:
        complete(brief_from_text(text, name="b.toml"), load_library())
    except InputError as error:
        message = error.message
    assert not message or message.startswith("b.toml")


# ---------------------------------------------------------------- quick form


def test_options_and_file_give_the_same_brief(library: Library) -> None:
    quick = brief_from_options(
        ph=6.0,
        route="subcutaneous",
        store=[5, -40],
        form="liquid",
        drug_kind="antibody",
        drug_mg_ml=50,
        tonicity_agent="sucrose",
        volume_ml=1,
    )
    text = (
        '[product]\nroute = "subcutaneous"\nform = "liquid"\n[ph]\ntarget = 6\n'
        "[[storage]]\ntemperature_c = 5\n[[storage]]\ntemperature_c = -40\n"
        "[dose]\nvolume_ml = 1\n"
        '[tonicity]\nagent = "sucrose"\n'
        '[drug]\nkind = "antibody"\nconcentration_mg_ml = 50\n'
    )
    written = brief_from_text(text)
    assert quick == written
    assert complete(quick, library).to_dict() == complete(written, library).to_dict()


# ---------------------------------------------------------------- vocabulary, schema


def test_vocabulary_matches_the_tables(library: Library) -> None:
    assert set(vocabulary.ROUTES) == set(library.route_limits)
    assert set(vocabulary.ROUTE_GROUPS) == set(vocabulary.ROUTES)
    kinds = {row.kind for row in library.kind_precedents} - {"any"}
    assert kinds == set(vocabulary.KIND_GROUPS.values()) - {""}
    groups = {row.route_group for row in library.kind_precedents}
    assert groups <= set(vocabulary.ROUTE_GROUPS.values())
    roles = {system.role for system in library.systems.values()} - {"buffer", "none"}
    assert roles == set(typing.get_args(vocabulary.Role))
    assert set(library.criteria["weights"]) == set(vocabulary.CRITERIA)
    assert set(library.criteria["anchors"]) == set(vocabulary.ANCHORED_CRITERIA)
    assert set(library.neutrals) >= vocabulary.AMORPHOUS_SUGARS


def test_meant_words_exist() -> None:
    known: set[str] = set()
    for words in (
        vocabulary.Route,
        vocabulary.Form,
        vocabulary.DrugKind,
        vocabulary.ContainerType,
        vocabulary.Exposure,
        vocabulary.StorageKind,
        vocabulary.Population,
        vocabulary.Pharmacopoeia,
        vocabulary.Filing,
    ):
        known |= set(typing.get_args(words))
    assert set(vocabulary.MEANT.values()) <= known
    assert not set(vocabulary.MEANT) & known


def test_schema_describes_every_key() -> None:
    schema = brief_schema()
    json.dumps(schema, allow_nan=False)
    assert set(schema["properties"]) == set(Brief.model_fields)
    assert schema["required"] == ["product", "ph"]
    assert schema["additionalProperties"] is False
    for name, table in schema["$defs"].items():
        for key, entry in table["properties"].items():
            assert "description" in entry or "$ref" in entry, (name, key)


def test_contract_of_names() -> None:
    tables = {
        "product": "name version route form population filing pharmacopoeias",
        "ph": "target low high release_tolerance measure_temperature_c "
        "prepare_temperature_c storage_low storage_high",
        "dose": "volume_ml per_day infusion_rate_ml_h body_mass_kg age_years",
        "container": "type fill_volume_ml count_alkali gas_permeable",
        "carbon_dioxide": "exposure pressure_pa headspace_ratio",
    }
    parts = typing.get_type_hints(ProductBrief)
    for table, keys in tables.items():
        stated = Brief.model_fields[table].annotation
        assert stated is not None
        assert set(keys.split()) == set(stated.model_fields)
        resolved = {field.name for field in dataclasses.fields(parts[table])}
        assert set(keys.split()) <= resolved


# ---------------------------------------------------------------- examples, the rest


@pytest.mark.parametrize("path", EXAMPLES, ids=lambda path: path.stem)
def test_examples(path: Path, library: Library) -> None:
    completed = complete(read_brief(path), library)
    assert 30 < len(completed.brief.title) < 100
    text = json.dumps(completed.to_dict(), allow_nan=False)
    assert all(math.isfinite(row.temperature_c) for row in completed.brief.storage)
    assert json.loads(text)["brief"]["title"] == completed.brief.title


def test_the_four_stories_are_there() -> None:
    names = {path.stem for path in EXAMPLES}
    assert {"antibody", "ampoule", "eye_drop", "enzyme"} <= names


def test_check_is_silent_on_a_good_brief(library: Library) -> None:
    for path in EXAMPLES:
        check_against_library(read_brief(path), library)


def test_import_stays_light() -> None:
    code = (
        "import sys, formbuf.product.brief\n"
        "heavy = {'numpy', 'scipy', 'pandas', 'matplotlib', 'rich', 'jinja2', 'docx'}\n"
        "print(sorted(heavy & set(sys.modules)))"
    )
    done = subprocess.run(
        [sys.executable, "-c", code],
        capture_output=True,
        text=True,
        check=True,
        cwd=ROOT,
    )
    assert done.stdout.strip() == "[]"
