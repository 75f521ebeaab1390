"""The batch sheet of an own formula that is a list of materials: weighed as it is."""

from __future__ import annotations

import json
from pathlib import Path
from typing import Any

import pytest
from cli_runner import Done, formbuf

from formbuf import load_library, read_brief, shortlist
from formbuf.product.composition import mixture
from formbuf.report.batch_data import batch_data

LIBRARY = load_library()
ACID = "sodium_dihydrogen_phosphate_monohydrate"
BASE = "disodium_hydrogen_phosphate_heptahydrate"
MIX = {ACID: 2.0, BASE: 8.0, "sodium_chloride": 100.0}
TITRATED = {BASE: 10.0, "hydrochloric_acid": 2.0}
BRIEF = """\
[product]
route = "intravenous"
[ph]
target = 7.4
low = 7.1
high = 7.7
prepare_temperature_c = 20
[[storage]]
temperature_c = 5
[tonicity]
agent = "sodium_chloride"
[[excipient]]
material = "sucrose"
mmol_l = 50
"""


@pytest.fixture
def brief(tmp_path: Path) -> str:
    """A brief with three formulas of materials and one of a system."""
    text = BRIEF
    for name, materials in (
        ("mix", MIX),
        ("titrated", TITRATED),
        ("acid only", {ACID: 10.0}),
    ):
        listed = ", ".join(f"{key} = {amount}" for key, amount in materials.items())
        text += f'[[candidate]]\nname = "{name}"\nmaterials = {{{listed}}}\n'
    text += (
        '[[candidate]]\nname = "usual"\nsystem = "sodium_phosphate"\n'
        "concentration_mmol_l = 12\n"
    )
    path = tmp_path / "brief.toml"
    path.write_text(text)
    return str(path)


def sheet(brief: str, name: str, *args: str) -> Done:
    return formbuf("batch-sheet", brief, "--system", name, "--volume", "2", *args)


def data(brief: str, name: str, *args: str) -> dict[str, Any]:
    done = sheet(brief, name, "--json", *args)
    assert done.code == 0, done.err
    found: dict[str, Any] = json.loads(done.out)
    return found


def test_what_is_weighed_is_the_formula_and_the_excipients(brief: str) -> None:
    """By hand: mmol/L times litres times molar mass."""
    (way,) = data(brief, "mix")["ways"]
    weighed = {line["material"]: line["weigh_g"] for line in way["lines"]}
    assert set(weighed) == {*MIX, "sucrose"}
    for key, mmol_l in {**MIX, "sucrose": 50.0}.items():
        mass = LIBRARY.find_material(key).molar_mass_g_mol.value
        assert weighed[key] == pytest.approx(mmol_l * 2.0 * mass / 1000.0)


def test_nothing_is_filled_up_or_titrated(brief: str) -> None:
    """The brief has a tonicity agent; the formula's own salt stays at its amount."""
    found = data(brief, "mix")
    (way,) = found["ways"]
    salt = next(x for x in way["lines"] if x["material"] == "sodium_chloride")
    assert salt["mmol_l"] == pytest.approx(100.0)
    assert found["inputs"]["tonicity_agent"] is None
    assert found["inputs"]["formula_mmol_l"] == MIX
    assert way["storage_readings"] == []


def test_readings_are_those_of_the_materials(brief: str) -> None:
    """At preparation and at 25 C, against the mixture put together here."""
    (way,) = data(brief, "mix")["ways"]
    mixed = mixture(LIBRARY, {**MIX, "sucrose": 50.0}, volume_temperature_c=25.0)
    read = {r["temperature_c"]: r["ph"] for r in way["readings"]}
    assert {5.0, 20.0, 25.0} <= set(read)
    for at in (20.0, 25.0):
        assert read[at] == pytest.approx(float(mixed.solve(at).ph), abs=1e-6)
    sums = way["check_sums"]
    assert sums["positive_meq_l"] == pytest.approx(sums["negative_meq_l"], abs=1e-6)
    assert sums["weighed_g"] + sums["water_g"] == pytest.approx(sums["batch_g"])


