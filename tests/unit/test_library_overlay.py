"""An overlay wins and is marked; the checksum; where the tables are found."""

from __future__ import annotations

import shutil
from pathlib import Path

import pytest

from formbuf.errors import InputError, KnowledgeError
from formbuf.library import (
    Column,
    Library,
    Schema,
    load_library,
    schemas,
    store,
)
from formbuf.library.loader import open_library
from formbuf.library.store import Store, knowledge_root


@pytest.fixture(scope="module")
def library() -> Library:
    return load_library()


@pytest.fixture
def knowledge(tmp_path: Path) -> Path:
    root = knowledge_root()
    assert isinstance(root, Path)
    copy = tmp_path / "knowledge"
    shutil.copytree(root, copy)
    return copy


def overlaid(directory: Path, **tables: str) -> Library:
    directory.mkdir(exist_ok=True)
    for name, text in tables.items():
        (directory / f"{name}.csv").write_text(text, encoding="utf-8")
    return open_library(Store(knowledge_root(), directory))


# --- overlay

OWN_STEP = (
    "species,step,acid_charge,pka,pka_uncertainty,pka_source,pka_basis,"
    "uncertainty_basis\n"
    "tris,1,1,8.10,0.02,own_2026,published,judgement\n"
)
OWN_SOURCE = "id,authors,year,title\nown_2026,Own laboratory,2026,Titration report 12\n"


def test_overlay_row_wins_and_is_marked(library: Library, tmp_path: Path) -> None:
    own = overlaid(tmp_path / "own", ionization=OWN_STEP, sources=OWN_SOURCE)

    tris = own.get_species("tris")
    assert tris.steps[0].pka.value == 8.10
    assert tris.steps[0].dh_kj_mol is None
    assert tris.overlay
    assert tris.steps[0].overlay
    assert own.source("own_2026").overlay
    assert not own.get_species("acetate").overlay
    assert own.get_species("acetate") == library.get_species("acetate")
    assert own.overlay == tmp_path / "own"


def test_overlay_adds_rows(library: Library, tmp_path: Path) -> None:
    species = "id,name,family,candidate\nglycolate,glycolic acid,carboxylic acid,yes\n"
    steps = OWN_STEP.replace("tris,1,1,8.10", "glycolate,1,0,3.83")
    materials = (
        "id,name,formula,contents,waters,molar_mass_g_mol,molar_mass_basis\n"
        "glycolic_acid,glycolic acid,C2H4O3,glycolate:1,0,76.051,judgement\n"
    )
    systems = (
        "id,name,role,species,acid_material,acid_titrant,base_titrant\n"
        "sodium_glycolate,sodium glycolate,buffer,glycolate,glycolic_acid,"
        "hydrochloric_acid,sodium_hydroxide\n"
    )

    own = overlaid(
        tmp_path / "own",
        species=species,
        ionization=steps,
        sources=OWN_SOURCE,
        materials=materials,
        systems=systems,
    )

    assert own.get_system("sodium_glycolate").overlay
    assert own.find_material("C2H4O3").id == "glycolic_acid"
    assert own.get_species("glycolate").charges == (0, -1)
    assert len(own.species) == len(library.species) + 1


def test_checksum_of_ours_stays_and_that_of_the_overlay_is_kept(
    library: Library, tmp_path: Path
) -> None:
    own = overlaid(tmp_path / "own", ionization=OWN_STEP, sources=OWN_SOURCE)

    assert own.sha256 == library.sha256
    assert library.overlay_sha256 == ""
    assert len(own.overlay_sha256) == 64


def test_overlay_settings_are_laid_over_key_by_key(
    knowledge: Path, tmp_path: Path
) -> None:
    (knowledge / "criteria.toml").write_text("[weights]\na = 1\nb = 2\n", "utf-8")
    directory = tmp_path / "own"
    directory.mkdir()
    (directory / "criteria.toml").write_text("[weights]\nb = 3\n", "utf-8")

    own = open_library(Store(knowledge, directory))

    assert own.criteria == {"weights": {"a": 1, "b": 3}}


# --- checksum, place


@pytest.mark.parametrize("name", ["ionization.csv", "checks/tonicity.csv", "VERSION"])
def test_checksum_changes_with_one_byte(
    library: Library, knowledge: Path, name: str
) -> None:
    assert open_library(Store(knowledge)).sha256 == library.sha256
    data = (knowledge / name).read_bytes()
    changed = data.replace(b"2026", b"2027", 1) if name == "VERSION" else data[:-1]
    (knowledge / name).write_bytes(changed)

    assert open_library(Store(knowledge)).sha256 != library.sha256


def test_checksum_does_not_depend_on_line_ends(
    library: Library, knowledge: Path
) -> None:
    table = knowledge / "species.csv"
    table.write_bytes(table.read_bytes().replace(b"\n", b"\r\n"))

    assert open_library(Store(knowledge)).sha256 == library.sha256


def test_packaged_knowledge_comes_before_the_checkout(
    monkeypatch: pytest.MonkeyPatch, tmp_path: Path
) -> None:
    (tmp_path / "_knowledge").mkdir()
    monkeypatch.setattr(store, "files", lambda _: tmp_path)

    assert knowledge_root.__wrapped__() == tmp_path / "_knowledge"


