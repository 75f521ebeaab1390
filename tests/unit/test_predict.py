"""Prediction of a composition: published values, notes, and what is refused."""

from __future__ import annotations

import dataclasses
import math

import pytest

from formbuf.bench.predict import Prediction, predict
from formbuf.errors import InputError, UnknownNameError
from formbuf.library import Library, load_library
from formbuf.output.predict_page import predict_dict, predict_page
from formbuf.output.writers import render

STATE_KEYS = [
    "temperature_c",
    "ph",
    "ionic_strength_mol_kg",
    "capacity_mmol_kg_ph",
    "capacity_mmol_l_ph",
    "osmolality_mosm_kg",
    "carbon_dioxide_pa",
    "species",
    "notes",
]
PHOSPHATE = {
    "potassium_dihydrogen_phosphate": 25.0,
    "disodium_hydrogen_phosphate_anhydrous": 25.0,
}


@pytest.fixture(scope="module")
def library() -> Library:
    return load_library()


@pytest.fixture(scope="module")
def phosphate(library: Library) -> Prediction:
    return predict(library, PHOSPHATE, (25.0, 5.0), amounts="mmol/kg")


# published: pH standard of equal phosphates 0.025 mol/kg, 6.865 at 25 C and 6.951 at
# 5 C, and its buffer value 0.029 (Bates, Determination of pH, 2nd ed. 1973).
@pytest.mark.parametrize(("place", "ph"), [(0, 6.865), (1, 6.951)])
def test_ph_of_the_phosphate_standard(
    phosphate: Prediction, place: int, ph: float
) -> None:
    assert phosphate.states[place].ph == pytest.approx(ph, abs=0.02)


def test_capacity_of_the_phosphate_standard(phosphate: Prediction) -> None:
    assert phosphate.states[0].capacity_mmol_kg_ph == pytest.approx(29.0, abs=0.5)


def test_ionic_strength_is_that_of_its_ions(phosphate: Prediction) -> None:
    assert phosphate.states[0].ionic_strength_mol_kg == pytest.approx(0.1, abs=1e-4)


def test_states_stand_in_the_order_asked_for(library: Library) -> None:
    at = (40.0, 5.0, 25.0)
    found = predict(library, {"sucrose": 1.0}, at)
    assert tuple(state.temperature_c for state in found.states) == at


def test_json_keys(phosphate: Prediction) -> None:
    data = predict_dict(phosphate)
    assert list(data) == [
        "schema",
        "formbuf_version",
        "knowledge",
        "basis",
        "composition",
        "water_kg_l",
        "open_to_carbon_dioxide_pa",
        "states",
        "warnings",
    ]
    assert data["schema"] == "formbuf.predict/1"
    assert all(list(state) == STATE_KEYS for state in data["states"])
    assert list(data["composition"][0]) == ["material", "mmol_kg", "g_kg"]


def test_composition_per_litre_bears_its_unit(library: Library) -> None:
    data = predict_dict(predict(library, {"sucrose": 100.0}))
    assert list(data["composition"][0]) == ["material", "mmol_l", "g_l"]
    assert data["states"][0]["capacity_mmol_l_ph"] is not None
    assert 0.9 < data["water_kg_l"] < 1.0


@pytest.mark.parametrize(("moles", "masses"), [("mmol/L", "g/L"), ("mmol/kg", "g/kg")])
def test_masses_and_moles_agree(library: Library, moles: str, masses: str) -> None:
    first = predict(library, {"sodium_acetate_trihydrate": 20.0}, amounts=moles)
    grams = {a.material: a.grams for a in first.added}
    second = predict(library, grams, amounts=masses)
    one, other = first.states[0], second.states[0]
    assert one.ph == pytest.approx(other.ph, abs=1e-9)
    assert one.osmolality_mosm_kg == pytest.approx(other.osmolality_mosm_kg, rel=1e-9)


def test_a_unique_name_or_formula_works(library: Library) -> None:
    by_id = predict(library, {"disodium_hydrogen_phosphate_anhydrous": 5.0})
    by_formula = predict(library, {"Na2HPO4": 5.0})
    assert by_id.states == by_formula.states


# practice: pure water in equilibrium with air reads about pH 5.6.
def test_water_open_to_air(library: Library) -> None:
    found = predict(library, {"sucrose": 0.0}, open_to_carbon_dioxide_pa=42.0)
    assert found.states[0].ph == pytest.approx(5.6, abs=0.05)
    assert found.states[0].carbon_dioxide_pa == pytest.approx(42.0)


def test_pure_water_is_neutral(library: Library) -> None:
    state = predict(library, {"sucrose": 0.0}).states[0]
    assert state.ph == pytest.approx(7.0, abs=0.01)
    assert state.osmolality_mosm_kg == pytest.approx(0.0, abs=0.01)


def test_open_bicarbonate_holds_its_cation_only(library: Library) -> None:
    """Adding carbon dioxide by hand changes nothing where the gas decides."""
    soda = predict(
        library, {"sodium_hydrogen_carbonate": 10.0}, open_to_carbon_dioxide_pa=5000.0
    )
    lye = predict(library, {"sodium_hydroxide": 10.0}, open_to_carbon_dioxide_pa=5000.0)
    # the volume of the salt moves the molality a little
    assert soda.states[0].ph == pytest.approx(lye.states[0].ph, abs=1e-3)


