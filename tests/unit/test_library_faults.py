"""One broken table per fault: each names file, line and column, and the exit code.

The files in ``tests/data/bad`` are named ``table__fault.csv``. Each is tried twice: in
place of our table (exit code 4) and as a user's overlay (exit code 3).
"""

from __future__ import annotations

import shutil
from pathlib import Path

import pytest

from formbuf.errors import InputError, KnowledgeError
from formbuf.library import load_library
from formbuf.library.audit import audit
from formbuf.library.loader import open_library
from formbuf.library.store import Store, knowledge_root

BAD = Path(__file__).resolve().parent.parent / "data" / "bad"

# name of the file, line:column of the fault, words of the message
FAULTS = [
    ("species__missing_column", "1:name", "column is missing, allowed id, name"),
    ("species__extra_column", "1:colour", "unknown column, allowed id, name"),
    ("species__column_twice", "1:name", "column stands twice"),
    ("species__semicolons", "1:id;name;cas;family;candidate", "unknown column"),
    ("species__duplicate_key", "4:id", "duplicate of line 2 (id=glycolate)"),
    ("species__empty_file", "1:header", "file is empty"),
    ("species__latin1", "3:name", "byte 0xe9 is not UTF-8"),
    ("species__quote_unclosed", "3:row", "closed quotes"),
    ("species__cell_missing", "3:row", "4 cells, allowed 5"),
    ("species__blank_row", "3:row", "row is empty"),
    ("species__not_a_flag", "2:candidate", "'maybe' is not a flag, allowed yes, no"),
    ("species__not_an_id", "2:id", "'Glycolate acid' is not an id"),
    ("species__blank_at_end", "2:name", "begins or ends with a blank"),
    ("species__required_empty", "2:name", "empty, allowed a value"),
    ("species__unknown_family", "2:family", "'acid' is unknown, allowed amine"),
    ("species__without_steps", "2:id", "'glycolate' has no step in ionization.csv"),
    ("ionization__text_in_number", "2:pka", "'about 4.2' is not a number"),
    ("ionization__nan", "2:pka", "'nan' is not a number"),
    ("ionization__infinite", "2:pka", "'1e999' is out of range"),
    ("ionization__comma_decimal", "2:pka", "'4,21' is not a number"),
    ("ionization__out_of_range", "2:pka", "42 is out of range, allowed -5 to 20"),
    ("ionization__not_whole", "2:step", "'1.5' is not a number, allowed a whole"),
    ("ionization__unknown_source", "2:pka_source", "unknown id 'kettler_1959'"),
    ("ionization__unknown_basis", "2:pka_basis", "'certain' is unknown, allowed pub"),
    (
        "ionization__published_without_source",
        "2:pka_source",
        "no source for a published value",
    ),
    ("ionization__source_without_value", "2:dh_source", "given without dh_kj_mol"),
    ("ionization__value_without_basis", "2:dh_basis", "empty beside dh_kj_mol"),
    ("ionization__unknown_species", "2:species", "unknown id 'succinat'"),
    ("ionization__charge_gap", "3:acid_charge", "-2 after 0, allowed -1"),
    ("ionization__pka_not_ascending", "3:pka", "4.1 at step 2 after 4.21"),
    ("ionization__second_value", "2:confirmed_by", "is not a second value"),
    ("ionization__second_source", "2:confirmed_by", "unknown source 'harris'"),
    ("materials__unknown_content", "2:contents", "unknown component 'acetat'"),
    ("materials__not_pairs", "2:contents", "'acetate=1' is not a pair"),
    ("materials__content_twice", "2:contents", "'sodium' stands twice"),
    ("materials__content_not_positive", "2:contents", "'sodium:-1' is not positive"),
    ("systems__unknown_material", "2:acid_material", "unknown id 'acetic_acid'"),
    ("precedent__unknown_level", "2:level", "'common' is unknown, allowed established"),
]

# Found at load in an overlay, by the audit in our own tables.
AUDITED = [
    ("materials__molar_mass_wrong", "2:molar_mass_g_mol", "allowed 82.034"),
    ("materials__charge_not_balanced", "2:contents", "charge of +3"),
    ("materials__ions_not_of_formula", "2:contents", "sodium:1 but the formula has 2"),
    ("materials__units_not_of_formula", "2:contents", "4 C, allowed 2 as in"),
    ("materials__formula_unreadable", "2:formula", "'Xx'"),
    ("materials__too_much_water", "2:waters", "3 is more than the formula holds"),
]


def table_of(name: str) -> str:
    return name.split("__")[0] + ".csv"


