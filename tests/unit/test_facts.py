"""The facts that rules rest on: what is given, inferred, computed, or silent."""

from __future__ import annotations

import dataclasses

import pytest
from rule_support import (
    brief_text,
    judged,
    library,
    quantities,
    rulebook,
    sheet,
    situation,
)

from formbuf.errors import InputError
from formbuf.library.vocabulary import MISSING
from formbuf.product.facts import candidate_facts, product_facts
from formbuf.product.quantities import exposures, reference_mass_g_mol

ANTIBODY = 'kind = "antibody"\nconcentration_mg_ml = 50'
SUCROSE = '[[excipient]]\nmaterial = "sucrose"\npercent_w_v = 8'


def product(text, **known):
    return product_facts(situation(text, **known))


# -- facts of a product ------------------------------------------------------------


def test_silence_is_missing_and_never_no():
    facts = product(brief_text("subcutaneous", 6.0, drug=ANTIBODY))
    for name in (
        "light_exposed",
        "polysorbate",
        "deamidation_hotspot",
        "reducing_sugar",
    ):
        assert facts.values[name] is MISSING
        assert facts.origins[name] == "missing"
    assert facts.values["excipients_listed"] is False
    assert "light_exposed" in facts.missing


def test_a_list_of_excipients_makes_absence_a_no():
    facts = product(brief_text("subcutaneous", 6.0, drug=ANTIBODY, rest=SUCROSE))
    assert facts.values["reducing_sugar"] is False
    assert facts.origins["reducing_sugar"] == "silence"
    assert facts.values["aluminium_salt"] is False
    # a polysorbate stands in no table of materials, so its absence says nothing
    assert facts.values["polysorbate"] is MISSING
    none = brief_text("subcutaneous", 6.0, rest="[facts]\nexcipients_listed = true")
    assert product(none).values["reducing_sugar"] is False


def test_what_an_excipient_contains_is_inferred():
    rest = '[[excipient]]\nmaterial = "glucose_monohydrate"\npercent_w_v = 5'
    facts = product(brief_text("intravenous", 7.4, rest=rest))
    assert facts.values["reducing_sugar"] is True
    assert facts.origins["reducing_sugar"] == "inferred"
    agent = '[tonicity]\nagent = "glucose_anhydrous"'
    assert product(brief_text("intravenous", 7.4, rest=agent)).values["reducing_sugar"]


def test_an_assumed_kind_of_drug_is_silence_and_a_stated_one_is_not():
    unsaid = product(brief_text("intravenous", 7.4))
    assert unsaid.values["drug_kind"] is MISSING
    assert unsaid.values["drug_groups"] is MISSING
    stated = product(brief_text("intravenous", 7.4, drug='kind = "none"'))
    assert stated.values["drug_kind"] == "none"
    assert stated.values["drug_groups"] == frozenset()
    assert stated.origins["drug_groups"] == "not asked"


def test_what_is_not_asked_has_its_stated_value():
    facts = product(brief_text("subcutaneous", 6.0, drug=ANTIBODY)).values
    assert facts["adjuvant"] == "none"
    assert facts["drug_groups"] == frozenset()
    assert facts["corneal_damage"] is False
    assert facts["diluents"] == frozenset()
    assert facts["drug_is_protein"] is True
    assert facts["protein_mg_ml"] == 50.0
    vaccine = product(brief_text("intramuscular", 6.5, drug='kind = "vaccine"')).values
    assert vaccine["adjuvant"] is MISSING
    assert vaccine["drug_is_protein"] is MISSING


def test_computed_facts_of_a_product():
    rest = (
        "[[storage]]\ntemperature_c = 5\n[[storage]]\ntemperature_c = -40\n"
        '[[storage]]\nkind = "accelerated"\ntemperature_c = 40\n'
        '[facts]\ndiluents = ["compound_sodium_lactate"]\n'
    )
    text = brief_text(
        "intravenous", 6.0, drug=ANTIBODY, product='population = "infant"', rest=rest
    )
    facts = product(text, drug_capacity_mmol_l_ph=4.0).values
    assert facts["storage_temperature_gap_c"] == 20.0
    assert facts["coldest_storage_temperature_c"] == -40.0
    assert facts["warmest_temperature_c"] == 5.0  # accelerated studies do not count
    assert facts["freezes"] is True
    assert facts["age_years"] == pytest.approx(28 / 365.25)
    assert facts["age_weeks"] == pytest.approx(4.0)
    assert facts["diluent_contains_calcium"] is True
    assert facts["diluted_before_use"] is True
    assert facts["drug_capacity_mmol_l_ph"] == 4.0
    assert facts["frozen_window_given"] is False


