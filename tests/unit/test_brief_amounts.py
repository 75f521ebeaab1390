"""Completing a brief: amounts, own formulas, in-house rows, notices, overlays."""

from __future__ import annotations

from pathlib import Path

import pytest
from brief_support import HEAD, assumed_values, completed_text, quick_brief

from formbuf.errors import InputError, KnowledgeError
from formbuf.library import Library, load_library
from formbuf.product.brief import (
    brief_from_text,
    complete,
)
from formbuf.product.brief_filler import Filler


@pytest.fixture(scope="module")
def library() -> Library:
    return load_library()


# ---------------------------------------------------------------- amounts


@pytest.mark.parametrize(
    "amount",
    ["percent_w_v = 8", "mg_ml = 80", "g_l = 80", "mmol_l = 233.7152"],
)
def test_units_of_amounts_agree(amount: str, library: Library) -> None:
    # Sucrose 342.297 g/mol (IUPAC 2021 abridged weights): 80 g/L is 233.715 mmol/L.
    text = HEAD + f'[[excipient]]\nmaterial = "sucrose"\n{amount}\n'
    row = completed_text(text, library).brief.excipient[0]
    assert row.mmol_l == pytest.approx(80.0 / 342.297 * 1000.0, rel=1e-6)
    assert row.g_l == pytest.approx(80.0, rel=1e-6)
    assert row.stated == float(amount.split("=")[1])


def test_hydrates_are_weighed_as_they_are(library: Library) -> None:
    text = HEAD + '[[excipient]]\nmaterial = "trehalose_dihydrate"\nmg_ml = 37.8327\n'
    row = completed_text(text, library).brief.excipient[0]
    assert row.mmol_l == pytest.approx(100.0, rel=1e-4)


def test_materials_by_formula_or_name(library: Library) -> None:
    for name in ("NaCl", "sodium chloride", "sodium_chloride"):
        text = HEAD + f'[[excipient]]\nmaterial = "{name}"\nmmol_l = 50\n'
        assert (
            completed_text(text, library).brief.excipient[0].material
            == "sodium_chloride"
        )


def test_drug_concentrations(library: Library) -> None:
    tail = "[drug]\nconcentration_mg_ml = 5\nmolar_mass_g_mol = 250\n"
    drug = completed_text(HEAD + tail, library).brief.drug
    assert drug.concentration_mmol_l == pytest.approx(20.0)
    tail = "[drug]\nconcentration_mmol_l = 20\nmolar_mass_g_mol = 250\n"
    drug = completed_text(HEAD + tail, library).brief.drug
    assert drug.concentration_mg_ml == pytest.approx(5.0)


def test_drug_steps_are_sorted_by_pk(library: Library) -> None:
    tail = (
        "[[drug.pka]]\npka = 9.1\nacid_charge = 0\n"
        "[[drug.pka]]\npka = 2.3\nacid_charge = 1\n"
    )
    completed = completed_text(HEAD + tail, library)
    assert [step.pka for step in completed.brief.drug.pka] == [2.3, 9.1]
    assert any("without a concentration" in line for line in completed.warnings)


def test_own_formulas_get_material_ids(library: Library) -> None:
    tail = (
        '[[candidate]]\nname = "mine"\nmaterials = {"L-histidine" = 12, NaCl = 100}\n'
        '[[candidate]]\nsystem = "none"\n'
        '[[candidate]]\nsystem = "sodium_acetate"\nconcentration_mmol_l = 10\n'
    )
    mine, without, acetate = completed_text(HEAD + tail, library).brief.candidate
    assert dict(mine.materials) == {"l_histidine": 12.0, "sodium_chloride": 100.0}
    assert without.system == "none"
    assert acetate.name == "sodium acetate, 10 mmol/L"


# ---------------------------------------------------------------- own rows


OWN = """
[[species]]
id = "ours"
source = "in-house report 12"
pka_uncertainty = 0.02
step = [{pka = 9.0, acid_charge = 0}, {pka = 6.1, acid_charge = 1, dh_kj_mol = 30}]

[[species]]
id = "tris"
source = "in-house report 12"
step = [{pka = 8.1, acid_charge = 1}]

[[material]]
id = "ours_hydrochloride"
source = "in-house report 12"
contents = {ours = 1, chloride = 1}
molar_mass_g_mol = 180.2
solubility_g_per_100g_water = 20
solubility_temperature_c = 5

[[material]]
id = "polymer"
source = "data sheet"
contents = {polymer = 1}
molar_mass_g_mol = 8000

[[system]]
id = "ours_chloride"
species = ["ours"]
acid_material = "ours_hydrochloride"

[[excipient]]
material = "polymer"
mg_ml = 1
"""


def test_own_rows_lie_on_top_and_are_marked(library: Library) -> None:
    completed = completed_text('require = ["ours"]\n' + HEAD + OWN, library)
    wide = completed.library
    ours = wide.species["ours"]
    assert ours.overlay
    assert [step.pka.value for step in ours.steps] == [6.1, 9.0]
    assert ours.charges == (1, 0, -1)
    assert ours.steps[0].pka.uncertainty == 0.02
    assert wide.species["tris"].steps[0].pka.value == 8.1
    assert wide.species["tris"].cas == library.species["tris"].cas
    assert assumed_values(completed)["species.pka_uncertainty"] == 0.05
    source = wide.sources[ours.steps[0].pka.source]
    assert source.title == "in-house report 12"
    assert source.overlay
    assert wide.materials["ours_hydrochloride"].solubilities[0].temperature_c == 5.0
    assert wide.neutrals["polymer"].molar_mass_g_mol == 8000.0
    assert wide.systems["ours_chloride"].species == ("ours",)
    assert completed.brief.excipient[0].mmol_l == pytest.approx(0.125)
    assert "ours" not in library.species
    assert any("in-house values" in line for line in completed.warnings)