@pytest.fixture
def knowledge(tmp_path: Path) -> Path:
    """A copy of the knowledge that a test may break."""
    root = knowledge_root()
    assert isinstance(root, Path)
    copy = tmp_path / "knowledge"
    shutil.copytree(root, copy)
    return copy


@pytest.fixture
def overlay(tmp_path: Path) -> Path:
    directory = tmp_path / "overlay"
    directory.mkdir()
    return directory


def test_every_bad_file_is_tried() -> None:
    tried = {name for name, _, _ in FAULTS + AUDITED} | {"ionization__step_missing"}
    assert tried == {path.stem for path in BAD.glob("*.csv")}


@pytest.mark.parametrize(("name", "place", "words"), FAULTS)
def test_fault_in_our_table_is_named_and_exits_4(
    knowledge: Path, name: str, place: str, words: str
) -> None:
    shutil.copy(BAD / f"{name}.csv", knowledge / table_of(name))

    with pytest.raises(KnowledgeError) as caught:
        open_library(Store(knowledge))

    assert caught.value.exit_code == 4
    start = f"{table_of(name)}:{place}: "
    found = [line for line in caught.value.faults if line.startswith(start)]
    assert any(words in line for line in found), caught.value


@pytest.mark.parametrize(("name", "place", "words"), FAULTS + AUDITED)
def test_fault_in_an_overlay_is_named_and_exits_3(
    overlay: Path, name: str, place: str, words: str
) -> None:
    file = overlay / table_of(name)
    shutil.copy(BAD / f"{name}.csv", file)

    with pytest.raises(InputError) as caught:
        open_library(Store(knowledge_root(), overlay))

    assert caught.value.exit_code == 3
    lines = caught.value.message.splitlines()
    found = [line for line in lines if line.startswith(f"{file}:{place}: ")]
    assert any(words in line for line in found), caught.value


@pytest.mark.parametrize(("name", "place", "words"), AUDITED)
def test_audit_names_what_loading_of_our_tables_leaves(
    knowledge: Path, name: str, place: str, words: str
) -> None:
    table = knowledge / "materials.csv"
    before = len(table.read_text(encoding="utf-8").splitlines())
    broken = (BAD / f"{name}.csv").read_text(encoding="utf-8").splitlines()[1]
    with table.open("a", encoding="utf-8") as stream:
        stream.write(f"{broken}\n")
    column = place.split(":")[1]

    faults = audit(open_library(Store(knowledge)))

    start = f"materials.csv:{before + 1}:{column}: "
    assert any(line.startswith(start) and words in line for line in faults), faults


def test_all_faults_are_reported_at_once(knowledge: Path) -> None:
    for name in ("species__not_a_flag", "ionization__nan", "systems__unknown_material"):
        shutil.copy(BAD / f"{name}.csv", knowledge / table_of(name))

    with pytest.raises(KnowledgeError) as caught:
        open_library(Store(knowledge))

    text = str(caught.value)
    assert "species.csv:2:candidate" in text
    assert "ionization.csv:2:pka" in text


def test_step_missing_in_our_table(knowledge: Path) -> None:
    shutil.copy(BAD / "ionization__step_missing.csv", knowledge / "ionization.csv")

    with pytest.raises(KnowledgeError) as caught:
        open_library(Store(knowledge))

    assert "ionization.csv:3:step: 3 after 1, allowed 2" in caught.value.faults


def test_an_overlay_step_that_breaks_our_ladder_is_blamed_on_the_overlay(
    overlay: Path,
) -> None:
    file = overlay / "ionization.csv"
    shutil.copy(BAD / "ionization__step_missing.csv", file)

    with pytest.raises(InputError) as caught:
        open_library(Store(knowledge_root(), overlay))

    # our step 2 of succinate (pKa 5.638, Kettler 1995) stands between the two rows
    line = "acid_charge: -1 after -1, allowed -2"
    assert f"{file}:3:{line}" in caught.value.message


@pytest.mark.parametrize("missing", ["species.csv", "VERSION"])
def test_missing_file_of_ours_exits_4(knowledge: Path, missing: str) -> None:
    (knowledge / missing).unlink()

    with pytest.raises(KnowledgeError, match=f"{missing}:1:file: file is missing"):
        open_library(Store(knowledge))


def test_missing_settings_file_exits_4(knowledge: Path) -> None:
    (knowledge / "criteria.toml").unlink(missing_ok=True)
    library = open_library(Store(knowledge))

    with pytest.raises(KnowledgeError, match=r"criteria\.toml:1:file: file is missing"):
        _ = library.criteria