@pytest.mark.parametrize(
    ("named", "expected"),
    [('["glucose_5"]', False), ('["other"]', MISSING), ('"none"', False)],
)
def test_calcium_of_diluents(named, expected):
    text = brief_text("intravenous", 7.0, rest=f"[facts]\ndiluents = {named}")
    assert product(text).values["diluent_contains_calcium"] is expected


def test_an_answer_wins_over_inference_and_unknown_over_silence():
    text = brief_text("intravenous", 7.0, drug=ANTIBODY, rest=(
        '[facts]\nultrafiltration = false\namine_reactive_reagent = "unknown"\n'
    ))  # fmt: skip
    facts = product(text)
    assert facts.values["ultrafiltration"] is False
    assert facts.origins["ultrafiltration"] == "given"
    assert facts.values["amine_reactive_reagent"] is MISSING
    silent = product(brief_text("intravenous", 7.0, drug=ANTIBODY))
    assert silent.values["ultrafiltration"] is True
    assert silent.values["amine_reactive_reagent"] is False


@pytest.mark.parametrize(
    ("lines", "message"),
    [
        ("light_exposd = true", "facts.light_exposd (line 9): no rule tests this fact"),
        ("light_exposed = 1", "does not fit, value 1, allowed true or"),
        ('light_exposed = "yes"', "allowed true or false"),
        ("iron_ug_l = -3", "does not fit, value -3, allowed a number from 0"),
        ("iron_ug_l = true", "allowed a number from 0 to 1e+06 (ug/L)"),
        ('adjuvant = "alum"', "does not fit, value 'alum', allowed none, alum"),
        ('preservatives = ["phenol", "x"]', "allowed none, or a list of benzalkonium"),
        ("preservatives = 3", "allowed none, or a list of"),
        ('drug_kind = "protein"', "is held in drug.kind, value 'protein', allowed only"),
        ("age_weeks = 3", "is computed, value 3, allowed nothing here"),
        ("light_exposed = 1\niron_ug_l = -3", "facts.iron_ug_l"),
    ],
)  # fmt: skip
def test_answers_that_do_not_fit_are_refused(lines, message):
    with pytest.raises(InputError) as caught:
        situation(brief_text("subcutaneous", 6.0, rest=f"[facts]\n{lines}"))
    assert message in caught.value.message
    assert len(caught.value.message.splitlines()) == len(lines.splitlines())


def test_an_unknown_group_of_the_drug_is_refused():
    with pytest.raises(
        InputError,
        match=r"drug\.groups\[1\] \(line \d+\): does not fit, value 'betalactam'",
    ):
        situation(brief_text("intravenous", 7.0, drug='groups = ["betalactam"]'))


# -- facts of a candidate ----------------------------------------------------------


def test_amounts_of_a_candidate():
    rest = (
        "[dose]\nvolume_ml = 200\nper_day = 2\ninfusion_rate_ml_h = 100\n"
        'body_mass_kg = 50\n[[excipient]]\nmaterial = "sodium_chloride"\nmmol_l = 100\n'
    )
    where = situation(brief_text("intravenous", 6.0, rest=rest))
    facts = sheet(where, "sodium_citrate", 20.0, osmolality_mosm_kg=286.0).values
    assert facts["citrate_mmol_l"] == pytest.approx(20.0)
    assert facts["citrate_mmol_dose"] == pytest.approx(4.0)
    assert facts["citrate_mmol_day"] == pytest.approx(8.0)
    assert facts["citrate_mmol_kg_h"] == pytest.approx(20.0 * 0.1 / 50.0)
    assert facts["sodium_mmol_dose"] == pytest.approx(facts["sodium_mmol_l"] * 0.2)
    assert facts["sodium_chloride_mmol_l"] == pytest.approx(100.0)
    assert facts["sodium_chloride_equivalent_percent"] == pytest.approx(0.9)
    assert facts["phosphate_mmol_day"] == 0.0
    assert facts["potassium_mmol_l"] == 0.0
    assert facts["calcium_mmol_l"] == 0.0
    assert facts["volatile_fraction"] == 0.0
    assert facts["frozen_drift_class"] == "not_computed"


def test_solver_noise_does_not_cross_a_threshold():
    # made to pH 6 exactly, histidine must not count as below 6
    found = judged(brief_text("subcutaneous", 6.0), "histidine_hydrochloride")
    assert found["R100"].truth is False
    assert found["R100"].values["ph"] == 6.0


def test_boron_and_age_of_an_eye_drop():
    rest = "[dose]\nvolume_ml = 0.05\nper_day = 8\nage_years = 1"
    text = brief_text("ophthalmic_topical", 7.4, rest=rest)
    facts = sheet(situation(text), "sodium_borate", 200.0).values
    # 200 mmol/L x 0.4 mL/day x 10.81 g/mol
    assert facts["boron_mg_day"] == pytest.approx(0.8648, rel=1e-3)
    assert judged(text, "sodium_borate", 200.0)["R023"].truth is False
    assert judged(text, "sodium_borate", 300.0)["R023"].truth is True