def test_no_own_rows_leave_the_library_alone(library: Library) -> None:
    assert completed_text(HEAD, library).library is library


# ---------------------------------------------------------------- notices


@pytest.mark.parametrize(
    ("text", "words"),
    [
        (HEAD.replace("6.0", "9.5"), "usual range of route subcutaneous"),
        (HEAD + "[tonicity]\ntarget_mosm_kg = 800\n", "target osmolality 800"),
        (HEAD + '[drug]\nkind = "antibody"\n', "protein itself buffers"),
        (HEAD + "[[storage]]\ntemperature_c = -40\n", "every storage temperature"),
        (HEAD + '[drug]\ncounter_ion = "chloride"\n', "counter_ion"),
        (
            HEAD + "[drug]\ntitration = [{ph = 5.9, base_mmol_l = -1}, "
            "{ph = 6.1, base_mmol_l = 1}]\n",
            "does not cover the window 5.7 to 6.3",
        ),
    ],
)
def test_notices(text: str, words: str, library: Library) -> None:
    assert any(words in line for line in completed_text(text, library).warnings)


def test_an_ordinary_brief_has_no_notices(library: Library) -> None:
    quick = quick_brief(library, route="subcutaneous", drug_kind="small_molecule")
    assert quick.warnings == ()


def test_overrides_anchors_and_facts_reach_the_completed_brief(
    library: Library,
) -> None:
    tail = (
        '[[override]]\nrule = "R027"\nsystem = "sodium_phosphate"\n'
        'reason = "frozen pH measured"\nname = "N. N."\ndate = 2026-01-31\n'
        "[ranking.anchors.capacity]\nfull = 3\n"
        "[facts]\npolysorbate = true\niron_ug_l = 12\n"
    )
    completed = completed_text(HEAD + tail, library)
    row = completed.brief.override[0]
    assert (row.rule, row.system, row.name) == ("R027", "sodium_phosphate", "N. N.")
    assert completed.brief.ranking.anchors["capacity"].full == 3.0
    assert completed.brief.ranking.anchors["capacity"].floor is None
    assert dict(completed.brief.facts) == {"polysorbate": True, "iron_ug_l": 12}
    echo = completed.to_dict()["brief"]
    assert echo["override"][0]["date"] == "2026-01-31"
    assert echo["facts"] == {"polysorbate": True, "iron_ug_l": 12}


BROKEN_DEFAULTS = [
    ("ph = 3\n", "ph: a number, allowed a table"),
    ("[ph]\nhalf_width = [0.3]\n", "allowed a table"),
    ("[ph]\nhalf_width = 0.3\n", "ph.half_width: a number, allowed a list"),
    ("[[ph.half_width]]\nvalue = 0.3\n", "unit is missing"),
    ('[[ph.half_width]]\nvalue=0.3\nunit=""\nbasis="x"\nreason="y"\n', "basis 'x'"),
    (
        '[[ph.half_width]]\nvalue=0.3\nunit=""\nbasis="published"\nreason="y"\n',
        "no source",
    ),
    (
        '[[ph.half_width]]\nvalue=0.3\nunit=""\nbasis="memory"\nreason="y"\nsource="z"\n',
        "unknown source 'z'",
    ),
    (
        '[[ph.half_width]]\nvalue=[1]\nunit=""\nbasis="memory"\nreason="y"\n',
        "neither number",
    ),
    (
        '[[ph.half_width]]\nvalue=1\nunit=""\nbasis="memory"\nreason="y"\nroute="z"\n',
        "unknown key 'route'",
    ),
    (
        '[[ph.half_width]]\nvalue=1\nunit=""\nbasis="memory"\nreason="y"\nforms="z"\n',
        "forms is no list",
    ),
    (
        (
            '[[ph.half_width]]\nvalue=1\nunit=""\nbasis="memory"\nreason="y"\n'
            'volume_from_ml="z"\n'
        ),
        "volume_from_ml is no number",
    ),
]


@pytest.mark.parametrize(("text", "words"), BROKEN_DEFAULTS)
def test_broken_defaults_of_an_overlay(text: str, words: str, tmp_path: Path) -> None:
    (tmp_path / "defaults.toml").write_text(text)
    with pytest.raises(InputError, match=r"defaults\.toml: ?ph") as caught:
        complete(brief_from_text(HEAD), load_library(tmp_path))
    assert words in caught.value.message


def test_overlay_replaces_the_cases_of_one_key(tmp_path: Path) -> None:
    (tmp_path / "defaults.toml").write_text(
        '[[ph.half_width]]\nvalue=0.5\nunit="pH"\nbasis="practice"\nreason="ours"\n'
    )
    brief = complete(brief_from_text(HEAD), load_library(tmp_path)).brief
    assert (brief.ph.low, brief.ph.high) == (5.5, 6.5)
    assert brief.ph.release_tolerance == 0.1


def test_a_key_without_a_general_case(library: Library) -> None:
    filler = Filler(brief_from_text(HEAD), library)
    with pytest.raises(
        KnowledgeError, match=r"defaults\.toml:container\.fill_volume_ml"
    ):
        filler.take("container.fill_volume_ml")