def test_a_closed_solution_that_would_bubble_is_refused(library: Library) -> None:
    acid = {"sodium_hydrogen_carbonate": 50.0, "hydrochloric_acid": 50.0}
    with pytest.raises(InputError, match="kPa of carbon dioxide above it") as caught:
        predict(library, acid)
    assert "--open-to-carbon-dioxide" in caught.value.hint
    opened = predict(library, acid, open_to_carbon_dioxide_pa=43.0)
    assert opened.states[0].ph < 6.0


def test_mass_is_balanced_in_every_state(phosphate: Prediction) -> None:
    for state in phosphate.states:
        amounts = {(s.component, s.charge): s.mmol_kg for s in state.species}
        total = sum(v for (name, _), v in amounts.items() if name == "phosphate")
        assert total == pytest.approx(50.0, rel=1e-9)


@pytest.mark.parametrize(
    ("materials", "at", "words"),
    [
        ({"sodium_chloride": 154.0}, 90.0, "extrapolated"),
        ({"sodium_chloride": 154.0}, -5.0, "below the first ice"),
        ({"sodium_chloride": 900.0}, 25.0, "activity model was checked"),
        (
            {"calcium_chloride_dihydrate": 2.0, "citric_acid_monohydrate": 5.0},
            25.0,
            "not modelled",
        ),
        ({"sodium_hydrogen_carbonate": 5.0}, 70.0, "solubility of carbon dioxide"),
    ],
)
def test_notes_say_what_a_number_rests_on(
    library: Library, materials: dict[str, float], at: float, words: str
) -> None:
    state = predict(library, materials, (at,)).states[0]
    assert any(words in note for note in state.notes), state.notes


def test_an_unknown_enthalpy_is_said(library: Library) -> None:
    species = library.species["tris"]
    bare = dataclasses.replace(species.steps[0], dh_kj_mol=None)
    changed = dataclasses.replace(
        library,
        species={
            **library.species,
            "tris": dataclasses.replace(species, steps=(bare,)),
        },
    )
    materials = {"tromethamine": 10.0, "hydrochloric_acid": 5.0}
    warm, usual = predict(changed, materials, (37.0, 25.0)).states
    assert any("enthalpy of tris is unknown" in note for note in warm.notes)
    assert not any("enthalpy" in note for note in usual.notes)


@pytest.mark.parametrize(
    ("amount", "words"),
    [(-1.0, "allowed 0 to"), (math.nan, "nan"), (math.inf, "inf"), (1e9, "1e\\+09")],
)
def test_amounts_that_cannot_be(library: Library, amount: float, words: str) -> None:
    with pytest.raises(InputError, match=words):
        predict(library, {"sucrose": amount})


@pytest.mark.parametrize("at", [math.nan, math.inf, 500.0, -40.0])
def test_temperatures_that_cannot_be(library: Library, at: float) -> None:
    with pytest.raises(InputError, match="temperature"):
        predict(library, {"sucrose": 1.0}, (at,))


@pytest.mark.parametrize("pressure", [-1.0, math.nan, 1e7])
def test_pressures_that_cannot_be(library: Library, pressure: float) -> None:
    with pytest.raises(InputError, match="pressure of carbon dioxide"):
        predict(library, {"sucrose": 1.0}, open_to_carbon_dioxide_pa=pressure)


def test_nothing_to_predict(library: Library) -> None:
    with pytest.raises(InputError, match="no material"):
        predict(library, {})
    with pytest.raises(InputError, match="no temperature"):
        predict(library, {"sucrose": 1.0}, ())


def test_an_unknown_material_names_the_nearest(library: Library) -> None:
    with pytest.raises(UnknownNameError) as caught:
        predict(library, {"sucros": 1.0})
    assert "sucrose" in caught.value.hint


def test_a_material_under_two_names_is_refused(library: Library) -> None:
    twice = {"Na2HPO4": 1.0, "disodium_hydrogen_phosphate_anhydrous": 1.0}
    with pytest.raises(InputError, match="given twice"):
        predict(library, twice)


def test_too_much_for_a_litre_is_refused(library: Library) -> None:
    with pytest.raises(InputError, match="of each litre"):
        predict(library, {"sucrose": 5000.0})


def test_the_table_tells_notes_once_with_their_temperatures(library: Library) -> None:
    found = predict(library, {"sodium_chloride": 154.0}, (25.0, -5.0, -10.0))
    text = render(predict_page(found), "table", width=100)
    assert text.count("extrapolated") == 1
    assert "-5 C, -10 C: outside 0 to 77 C" in text


def test_csv_has_a_row_per_temperature(phosphate: Prediction) -> None:
    lines = render(predict_page(phosphate), "csv").splitlines()
    assert len(lines) == 3
    assert lines[0].startswith("temperature_c,ph,ionic_strength_mol_kg,")
