"""A user's list of inactive ingredients over the precedents; every row is invented."""

from __future__ import annotations

from pathlib import Path

import pytest
from cli_runner import EXAMPLES, formbuf

from formbuf.errors import InputError
from formbuf.library import load_library
from formbuf.library.inactive_file import (
    HEADINGS,
    cas_number,
    grams_per_litre_of,
    read_inactive_file,
)
from formbuf.library.inactive_ingredients import (
    ROUTES,
    SOURCE_ID,
    with_precedent_file,
)

HEADER = (
    "INGREDIENT_NAME,ROUTE,DOSAGE_FORM,CAS_NUMBER,UNII,POTENCY_AMOUNT,POTENCY_UNIT,"
    "MAXIMUM_DAILY_EXPOSURE,MAXIMUM_DAILY_EXPOSURE_UNIT,RECORD_UPDATED"
)


def _file(folder: Path, *rows: str, header: str = HEADER) -> Path:
    path = folder / "listed.csv"
    path.write_text("\n".join([header, *rows]) + "\n", "utf-8")
    return path


def _row(
    name: str = "INVENTED",
    route: str = "SUBCUTANEOUS",
    cas: str = "",
    amount: str = "1",
    unit: str = "mg/1mL",
    daily: str = "NA",
    daily_unit: str = "NA",
) -> str:
    return f'"{name}",{route},"INJECTION, SOLUTION",{cas},,{amount},{unit},{daily},{daily_unit},'


def _precedent(folder: Path, key: tuple[str, str], *rows: str):
    library = with_precedent_file(load_library(), _file(folder, *rows))
    return library.precedents[key], library


# --- matching


def test_a_row_is_matched_by_its_cas_number(tmp_path: Path) -> None:
    key = ("histidine", "subcutaneous")
    row, library = _precedent(tmp_path, key, _row("X Y Z", cas="0000071-00-1"))
    assert row.ceiling_mmol_l == pytest.approx(1000.0 / 155.157, rel=1e-3)
    assert row.concentration_basis == "published"
    assert row.overlay
    assert "line 2" in row.listed
    assert library.precedent_file is not None
    assert library.precedent_file.matched == 1


@pytest.mark.parametrize(
    ("name", "species"),
    [
        ("HISTIDINE", "histidine"),
        ("SODIUM PHOSPHATE, DIBASIC, HEPTAHYDRATE", "phosphate"),
        ("Dibasic Sodium Phosphate Heptahydrate", "phosphate"),
        ("Citric acid monohydrate", "citrate"),
        ("TROMETHAMINE", "tris"),
        ("sodium   acetate", "acetate"),
    ],
)
def test_a_row_is_matched_by_its_name(name: str, species: str, tmp_path: Path) -> None:
    row, _ = _precedent(tmp_path, (species, "subcutaneous"), _row(name))
    assert name.casefold().split()[0] in row.listed


def test_rows_that_are_no_material_of_ours_are_counted(tmp_path: Path) -> None:
    rows = [_row("GUM OF NOTHING"), _row("HISTIDINE"), _row("POLY-INVENTATE 80")]
    listed = with_precedent_file(load_library(), _file(tmp_path, *rows)).precedent_file
    assert listed is not None
    assert (listed.rows, listed.matched, listed.unmatched) == (3, 1, 2)
    assert listed.replaced == 1


def test_a_cas_number_that_contradicts_the_name_is_not_used(tmp_path: Path) -> None:
    path = _file(tmp_path, _row("HISTIDINE", cas="77-92-9"))
    library = with_precedent_file(load_library(), path)
    listed = library.precedent_file
    assert listed is not None
    assert listed.unused == {"CAS number and name disagree": 1}
    assert listed.replaced == 0
    ours = load_library().precedents
    assert dict(library.precedents) == dict(ours)


@pytest.mark.parametrize(
    ("row", "reason"),
    [
        (_row("SUCROSE"), "no acid-base species in it"),
        (_row("HISTIDINE", route="DENTAL"), "route is none of ours"),
        (_row("HISTIDINE", amount="NA"), "no concentration listed"),
        (_row("HISTIDINE", amount="0"), "concentration listed as zero"),
        (_row("HISTIDINE", unit="mg"), "unit is no mass per volume"),
        (_row("HISTIDINE", unit="% w/w"), "unit is no mass per volume"),
    ],
)
def test_matched_rows_without_a_figure_are_counted_by_reason(
    row: str, reason: str, tmp_path: Path
) -> None:
    listed = with_precedent_file(load_library(), _file(tmp_path, row)).precedent_file
    assert listed is not None
    assert listed.unused == {reason: 1}
    assert listed.matched == 1


# --- units and amounts