def test_errors_of_weighing_and_of_hydrates_are_given(brief: str) -> None:
    (way,) = data(brief, "mix")["ways"]
    errors = {e["material"]: e["d_ph"] for e in way["weighing_errors_1_percent"]}
    assert errors[ACID] < 0.0 < errors[BASE]
    assert {w["meant"] for w in way["wrong_hydrates"]} >= {ACID, BASE}


def test_a_strong_acid_of_the_formula_is_its_titrant(brief: str) -> None:
    (way,) = data(brief, "own:titrated")["ways"]
    roles = {line["material"]: line["role"] for line in way["lines"]}
    assert roles["hydrochloric_acid"] == "titrant"
    assert roles[BASE] == "buffer"


def test_that_the_other_ways_do_not_apply_is_said(brief: str) -> None:
    done = sheet(brief, "MIX")
    assert done.code == 0, done.err
    said = " ".join(done.out.split())
    assert "Batch sheet: 2 L of mix (own formula)" in said
    assert "Way A: the formula as it is given" in said
    assert "Way B" not in said
    assert "from acid and base forms together" in said
    assert "does not apply" in said
    assert "within the window 7.1 to 7.7; the target is 7.40" in said


def test_a_formula_outside_its_window_is_made_and_says_so(brief: str) -> None:
    said = " ".join(sheet(brief, "acid only").out.split())
    assert "outside the window 7.1 to 7.7" in said


def test_another_hydrate_in_hand_takes_its_place(brief: str) -> None:
    other = "disodium_hydrogen_phosphate_dihydrate"
    (way,) = data(brief, "mix", "--use", other)["ways"]
    line = next(x for x in way["lines"] if x["material"] == other)
    assert line["mmol_l"] == pytest.approx(8.0)
    assert BASE not in {x["material"] for x in way["lines"]}


def test_a_formula_of_a_system_is_still_titrated(brief: str) -> None:
    found = data(brief, "usual")
    assert found["inputs"]["formula_mmol_l"] is None
    assert found["inputs"]["concentration_mmol_l"] == pytest.approx(12.0)
    assert len(found["ways"]) == 2


@pytest.mark.parametrize(
    ("args", "code", "words"),
    [
        (
            ("--right-at", "5"),
            3,
            "--right-at: the formula 'mix' is a list of materials",
        ),
        (("--concentration", "5"), 2, "--concentration is given beside the formula"),
    ],
)
def test_what_a_list_of_materials_cannot_have(
    args: tuple[str, ...], code: int, words: str, brief: str
) -> None:
    done = sheet(brief, "mix", *args)
    assert done.code == code
    assert words in done.one_error()


def test_challenge_and_dilution_take_the_formula_as_it_is(brief: str) -> None:
    """Both start from the pH of the formula, not from the target."""
    mixed = mixture(LIBRARY, {**MIX, "sucrose": 50.0}, volume_temperature_c=25.0)
    ph = float(mixed.solve(25.0).ph)
    done = formbuf("challenge", brief, "--system", "mix", "--added", "0", "--json")
    assert done.code == 0, done.err
    (point,) = json.loads(done.out)["points"]
    assert point["ph"] == pytest.approx(ph, abs=1e-6)
    assert point["ph_unbuffered"] == pytest.approx(7.4, abs=1e-6)
    diluted = formbuf("dilute", brief, "--system", "mix", "--into", "glucose_5")
    assert diluted.code == 0, diluted.err
    assert "mix (own formula), target pH 7.40 at 25 C" in diluted.out


def test_the_report_weighs_the_formula_too(brief: str) -> None:
    """A formula of materials that heads the list: the annex is its own sheet."""
    result = shortlist(read_brief(brief), LIBRARY)
    own = result.candidate("own:titrated")
    assert own is not None
    found = batch_data(result, [own])
    assert found is not None
    (way,) = found["ways"]
    assert way["way"] == "as_given"
    weighed = {line["material"]: line["mmol_l"] for line in way["lines"]}
    assert weighed == {**TITRATED, "sucrose": 50.0}