def test_brushite_saturation_against_a_hand_calculation():
    rest = '[[excipient]]\nmaterial = "calcium_chloride_dihydrate"\nmmol_l = 1'
    where = situation(brief_text("intravenous", 7.4, rest=rest))
    made = quantities(where, "sodium_phosphate", 10.0)
    facts = candidate_facts(where, product_facts(where), made).values
    root = made.ionic_strength_mol_kg**0.5
    gamma = 10 ** (-4 * 0.5100 * root / (1 + 1.5 * root))  # Archer & Wang 1990
    free = made.forms_mmol_l["phosphate"][-2]
    by_hand = (1e-3 * gamma) * (free * 1e-3 * gamma) / 10**-6.59
    assert facts["brushite_saturation_ratio"] == pytest.approx(by_hand, rel=1e-3)
    assert 7.0 < free < 9.0


def test_brushite_is_open_while_calcium_is_unsaid():
    open_ = judged(brief_text("intravenous", 7.4), "sodium_phosphate")["R001"]
    assert open_.outcome == "not evaluable"
    assert "calcium_mmol_l" in open_.missing


def test_the_users_calcium_counts_where_it_is_more():
    rest = "[facts]\ncalcium_mmol_l = 3.0\n"
    facts = sheet(situation(brief_text("nasal", 6.0, rest=rest)), "sodium_citrate", 5.0)
    assert facts.values["calcium_mmol_l"] == 3.0
    rest += '[[excipient]]\nmaterial = "calcium_chloride_dihydrate"\nmmol_l = 8\n'
    more = sheet(situation(brief_text("nasal", 6.0, rest=rest)), "sodium_citrate", 5.0)
    assert more.values["calcium_mmol_l"] == pytest.approx(8.0)


def test_free_acid_known_only_warmer_counts_once_it_is_high():
    # fumaric acid: 0.68 g/100 g at 25 C (CRC Handbook, memory), 59 mmol/kg
    def ratio(stored_c, mmol_l):
        rest = f"[[storage]]\ntemperature_c = {stored_c}"
        where = situation(brief_text("oral_liquid", 3.0, rest=rest))
        facts = sheet(where, "sodium_fumarate", mmol_l)
        return facts.values["neutral_form_saturation_ratio"]

    assert ratio(5, 20.0) is MISSING
    assert 0.5 < ratio(5, 80.0) < 1.5
    assert 0.0 < ratio(25, 20.0) < 0.5


def test_precedent_facts():
    where = situation(brief_text("intravenous", 7.4))
    hepes = sheet(where, "hepes_sodium", 10.0).values
    assert hepes["precedent_level"] in ("none", "avoid", "not_listed")
    assert hepes["in_pharmacopoeia"] is False
    phosphate = sheet(where, "sodium_phosphate", 10.0).values
    assert phosphate["precedent_level"] == "established"
    assert phosphate["in_pharmacopoeia"] is True
    assert 0.0 < phosphate["precedent_ceiling_ratio"] < 1.0
    none = sheet(where, "none", 0.0).values
    assert (none["precedent_level"], none["precedent_ceiling_ratio"]) == (
        "established",
        0.0,
    )


def test_frozen_class_words_are_those_of_the_vocabulary():
    where = situation(brief_text("subcutaneous", 7.0, product='form = "frozen"'))
    for word, expected in (
        ("sources disagree", "sources_disagree"),
        ("severe", "severe"),
        (None, "not_computed"),
        ("unknown", "not_computed"),
    ):
        made = quantities(where, "sodium_phosphate", 10.0, frozen_drift_class=word)
        facts = candidate_facts(where, product_facts(where), made).values
        assert facts["frozen_drift_class"] == expected
        assert expected in rulebook().vocabulary["frozen_drift_class"].choices


def test_exposures():
    rest = "[dose]\nvolume_ml = 10\nper_day = 3"
    where = situation(brief_text("intravenous", 8.0, rest=rest))
    made = quantities(where, "sodium_borate", 100.0)
    rows = {row.substance: row for row in exposures(made, where.brief, library())}
    assert rows["boron"].mg_dose == pytest.approx(10.81, rel=1e-3)
    assert rows["borate"].mg_day == pytest.approx(3 * 61.831, rel=1e-3)
    assert rows["borate"].mass_as == "boric_acid"
    assert rows["sodium"].mmol_day == pytest.approx(3 * rows["sodium"].mmol_dose)
    assert reference_mass_g_mol(library(), "nothing") == (None, "")


def test_a_sheet_of_facts_cannot_be_changed():
    where = situation(brief_text("subcutaneous", 6.0, drug=ANTIBODY))
    facts = product_facts(where)
    with pytest.raises(dataclasses.FrozenInstanceError):
        facts.values = {}