@pytest.mark.parametrize(
    ("unit", "factor"),
    [
        ("mg/1mL", 1.0),
        ("MG/ML", 1.0),
        ("mg / 5 mL", 0.2),
        ("g/L", 1.0),
        ("g/100ml", 10.0),
        ("mcg/mL", 1e-3),
        ("%w/v", 10.0),
        ("% W/V", 10.0),
        ("%", 10.0),
        ("mg/0mL", None),
        ("mg/vial", None),
        ("%w/w", None),
        ("mEq/mL", None),
        ("", None),
        ("NA", None),
    ],
)
def test_units_are_converted(unit: str, factor: float | None) -> None:
    assert grams_per_litre_of(unit) == (
        None if factor is None else pytest.approx(factor)
    )


def test_the_highest_row_of_a_route_stands(tmp_path: Path) -> None:
    rows = [
        _row("SODIUM PHOSPHATE, MONOBASIC, MONOHYDRATE", amount="1.38"),
        _row("SODIUM PHOSPHATE, DIBASIC, ANHYDROUS", amount="14.2"),
        _row("SODIUM PHOSPHATE, DIBASIC, ANHYDROUS", amount="7.1"),
        _row("SODIUM PHOSPHATE, DIBASIC, ANHYDROUS", "INTRAVENOUS", amount="70"),
    ]
    row, library = _precedent(tmp_path, ("phosphate", "subcutaneous"), *rows)
    assert row.ceiling_mmol_l == pytest.approx(100.0, rel=1e-3)
    assert "line 3" in row.listed
    other = library.precedents["phosphate", "intravenous"]
    assert other.ceiling_mmol_l == pytest.approx(493.1, rel=1e-3)


def test_a_material_of_two_species_gives_both(tmp_path: Path) -> None:
    """Lysine acetate holds one of each."""
    _, library = _precedent(
        tmp_path,
        ("acetate", "subcutaneous"),
        _row("X", cas="57282-49-2", amount="20.6"),
    )
    for species in ("lysine", "acetate"):
        row = library.precedents[species, "subcutaneous"]
        assert row.ceiling_mmol_l == pytest.approx(100.0, rel=2e-2)


def test_a_daily_exposure_caps_what_a_day_may_bring(tmp_path: Path) -> None:
    daily = _row("CITRIC ACID", amount="NA", unit="NA", daily="19.2", daily_unit="mg")
    row, _ = _precedent(tmp_path, ("citrate", "subcutaneous"), daily)
    assert row.daily_mmol == pytest.approx(0.1, rel=1e-3)
    assert (
        row.ceiling_mmol_l
        == load_library().precedents["citrate", "subcutaneous"].ceiling_mmol_l
    )
    brief = ["--ph", "6", "--route", "subcutaneous", "--drug-kind", "antibody"]
    brief += ["--volume-ml", "10"]
    done = formbuf(
        "shortlist", *brief, "--precedent", str(tmp_path / "listed.csv"), "--json"
    )
    citrate = next(
        c for c in done.data()["candidates"] if c["system"] == "sodium_citrate"
    )
    assert citrate["ceiling_mmol_l"] == pytest.approx(10.0, rel=1e-3)


def test_a_species_that_is_listed_has_precedent(tmp_path: Path) -> None:
    ours = load_library().precedents
    key = next(
        k for k, v in ours.items() if v.level == "none" and k[1] == "subcutaneous"
    )
    species = key[0]
    material = next(
        m for m in load_library().materials.values() if list(m.contents) == [species]
    )
    row, _ = _precedent(tmp_path, key, _row(material.name))
    assert row.level == "limited"
    assert row.level_basis == "published"
    assert "counts as limited" in row.listed


def test_what_is_avoided_stays_avoided(tmp_path: Path) -> None:
    row, _ = _precedent(
        tmp_path, ("borate", "intravenous"), _row("BORIC ACID", "INTRAVENOUS")
    )
    assert row.level == "avoid"


def test_every_route_of_the_words_is_one_of_ours() -> None:
    assert set(ROUTES.values()) <= set(load_library().route_limits)


# --- in the shortlist


@pytest.mark.slow
def test_the_figure_is_marked_in_every_output(tmp_path: Path) -> None:
    path = _file(tmp_path, _row("HISTIDINE", amount="3.1"))
    brief = str(EXAMPLES / "antibody.toml")
    before = formbuf("shortlist", brief, "--json").data()
    done = formbuf("shortlist", brief, "--precedent", str(path), "--json")
    data = done.data()
    assert data["knowledge"]["precedent_file"]["matched"] == 1
    assert before["knowledge"]["precedent_file"] is None
    name = "histidine_hydrochloride"
    ours, theirs = (
        next(c for c in d["candidates"] if c["system"] == name) for d in (before, data)
    )
    assert theirs["ceiling_mmol_l"] == pytest.approx(19.98, abs=0.01)
    assert theirs["ceiling_mmol_l"] != ours["ceiling_mmol_l"]
    capacity = theirs["criteria"]["capacity"]
    assert SOURCE_ID in capacity["sources"]
    assert "the file of the user" in capacity["text"]
    assert any("1 of 1 rows" in warning for warning in data["warnings"])
    text = formbuf("explain", brief, name, "--precedent", str(path), columns=200).out
    assert "by the file of the user, histidine: ceiling 20 mmol/L" in text
    assert "List of inactive ingredients as given by the user, listed.csv" in text


