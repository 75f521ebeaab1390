"""Names that no table holds, and options of the quick form."""

from __future__ import annotations

from typing import Any

from bad_briefs.row import GOOD_HEAD, BadBrief, after_is_wrong

#: Found only when the names are compared with the library.
NAMES = [
    BadBrief(
        "excluded_species",
        'exclude = ["phosfate"]\n' + GOOD_HEAD,
        "exclude[1] (line 1)",
        ("unknown species",),
        "'phosphate' instead of 'phosfate'",
    ),
    BadBrief(
        "required_salt",
        'require = ["sodium_chloride"]\n' + GOOD_HEAD,
        "require[1] (line 1)",
        ("is no buffer",),
    ),
    after_is_wrong(
        "excipient_material",
        '[[excipient]]\nmaterial = "sucros"\npercent_w_v = 8\n',
        "excipient[1].material (line 6)",
        "unknown material",
        hint="sucrose",
    ),
    after_is_wrong(
        "calcium_edetate",
        '[[excipient]]\nmaterial = "edetate_calcium_disodium_anhydrous"\nmg_ml = 0.5\n',
        "excipient[1].material (line 6)",
        "not modelled",
        hint="disodium_edetate_dihydrate",
    ),
    after_is_wrong(
        "tonicity_agent",
        '[tonicity]\nagent = "manitol"\n',
        "tonicity.agent (line 6)",
        hint="mannitol",
    ),
    after_is_wrong(
        "acid_as_tonicity_agent",
        '[tonicity]\nagent = "hydrochloric_acid"\n',
        "tonicity.agent (line 6)",
        "would move the pH",
    ),
    after_is_wrong(
        "candidate_system",
        '[[candidate]]\nsystem = "histidine"\nconcentration_mmol_l = 10\n',
        "candidate[1].system (line 6)",
        "unknown system",
        hint="its systems are histidine_acetate, histidine_hydro",
    ),
    after_is_wrong(
        "candidate_material",
        '[[candidate]]\nname = "x"\n[candidate.materials]\nl_histidin = 10\n',
        "candidate[1].materials.l_histidin (line 8)",
        hint="l_histidine",
    ),
    after_is_wrong(
        "candidate_of_salts",
        '[[candidate]]\nname = "x"\n[candidate.materials]\n'
        "calcium_chloride_dihydrate = 2\nsodium_hydroxide = 10\n",
        "candidate[1].materials (line 7)",
        "is no buffer",
    ),
    after_is_wrong(
        "counter_ion",
        '[drug]\ncounter_ion = "chlorid"\n',
        "drug.counter_ion (line 6)",
        hint="'chloride'",
    ),
    after_is_wrong(
        "criterion",
        "[ranking.weights]\ncapacty = 2\n",
        "ranking.weights.capacty (line 6)",
        "temperature_drift",
        hint="'capacity'",
    ),
    after_is_wrong(
        "criterion_without_anchors",
        "[ranking.anchors.precedent]\nfull = 1\n",
        "ranking.anchors.precedent (line 5)",
        "no ends to move",
    ),
    after_is_wrong(
        "logarithm_of_zero",
        "[ranking.anchors.capacity]\nfull = 0\n",
        "ranking.anchors.capacity.full (line 6)",
        "logarithmic",
    ),
    after_is_wrong(
        "override_system",
        '[[override]]\nrule = "R027"\nsystem = "phosphate"\nname = "N. N."\n'
        'reason = "measured and fine"\ndate = 2026-01-31\n',
        "override[1].system (line 7)",
        "unknown system",
    ),
    after_is_wrong(
        "own_material_contents",
        '[[material]]\nid = "ours"\nsource = "report 7"\nmolar_mass_g_mol = 100\n'
        "contents = {sodum = 1}\n",
        "material[1].contents.sodum (line 9)",
        hint="'sodium'",
    ),
    after_is_wrong(
        "own_system_species",
        '[[system]]\nid = "ours"\nspecies = ["triss"]\nacid_material = "tromethamine"\n',
        "system[1].species[1] (line 7)",
        hint="'tris'",
    ),
    BadBrief(
        "required_nonsense",
        'require = ["qqqq"]\n' + GOOD_HEAD,
        "require[1] (line 1)",
        ("unknown species or system",),
        "formbuf knowledge show systems",
    ),
    after_is_wrong(
        "misspelt_system",
        '[[candidate]]\nsystem = "sodium_phosfate"\nconcentration_mmol_l = 10\n',
        "candidate[1].system (line 6)",
        hint="'sodium_phosphate' instead of 'sodium_phosfate'",
    ),
    after_is_wrong(
        "formula_of_several",
        '[[excipient]]\nmaterial = "C6H14O6"\nmg_ml = 10\n',
        "excipient[1].material (line 6)",
        "fits several materials",
        "mannitol, sorbitol",
    ),
    after_is_wrong(
        "all_weights_zero",
        "[ranking.weights]\ncapacity = 0\ntemperature_drift = 0\ntonicity_share = 0\n"
        "frozen_drift = 0\ncompatibility = 0\nprecedent = 0\ndose_burden = 0\n",
        "ranking.weights (line 5)",
        "all zero",
    ),
    after_is_wrong(
        "own_system_material",
        '[[system]]\nid = "ours"\nspecies = ["tris"]\nacid_material = "tromethamin"\n',
        "system[1].acid_material (line 8)",
        hint="'tromethamine'",
    ),
]

BAD_OPTIONS: list[tuple[str, dict[str, Any], str, str]] = [
    ("ph_15", {"ph": 15.0}, "--ph: is too large, value 15", ""),
    ("ph_nan", {"ph": float("nan")}, "--ph: is no finite number", ""),
    ("ph_text", {"ph": "6"}, "--ph: must be a number", ""),
    ("route", {"route": "subcut"}, "--route: ", "'subcutaneous'"),
    ("route_empty", {"route": ""}, "--route: ", ""),
    ("form", {"form": "lyo"}, "--form: ", "'dried'"),
    ("kind", {"drug_kind": "mab"}, "--drug-kind: ", "'antibody'"),
    ("store_500", {"store": [5, 500]}, "--store: is too large, value 500", ""),
    ("store_inf", {"store": [float("-inf")]}, "--store: is no finite number", ""),
    ("store_twice", {"store": [5, 5]}, "--store: repeats an entry above", ""),
    ("mg_ml", {"drug_mg_ml": -1.0}, "--drug-mg-ml: is too small, value -1", ""),
    ("volume", {"volume_ml": 0.0}, "--volume-ml: is too small", ""),
    ("agent", {"tonicity_agent": "suger"}, "--tonicity-agent: unknown", ""),
    ("agent_acid", {"tonicity_agent": "hydrochloric_acid"}, "--tonicity-agent: ", ""),
]
