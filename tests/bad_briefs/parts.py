"""Contradictions in container, gas, tonicity, drug, excipients, formulas, own rows."""

from bad_briefs.row import GOOD_HEAD, BadBrief, after_is_wrong

PARTS = [
    after_is_wrong(
        "alkali_from_plastic",
        '[container]\ntype = "plastic_bag"\ncount_alkali = true\n',
        "container.count_alkali (line 7)",
        "gives no alkali",
    ),
    after_is_wrong(
        "number_for_flag",
        "[container]\ncount_alkali = 1\n",
        "container.count_alkali (line 6)",
        "true or false",
    ),
    after_is_wrong(
        "text_for_flag",
        '[container]\ngas_permeable = "yes"\n',
        "container.gas_permeable (line 6)",
        "'yes'",
    ),
    after_is_wrong(
        "headspace_without_ratio",
        '[carbon_dioxide]\nexposure = "headspace"\n',
        "carbon_dioxide.exposure (line 6)",
        "headspace_ratio",
    ),
    after_is_wrong(
        "tonicity_above_limit",
        "[tonicity]\ntarget_mosm_kg = 700\nhigh_mosm_kg = 600\n",
        "tonicity.target_mosm_kg (line 6)",
        "600 or less",
    ),
    after_is_wrong(
        "tonicity_limits",
        "[tonicity]\nlow_mosm_kg = 600\nhigh_mosm_kg = 300\n",
        "tonicity.low_mosm_kg (line 6)",
        "below 300",
    ),
    after_is_wrong(
        "drug_kind",
        '[drug]\nkind = "monoclonal antibody"\n',
        "drug.kind (line 6)",
        hint="'antibody'",
    ),
    after_is_wrong(
        "two_concentrations",
        "[drug]\nconcentration_mg_ml = 5\nconcentration_mmol_l = 5\n",
        "drug.concentration_mg_ml (line 6)",
        "one of the two",
    ),
    after_is_wrong(
        "pka_without_molar_mass",
        "[drug]\nconcentration_mg_ml = 5\n[[drug.pka]]\npka = 9\nacid_charge = 1\n",
        "drug.molar_mass_g_mol (line 5)",
        "missing",
    ),
    after_is_wrong(
        "pka_with_site_charges",
        "[[drug.pka]]\npka = 3\nacid_charge = 0\n[[drug.pka]]\npka = 9\nacid_charge = 1\n",
        "drug.pka[2].acid_charge (line 10)",
        "whole molecule",
        "allowed -1",
    ),
    after_is_wrong(
        "charge_with_decimals",
        "[[drug.pka]]\npka = 3\nacid_charge = 0.5\n",
        "drug.pka[1].acid_charge (line 7)",
        "whole number",
    ),
    after_is_wrong(
        "titration_falls",
        "[drug]\ntitration = [{ph = 5, base_mmol_l = 0}, {ph = 6, base_mmol_l = -1}]\n",
        "drug.titration[2] (line 6)",
        "does not rise",
    ),
    after_is_wrong(
        "no_amount", '[[excipient]]\nmaterial = "sucrose"\n', "excipient[1] (line 5)"
    ),
    after_is_wrong(
        "two_amounts",
        '[[excipient]]\nmaterial = "sucrose"\nmg_ml = 80\ng_l = 80\n',
        "excipient[1].g_l (line 8)",
        "exactly one of",
    ),
    after_is_wrong(
        "amount_in_wrong_unit",
        '[[excipient]]\nmaterial = "sucrose"\nmmol_ml = 80\n',
        "excipient[1].mmol_ml (line 7)",
        "unknown key",
        hint="'mmol_l' instead of 'mmol_ml'",
    ),
    after_is_wrong(
        "percent_over_100",
        '[[excipient]]\nmaterial = "sucrose"\npercent_w_v = 120\n',
        "excipient[1].percent_w_v (line 7)",
        "0 to 100",
    ),
    BadBrief(
        "none_excluded",
        'exclude = ["none"]\n' + GOOD_HEAD,
        "exclude[1] (line 1)",
        ("always shown",),
    ),
    BadBrief(
        "excluded_and_required",
        'exclude = ["tris"]\nrequire = ["tris"]\n' + GOOD_HEAD,
        "exclude[1] (line 1)",
        ("also required",),
    ),
    BadBrief(
        "unknown_role",
        'consider_roles = ["reserch"]\n' + GOOD_HEAD,
        "consider_roles[1] (line 1)",
        ("adjuster",),
        "'research'",
    ),
    after_is_wrong(
        "candidate_empty",
        '[[candidate]]\nname = "x"\n',
        "candidate[1] (line 5)",
        "neither",
    ),
    after_is_wrong(
        "candidate_both",
        '[[candidate]]\nname = "x"\nsystem = "glycine"\nmaterials = {glycine = 5}\n',
        "candidate[1].materials (line 8)",
        "beside system",
    ),
    after_is_wrong(
        "candidate_without_concentration",
        '[[candidate]]\nsystem = "glycine"\n',
        "candidate[1].system (line 6)",
        "concentration_mmol_l",
    ),
    after_is_wrong(
        "salt_as_system",
        '[[candidate]]\nsystem = "sodium_chloride"\nconcentration_mmol_l = 10\n',
        "candidate[1].system (line 6)",
        "is no buffer",
        "holds no pH",
    ),
    after_is_wrong(
        "strong_acid_with_strong_base",
        '[[candidate]]\nname = "x"\n[candidate.materials]\n'
        "hydrochloric_acid = 10\nsodium_hydroxide = 10\n",
        "candidate[1].materials (line 7)",
        "is no buffer",
        "strong acid and its strong base",
    ),
    after_is_wrong(
        "override_without_reason",
        '[[override]]\nrule = "R027"\nname = "N. N."\ndate = 2026-01-31\n',
        "override[1].reason (line 5)",
        "missing",
    ),
    after_is_wrong(
        "override_reason_too_short",
        '[[override]]\nrule = "R027"\nname = "N. N."\nreason = "ok"\ndate = 2026-01-31\n',
        "override[1].reason (line 8)",
        "at least 10",
    ),
    after_is_wrong(
        "override_date",
        '[[override]]\nrule = "R027"\nname = "N. N."\nreason = "measured and fine"\n'
        'date = "31.01.2026"\n',
        "override[1].date (line 9)",
        "ISO date",
    ),
    after_is_wrong(
        "weight_negative",
        "[ranking.weights]\ncapacity = -1\n",
        "ranking.weights.capacity (line 6)",
        "too small",
    ),
    after_is_wrong(
        "anchor_ends_equal",
        "[ranking.anchors.capacity]\nfull = 5\nfloor = 5\n",
        "ranking.anchors.capacity.floor (line 7)",
        "equals full",
    ),
    after_is_wrong(
        "fact_is_table", "[facts]\nx = {y = 1}\n", "facts.x (line 6)", "is neither"
    ),
    after_is_wrong("fact_is_nan", "[facts]\nx = nan\n", "facts.x (line 6)", "finite"),
    after_is_wrong(
        "fact_name", '[facts]\n"Is it?" = true\n', "facts.Is it? (line 6)", "id"
    ),
    after_is_wrong(
        "species_without_step",
        '[[species]]\nid = "ours"\nsource = "report 7"\n',
        "species[1].step (line 5)",
        "missing",
    ),
    after_is_wrong(
        "material_solubility_without_temperature",
        '[[material]]\nid = "ours"\nsource = "report 7"\nmolar_mass_g_mol = 100\n'
        "contents = {ours = 1}\nsolubility_g_per_100g_water = 5\n",
        "material[1].solubility_g_per_100g_water (line 10)",
        "both or neither",
    ),
    after_is_wrong(
        "same_id_twice",
        '[[system]]\nid = "ours"\nspecies = ["tris"]\nacid_material = "tromethamine"\n'
        * 2,
        "system[2].id (line 10)",
        "used twice",
    ),
    BadBrief(
        "age_against_population",
        '[product]\nroute = "nasal"\npopulation = "adult"\n[ph]\ntarget = 6\n'
        "[dose]\nage_years = 3\n",
        "dose.age_years (line 7)",
        ("population adult", "18 to below"),
    ),
    after_is_wrong(
        "ratio_without_headspace",
        "[carbon_dioxide]\nheadspace_ratio = 0.5\n",
        "carbon_dioxide.headspace_ratio (line 6)",
        'only with exposure = "headspace"',
    ),
    after_is_wrong(
        "tonicity_below_limit",
        "[tonicity]\ntarget_mosm_kg = 200\nlow_mosm_kg = 240\n",
        "tonicity.target_mosm_kg (line 6)",
        "240 or more",
    ),
    after_is_wrong(
        "ions_of_nothing",
        "[drug]\ncounter_ion_per_mole = 2\n",
        "drug.counter_ion_per_mole (line 6)",
        "both or neither",
    ),
    after_is_wrong(
        "titration_of_one_point",
        "[drug]\ntitration = [{ph = 5, base_mmol_l = 0}]\n",
        "drug.titration (line 6)",
        "one point",
    ),
    after_is_wrong(
        "candidate_without_name",
        "[[candidate]]\nmaterials = {glycine = 5}\n",
        "candidate[1] (line 5)",
        "no name",
    ),
    after_is_wrong(
        "concentration_of_materials",
        '[[candidate]]\nname = "x"\nmaterials = {glycine = 5}\nconcentration_mmol_l = 5\n',
        "candidate[1].concentration_mmol_l (line 8)",
        "without system",
    ),
    after_is_wrong(
        "anchor_without_ends",
        "[ranking.anchors.capacity]\n",
        "ranking.anchors.capacity (line 5)",
        "neither full nor floor",
    ),
    after_is_wrong(
        "system_without_material",
        '[[system]]\nid = "ours"\nspecies = ["tris"]\n',
        "system[1] (line 5)",
        "names no material",
    ),
    after_is_wrong(
        "fact_too_long",
        f"[facts]\nx = {[0] * 51}\n",
        "facts.x (line 6)",
        "at most 50",
    ),
    after_is_wrong(
        "day_that_never_was",
        '[[override]]\nrule = "R027"\nname = "N. N."\nreason = "measured and fine"\n'
        'date = "2026-02-30"\n',
        "override[1].date (line 9)",
        "ISO date",
    ),
]