# --- broken files

GOOD = _row("HISTIDINE")
BROKEN = [
    ("", "header: no column ingredient"),
    (HEADER, "no row follows the header"),
    (HEADER.replace("ROUTE,", "WAY,") + "\n" + GOOD, "header: no column route"),
    (HEADER.replace("POTENCY_AMOUNT", "HOW") + "\n" + GOOD, "no column amount"),
    (HEADER.replace("POTENCY_UNIT", "IN") + "\n" + GOOD, "no column unit"),
    (HEADER.replace("UNII", "ROUTE") + "\n" + GOOD, "ROUTE: column stands twice"),
    (f"{HEADER}\nHISTIDINE,NASAL", ":2:row: 2 cells, allowed 10"),
    (f"{HEADER}\n{GOOD}\n{GOOD},1", ":3:row: 11 cells"),
    (f"{HEADER}\n{_row('')}", ":2:ingredient: empty"),
    (f"{HEADER}\n{_row(route='')}", ":2:route: empty"),
    (f"{HEADER}\n{_row(amount='1,5')}", ":2:row: 11 cells"),
    (f"{HEADER}\n{_row(amount='many')}", ":2:amount: 'many' is no number"),
    (f"{HEADER}\n{_row(amount='-1')}", ":2:amount: '-1' is no number"),
    (f"{HEADER}\n{_row(amount='nan')}", ":2:amount: 'nan' is no number"),
    (f"{HEADER}\n{_row(amount='1e400')}", ":2:amount: '1e400' is no number"),
    (f"{HEADER}\n{_row(amount='0.1-0.2')}", ":2:amount"),
    (f"{HEADER}\n{_row(daily='lots')}", ":2:daily: 'lots' is no number"),
    (f"{HEADER}\n{_row(cas='77-92-8')}", ":2:cas: '77-92-8' does not check"),
    (f"{HEADER}\n{_row(cas='water')}", ":2:cas: 'water', allowed a CAS number"),
    (f'{HEADER}\n"HISTIDINE', "cannot be split into cells"),
    (f'{HEADER}\n"HIS"TIDINE,NASAL,,,,1,mg/mL,,,', "cannot be split into cells"),
    (f"{HEADER}\n{GOOD}\nHIS\0TIDINE,NASAL,,,,1,mg/mL,,,", ""),
]


@pytest.mark.parametrize(("text", "said"), BROKEN, ids=range(len(BROKEN)))
def test_broken_files_are_told_by_line(text: str, said: str, tmp_path: Path) -> None:
    path = tmp_path / "listed.csv"
    path.write_text(text, "utf-8")
    done = formbuf(
        "shortlist", str(EXAMPLES / "antibody.toml"), "--precedent", str(path)
    )
    if not said:  # a zero byte within a name is only an unknown name
        assert done.code == 0
        return
    assert done.code == 3
    assert said in done.one_error()


def test_every_bad_row_is_told_at_once(tmp_path: Path) -> None:
    rows = [_row(amount="x"), GOOD, _row(cas="1"), _row("", amount="y")]
    with pytest.raises(InputError) as caught:
        read_inactive_file(_file(tmp_path, *rows))
    lines = str(caught.value).splitlines()
    assert len(lines) == 4
    assert [line.rpartition("listed.csv:")[2][:2] for line in lines] == [
        "2:",
        "4:",
        "5:",
        "5:",
    ]


def test_very_many_bad_rows_are_counted(tmp_path: Path) -> None:
    with pytest.raises(InputError, match="and 975 more rows like these"):
        read_inactive_file(_file(tmp_path, *[_row(amount="x")] * 1000))


@pytest.mark.parametrize(
    ("make", "said"),
    [
        (lambda p: None, "no such file"),
        (lambda p: p.mkdir(), "is a directory"),
        (lambda p: p.write_bytes(b"INGREDIENT\n\xff"), "listed.csv:2:row: byte 0xff"),
    ],
)
def test_files_that_cannot_be_read(make, said: str, tmp_path: Path) -> None:
    path = tmp_path / "listed.csv"
    make(path)
    with pytest.raises(InputError, match=said):
        read_inactive_file(path)


def test_windows_files_and_other_headings_are_read(tmp_path: Path) -> None:
    path = tmp_path / "listed.csv"
    header = "Ingredient name;Route".replace(";", ",") + ",Potency Amount,potency unit"
    path.write_bytes(
        b"\xef\xbb\xbf" + f"{header}\r\nHistidine,Nasal,2,mg/mL\r\n\r\n".encode()
    )
    (row,) = read_inactive_file(path).rows
    assert (row.line, row.grams_per_litre) == (2, 2.0)


def test_headings_are_told_apart() -> None:
    names = [name for known in HEADINGS.values() for name in known]
    assert len(set(names)) == len(names)


@pytest.mark.parametrize("material", sorted(load_library().materials))
def test_every_cas_number_of_ours_checks(material: str) -> None:
    cas = load_library().materials[material].cas
    if cas:
        assert cas_number(cas) == (cas, "")