def test_broken_settings_file_names_the_file(knowledge: Path, overlay: Path) -> None:
    (overlay / "criteria.toml").write_text("[weights\n", encoding="utf-8")
    (knowledge / "criteria.toml").write_text("[weights]\n", encoding="utf-8")
    library = open_library(Store(knowledge, overlay))

    with pytest.raises(InputError, match=r"criteria\.toml:1:file"):
        _ = library.criteria


def test_overlay_file_of_unknown_name_is_a_fault(overlay: Path) -> None:
    (overlay / "speceis.csv").write_text("id\n", encoding="utf-8")

    with pytest.raises(InputError, match=r"speceis.csv:1:file: .*species.csv"):
        open_library(Store(knowledge_root(), overlay))


def test_overlay_that_is_no_directory_exits_3(tmp_path: Path) -> None:
    with pytest.raises(InputError, match="is no directory"):
        load_library(tmp_path / "absent")


def test_byte_order_mark_and_windows_line_ends_are_accepted(knowledge: Path) -> None:
    plain = open_library(Store(knowledge))
    for table in ("species.csv", "ionization.csv", "materials.csv"):
        data = (knowledge / table).read_bytes()
        changed = b"\xef\xbb\xbf" + data.replace(b"\n", b"\r\n")
        (knowledge / table).write_bytes(changed)

    marked = open_library(Store(knowledge))

    assert marked.species == plain.species
    assert marked.materials == plain.materials


def test_overlay_may_leave_out_columns_that_may_be_empty(overlay: Path) -> None:
    text = "id,name,family,candidate\nacetate,acetic acid,carboxylic acid,no\n"
    (overlay / "species.csv").write_text(text, encoding="utf-8")

    library = open_library(Store(knowledge_root(), overlay))

    assert library.species["acetate"].is_candidate is False
    assert library.species["acetate"].cas == ""


def test_unused_source_is_a_fault(knowledge: Path) -> None:
    with (knowledge / "sources.csv").open("a", encoding="utf-8") as stream:
        stream.write("nobody_1900,Nobody,1900,,,,,\n")

    faults = audit(open_library(Store(knowledge)))

    assert any("'nobody_1900' is used nowhere" in fault for fault in faults)


def test_unknown_source_in_a_table_of_another_layer_is_a_fault(
    knowledge: Path,
) -> None:
    text = "limit,value,sources\nsodium,5,goldberg_2002 goldberg_1902\n"
    (knowledge / "own_limits.csv").write_text(text, encoding="utf-8")

    faults = audit(open_library(Store(knowledge)))

    assert (
        "own_limits.csv:2:sources: unknown id 'goldberg_1902', allowed ids of sources.csv"
        in faults
    )


def test_audit_reads_tables_that_loading_leaves_alone(knowledge: Path) -> None:
    table = knowledge / "water_properties.csv"
    text = table.read_text(encoding="utf-8").replace(",kell_1975,", ",kell_1957,", 1)
    table.write_text(text, encoding="utf-8")

    faults = audit(open_library(Store(knowledge)))

    assert any(
        fault.startswith("water_properties.csv:") and "'kell_1957'" in fault
        for fault in faults
    )


@pytest.mark.parametrize(
    ("table", "old", "new", "words"),
    [
        ("routes.csv", "nasal,4.5,6.5", "nasal,6.5,4.5", "rising limits"),
        ("glass_alkali.csv", "1,2,1.8", "1,3,1.8", "allowed no gap"),
        (
            "associations.csv",
            "borate,3,-1,1",
            "borate,3,-1,2",
            "allowed their negative",
        ),
        (
            "systems.csv",
            "acetate,acetic_acid_glacial,sodium_acetate_trihydrate",
            "acetate,citric_acid_monohydrate,sodium_acetate_trihydrate",
            "holds citrate, allowed acetate",
        ),
        ("ions.csv", "Na,1,22.990", "Na,1,23.990", "is not the mass of Na"),
        (
            "precedent.csv",
            "established,5,50,100",
            "established,60,50,100",
            "not rising",
        ),
    ],
)
def test_audit_finds_what_contradicts_itself(
    knowledge: Path, table: str, old: str, new: str, words: str
) -> None:
    text = (knowledge / table).read_text(encoding="utf-8")
    assert old in text
    (knowledge / table).write_text(text.replace(old, new, 1), encoding="utf-8")

    faults = audit(open_library(Store(knowledge)))

    assert any(f.startswith(f"{table}:") and words in f for f in faults), faults
