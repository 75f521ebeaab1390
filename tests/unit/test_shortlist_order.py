"""What stands first, and what the shortlist says where an answer is not known."""

from __future__ import annotations

from typing import Any

import pytest

from formbuf import load_library, shortlist
from formbuf.advice.evaluate import less_titrant
from formbuf.advice.missing_facts import missing_that_matter
from formbuf.advice.results import Shortlist
from formbuf.errors import InputError
from formbuf.library.rules import load_rulebook
from formbuf.output.explain_parts import exposures_grid
from formbuf.product.brief import brief_from_mapping

LIBRARY = load_library()
BASE: dict[str, Any] = {
    "product": {"route": "intravenous", "form": "liquid"},
    "ph": {"target": 8.5, "low": 8.2, "high": 8.8},
    "storage": [{"temperature_c": 5.0}],
    "container": {"type": "glass_vial", "fill_volume_ml": 10.0},
    "tonicity": {"agent": "sodium_chloride"},
    "drug": {"kind": "small_molecule"},
}
#: An amine of which no enthalpy is known.
AMINE: dict[str, Any] = {
    "species": [
        {
            "id": "amx",
            "family": "amine or amino acid",
            "source": "report 12",
            "step": [{"pka": 8.4, "acid_charge": 1}],
        }
    ],
    "material": [
        {
            "id": "amx_base",
            "contents": {"amx": 1},
            "molar_mass_g_mol": 150.0,
            "source": "report 12",
        }
    ],
    "system": [{"id": "amx_buffer", "species": ["amx"], "base_material": "amx_base"}],
    "override": [
        {
            "rule": "no_precedent",
            "reason": "our own toxicology covers it",
            "name": "A. Chemist",
            "date": "2026-01-05",
        }
    ],
}


def run(**changes: Any) -> Shortlist:
    """Return the shortlist of the base brief with changes."""
    return shortlist(brief_from_mapping(BASE | changes), LIBRARY)


def test_the_plainest_salt_stands_for_its_species() -> None:
    """`practice`: at equal merit the hydrochloride before the acetate, sodium first."""
    heads = {c.system.species[0]: c.key for c in run().heads}
    assert heads["tris"] == "tris_hydrochloride"
    assert heads["histidine"] == "histidine_hydrochloride"

    nasal = {"product": {"route": "nasal"}, "ph": {"target": 5.5}}
    result = run(**nasal, container={"type": "plastic_bottle"})
    heads = {c.system.species[0]: c.key for c in result.heads}
    assert heads["phosphate"] == "sodium_phosphate"


def test_an_unknown_enthalpy_is_never_shown_as_no_drift() -> None:
    """The drift shown is the one taken, 20 K at -0.030 per K, and a note says so."""
    c = run(**AMINE).candidate("amx_buffer")

    assert c.ph_drift == pytest.approx(0.60, abs=0.01)
    assert c.criteria["temperature_drift"].value == pytest.approx(0.60, abs=0.01)
    assert any("pH at 5 C is not known" in note for note in c.notes)


def test_a_storage_window_is_open_where_the_enthalpy_is_unknown() -> None:
    """It neither passes nor fails in silence."""
    ph = {**BASE["ph"], "storage_low": 8.3, "storage_high": 8.7}
    c = run(**AMINE, ph=ph).candidate("amx_buffer")
    assert any("storage window is open" in note for note in c.notes)


def test_self_buffering_is_not_faulted_for_being_no_buffer() -> None:
    """The kind table lists buffers: the product without one is not in it."""
    drug = {
        "kind": "antibody",
        "concentration_mg_ml": 150.0,
        "titration": [
            {"ph": 5.0, "base_mmol_l": -12.0},
            {"ph": 5.8, "base_mmol_l": 0.0},
            {"ph": 7.0, "base_mmol_l": 14.0},
        ],
    }
    c = run(drug=drug, ph={"target": 5.8}).candidate("none")

    assert c.criteria["precedent"].desirability == 1.0
    assert c.criteria["precedent"].text == "no buffer: established on this route"
    carried = round(100.0 * c.carried_share)
    assert carried > 100
    assert f"carries {carried} % of the loads" in c.criteria["capacity"].text


def test_water_alone_carries_the_loads_of_a_very_acid_product() -> None:
    """At pH 2 acid from 1.9 to 1.7 takes 7 mmol/L, base from 2.1 to 2.3 takes 3."""
    c = run(ph={"target": 2.0, "low": 1.7, "high": 2.3}).candidate("none")
    assert c.standing == "back-up"
    assert any("by water and excipients alone" in note for note in c.notes)


def test_the_words_fit_a_drug_that_is_no_protein() -> None:
    c = run(drug={"kind": "lipid_nanoparticle"}).candidate("none")
    assert c.standing == "not evaluable"
    assert "protein" not in c.notes[0]


def test_osmolality_out_of_limits_is_said_once_for_all() -> None:
    """High with sucrose 20 %, low where nothing fills the room."""
    limits = {"low_mosm_kg": 280.0, "high_mosm_kg": 320.0, "target_mosm_kg": 300.0}
    much = run(
        tonicity=limits | {"agent": "sodium_chloride"},
        excipient=[{"material": "sucrose", "percent_w_v": 20.0}],
    )
    bare = run(tonicity=limits | {"fill": False})

    above = [w for w in much.warnings if "above the limit 320" in w]
    below = [w for w in bare.warnings if "below the limit 280" in w]
    assert len(above) == len(below) == 1
    assert above[0].endswith("every candidate")