def test_missing_knowledge_names_both_places(
    monkeypatch: pytest.MonkeyPatch, tmp_path: Path
) -> None:
    monkeypatch.setattr(store, "files", lambda _: tmp_path)
    monkeypatch.setattr(store, "__file__", str(tmp_path / "a" / "b" / "store.py"))

    with pytest.raises(KnowledgeError) as caught:
        knowledge_root.__wrapped__()

    assert len(caught.value.faults) == 2
    assert "_knowledge" in caught.value.faults[0]


# --- tables of others


def test_read_table_serves_a_table_of_another_layer(
    knowledge: Path, tmp_path: Path
) -> None:
    schema = Schema(
        "own/limits.csv",
        (
            Column("limit", "id", required=True),
            Column("value", "number", required=True, low=0),
            Column("sources", "ids", refers_to="sources.csv"),
        ),
        ("limit",),
    )
    (knowledge / "own").mkdir()
    text = "limit,value,sources\nsodium,5,goldberg_2002 kettler_1995\ncalcium,1,\n"
    (knowledge / "own" / "limits.csv").write_text(text, encoding="utf-8")
    (tmp_path / "lay" / "own").mkdir(parents=True)
    over = tmp_path / "lay" / "own" / "limits.csv"
    over.write_text("limit,value\ncalcium,2\n", encoding="utf-8")
    library = open_library(Store(knowledge, tmp_path / "lay"))

    rows = library.read_table(schema)

    assert [(row.text("limit"), row.figure("value")) for row in rows] == [
        ("sodium", 5.0),
        ("calcium", 2.0),
    ]
    assert rows[0].ids("sources") == ("goldberg_2002", "kettler_1995")
    assert [row.overlay for row in rows] == [False, True]
    assert library.read_table(schema) is rows


def test_row_tells_where_it_stands_and_refuses_the_wrong_kind(
    library: Library,
) -> None:
    row = library.read_table(schemas.SPECIES)[0]

    assert row.where("cas") == "species.csv:2:cas"
    assert row["id"] == "aces"
    assert row.number("cas") is None
    assert row.counts("cas") == {}
    with pytest.raises(TypeError, match="not a required number"):
        row.figure("cas")
    with pytest.raises(TypeError, match="not a required whole number"):
        row.integer("cas")


def test_what_the_users_rows_make_inconsistent_is_the_users_fault(
    tmp_path: Path,
) -> None:
    """Our materials hold sodium as +1; a row of the user says otherwise."""
    root = knowledge_root()
    header, *rows = root.joinpath("ions.csv").read_text("utf-8").splitlines()
    sodium = next(row for row in rows if row.startswith("sodium,"))
    changed = sodium.replace("sodium,", "sodium,", 1).replace(",1,", ",2,", 1)
    assert changed != sodium
    with pytest.raises(InputError, match=r"materials\.csv:"):
        overlaid(tmp_path / "own", ions=f"{header}\n{changed}\n")


def test_a_folder_without_tables_is_no_overlay(tmp_path: Path) -> None:
    with pytest.raises(InputError, match="holds no table"):
        overlaid(tmp_path / "own")


@pytest.mark.parametrize(
    ("text", "said"),
    [
        ("floor_value = 0.0\n", "floor_value: 0, allowed a number above 0"),
        ("floor_value = -1\n", "floor_value: -1, allowed a number above 0"),
        ("floor_value = nan\n", "floor_value: nan is out of range"),
        ("floor_valu = 0.1\n", "floor_valu: unknown setting, allowed floor_value"),
        ("weights = 1\n", "weights: a number, allowed a table"),
        ('[weights]\ncapacity = "1"\n', "weights.capacity: a text, allowed a number"),
        ("[sizing]\nweighable_mmol_l = []\n", "an empty list"),
        ("[sizing]\nweighable_mmol_l = [1, -2]\n", "allowed a number above 0"),
        ("source = 1\n", "source: a number, allowed a text"),
        ("a = " + "[" * 5000, "nested too deeply"),
    ],
)
def test_settings_of_the_user_that_fit_none_of_ours(
    text: str, said: str, tmp_path: Path
) -> None:
    (tmp_path / "criteria.toml").write_text(text, "utf-8")
    with pytest.raises(InputError) as caught:
        _ = open_library(Store(knowledge_root(), tmp_path)).criteria
    assert said in caught.value.message


def test_limits_of_the_user_that_do_not_rise_are_refused_at_load(
    tmp_path: Path,
) -> None:
    """A ceiling below the usual range would size a buffer by it."""
    root = knowledge_root()
    header, *rows = root.joinpath("precedent.csv").read_text("utf-8").splitlines()
    row = next(r for r in rows if r.startswith("citrate,subcutaneous,"))
    changed = row.replace(",5,15,20,", ",5,15,4,", 1)
    assert changed != row
    with pytest.raises(InputError, match=r"precedent\.csv:2:.*is not rising"):
        overlaid(tmp_path / "own", precedent=f"{header}\n{changed}\n")