def test_an_excluded_ion_of_the_tonicity_agent_is_named() -> None:
    result = run(exclude=["sodium"])
    assert any(
        "the tonicity agent sodium chloride brings it" in w for w in result.warnings
    )
    made_of = {w.material for c in result.heads for w in c.composition}
    assert "sodium_hydroxide" not in made_of


def test_no_load_at_all_is_said() -> None:
    loads = {"acid_mmol_l": 0.0, "base_mmol_l": 0.0}
    result = run(loads=loads, container={"type": "tube"})
    assert any("no load to carry: capacity" in w for w in result.warnings)
    assert not any("no acid or base load was stated" in w for w in result.warnings)


def test_weights_that_all_fall_away_are_refused() -> None:
    """A weight on freezing alone orders nothing in a product that is never frozen."""
    names = (
        *("capacity", "temperature_drift", "tonicity_share"),
        *("compatibility", "precedent", "dose_burden"),
    )
    with pytest.raises(InputError, match="has weight 0"):
        run(ranking={"weights": dict.fromkeys(names, 0.0)})


def test_a_product_made_to_a_threshold_is_not_below_it() -> None:
    """pH 6.00 is not below 6 because an equilibrium was solved to 5.9999998."""
    result = run(
        product={"route": "subcutaneous"},
        ph={"target": 6.0, "low": 5.7, "high": 6.3},
        drug={"kind": "antibody", "concentration_mg_ml": 100.0},
        tonicity={"agent": "sucrose"},
    )
    c = result.candidate("histidine_hydrochloride")
    fired = {f.rule for f in c.findings if f.outcome == "fired"}
    assert "R100" not in fired


def test_a_question_waits_for_the_one_it_arises_from() -> None:
    """Whether the drug is a colloid comes before how much salt the colloid bears."""
    result = run(drug={"kind": "small_molecule", "groups": []})
    found = missing_that_matter(
        {c.key: c.findings for c in result.candidates if not c.dropped_by},
        load_rulebook(LIBRARY).vocabulary,
        limit=100,
    )
    asked = {m.fact.name for m in found}
    open_facts = {n for c in result.heads for f in c.findings for n in f.missing}
    assert "colloid_ionic_strength_limit_mol_kg" in open_facts
    assert "electrolyte_sensitive_colloid" in asked
    assert "colloid_ionic_strength_limit_mol_kg" not in asked


def test_a_labelling_threshold_is_not_shown_as_a_limit_of_safety() -> None:
    """A litre of saline brings 150 times the sodium from which a leaflet names it."""
    result = run(ph={"target": 7.4}, dose={"volume_ml": 1000.0})
    c = result.candidate("sodium_phosphate")
    sodium = next(e for e in c.exposures if e.substance == "sodium")
    row = next(r for r in exposures_grid(c.exposures).rows if r[0] == "sodium")

    assert sodium.limit_use == "label"
    assert any(cell.endswith("for labelling") for cell in row)


ACID_DRUG: dict[str, Any] = {
    "kind": "small_molecule",
    "concentration_mmol_l": 485.0,
    "pka": [{"pka": 4.45, "acid_charge": 0}],
}


def test_what_neutralises_the_drug_is_no_burden_of_the_buffer() -> None:
    """A free acid takes its hydroxide with any buffer and with none.

    The osmolality of 5 mmol/L phosphate stays what it is, and nothing is dropped for
    sodium that belongs to the drug.
    """
    ph = {"target": 7.4, "low": 6.9, "high": 7.9}
    route = {"route": "subcutaneous", "form": "liquid"}
    acid = run(product=route, ph=ph, drug=ACID_DRUG)
    plain = run(product=route, ph=ph)

    c, same = (r.candidate("sodium_phosphate") for r in (acid, plain))
    assert c.rank is not None
    amounts = {w.material: w.mmol_l for w in c.composition}
    assert amounts["sodium_hydroxide"] == pytest.approx(485.0, rel=0.01)
    per_mmol = c.buffer_osmolality_mosm_kg / c.concentration_mmol_l
    expected = same.buffer_osmolality_mosm_kg / same.concentration_mmol_l
    assert per_mmol == pytest.approx(expected, rel=0.15)
    assert not any(s.id == "osmolality" for one in acid.dropped for s in one.screens)
    assert any("above the limit" in w for w in acid.warnings)


def test_titrant_of_the_bare_product_is_taken_off_whatever_the_hydroxide() -> None:
    own = less_titrant(
        {"dipotassium_hydrogen_phosphate": 5.0, "potassium_hydroxide": 480.0},
        {"sodium_hydroxide": 484.0},
    )
    assert own == {"dipotassium_hydrogen_phosphate": 5.0}
    assert less_titrant({"hydrochloric_acid": 12.0}, {"hydrochloric_acid": 10.0}) == {
        "hydrochloric_acid": 2.0
    }


def test_a_drug_that_is_not_counted_is_named() -> None:
    """Milligrams without a molar mass bring no particles; that is said."""
    drug = {"kind": "small_molecule", "concentration_mg_ml": 60.0}
    said = [w for w in run(drug=drug).warnings if "without a molar mass" in w]
    known = run(drug=drug | {"molar_mass_g_mol": 300.0}).warnings
    assert len(said) == 1
    assert not any("without a molar mass" in w for w in known)


def test_a_drug_without_a_counter_ion_is_said_to_be_the_free_form() -> None:
    ph = {"target": 7.4, "low": 6.9, "high": 7.9}
    free = run(ph=ph, drug=ACID_DRUG).warnings
    salt = run(ph=ph, drug=ACID_DRUG | {"counter_ion": "sodium"}).warnings
    assert any("mmol/L of sodium hydroxide goes to it" in w for w in free)
    assert not any("goes to it" in w for w in salt)
