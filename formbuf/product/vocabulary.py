"""The words a product brief may use: routes, forms, kinds, containers, patients.

The routes are those of ``routes.csv``; a test holds the two lists equal.
`MEANT` maps what people often write to the word that is meant; it serves hints only,
never a silent translation.
"""

from __future__ import annotations

from typing import Literal, get_args

Route = Literal[
    "intravenous",
    "subcutaneous",
    "intramuscular",
    "intradermal",
    "intra_articular",
    "intravitreal",
    "intracameral",
    "intrathecal_epidural",
    "ophthalmic_topical",
    "otic",
    "nasal",
    "inhalation",
    "irrigation",
    "oral_liquid",
    "topical",
]
RouteGroup = Literal[
    "parenteral", "ophthalmic_topical", "nasal", "inhalation", "oral", "topical"
]
Form = Literal["liquid", "frozen", "dried"]
State = Literal["liquid", "frozen", "dried"]
StorageKind = Literal["storage", "use", "accelerated", "body", "process"]
Population = Literal["adult", "elderly", "adolescent", "child", "infant", "neonate"]
Filing = Literal["ind", "impd", "nda", "anda", "bla", "maa", "other"]
Pharmacopoeia = Literal["usp_nf", "ph_eur", "jp"]
DrugKind = Literal[
    "antibody",
    "fusion_protein",
    "protein",
    "peptide",
    "small_molecule",
    "oligonucleotide",
    "vaccine",
    "vector",
    "lipid_nanoparticle",
    "none",
]
ContainerType = Literal[
    "glass_vial",
    "glass_ampoule",
    "glass_syringe",
    "glass_cartridge",
    "glass_bottle",
    "plastic_vial",
    "plastic_ampoule",
    "plastic_syringe",
    "plastic_bottle",
    "plastic_dropper",
    "plastic_bag",
    "tube",
]
Exposure = Literal["closed", "open", "headspace"]
Role = Literal[
    "adjuster", "stabiliser", "preservative", "antioxidant", "counter_ion", "research"
]

ROUTES: tuple[Route, ...] = get_args(Route)

#: Irrigation fluids meet opened tissue and cavities, so they count as parenteral.
ROUTE_GROUPS: dict[Route, RouteGroup] = {
    "intravenous": "parenteral",
    "subcutaneous": "parenteral",
    "intramuscular": "parenteral",
    "intradermal": "parenteral",
    "intra_articular": "parenteral",
    "intravitreal": "parenteral",
    "intracameral": "parenteral",
    "intrathecal_epidural": "parenteral",
    "irrigation": "parenteral",
    "ophthalmic_topical": "ophthalmic_topical",
    "otic": "topical",
    "nasal": "nasal",
    "inhalation": "inhalation",
    "oral_liquid": "oral",
    "topical": "topical",
}

#: Kind of drug in a brief -> kind in ``kind_precedent.csv``; "" where none applies.
KIND_GROUPS: dict[DrugKind, str] = {
    "antibody": "antibody_or_fusion",
    "fusion_protein": "antibody_or_fusion",
    "protein": "protein",
    "peptide": "peptide",
    "small_molecule": "small_molecule",
    "oligonucleotide": "oligonucleotide",
    "vaccine": "vaccine_or_vector",
    "vector": "vaccine_or_vector",
    "lipid_nanoparticle": "lipid_nanoparticle",
    "none": "",
}
BIOLOGIC_KINDS: frozenset[DrugKind] = frozenset(
    {
        "antibody",
        "fusion_protein",
        "protein",
        "vaccine",
        "vector",
        "lipid_nanoparticle",
    }
)
PROTEIN_KINDS: frozenset[DrugKind] = frozenset(
    {"antibody", "fusion_protein", "protein"}
)

#: Ionisable groups of proteins, those of ``side_chains.csv``; a test holds them equal.
PROTEIN_GROUPS: tuple[str, ...] = (
    "arginine",
    "aspartate",
    "c_terminus",
    "cysteine",
    "glutamate",
    "histidine",
    "lysine",
    "n_terminus",
    "tyrosine",
)

#: Neutral components that stay glassy when frozen or dried.
AMORPHOUS_SUGARS: frozenset[str] = frozenset({"sucrose", "trehalose"})

#: Criteria of the ranking, whose weights and anchors a brief may set.
CRITERIA: tuple[str, ...] = (
    "capacity",
    "temperature_drift",
    "tonicity_share",
    "frozen_drift",
    "compatibility",
    "precedent",
    "dose_burden",
)

#: Criteria with two ends in a unit, which a brief may move.
ANCHORED_CRITERIA: tuple[str, ...] = (
    "capacity",
    "temperature_drift",
    "tonicity_share",
    "dose_burden",
)

#: Age bands in years: ICH E11(R1) for the young, ICH E7 for 65 and over.
AGE_BANDS: dict[Population, tuple[float, float]] = {
    "neonate": (0.0, 28 / 365.25),
    "infant": (28 / 365.25, 2.0),
    "child": (2.0, 12.0),
    "adolescent": (12.0, 18.0),
    "adult": (18.0, 130.0),
    "elderly": (65.0, 130.0),
}

#: Names under which strong acids, strong bases and their salts are offered as buffers.
STRONG_ELECTROLYTES: frozenset[str] = frozenset(
    {
        "hydrochloric_acid",
        "hcl",
        "sodium_hydroxide",
        "naoh",
        "potassium_hydroxide",
        "koh",
        "sodium_chloride",
        "nacl",
        "potassium_chloride",
        "kcl",
    }
)
STRONG_IS_NO_BUFFER = (
    "is no buffer: a strong acid and its strong base keep no proton back, so their "
    "salt holds no pH"
)

MEANT: dict[str, str] = {
    "sc": "subcutaneous",
    "subq": "subcutaneous",
    "iv": "intravenous",
    "infusion": "intravenous",
    "im": "intramuscular",
    "id": "intradermal",
    "ivt": "intravitreal",
    "intrathecal": "intrathecal_epidural",
    "epidural": "intrathecal_epidural",
    "eye": "ophthalmic_topical",
    "eye_drop": "ophthalmic_topical",
    "eye_drops": "ophthalmic_topical",
    "ophthalmic": "ophthalmic_topical",
    "ocular": "ophthalmic_topical",
    "ear": "otic",
    "intranasal": "nasal",
    "nose": "nasal",
    "nasal_spray": "nasal",
    "skin": "topical",
    "cream": "topical",
    "vein": "intravenous",
    "muscle": "intramuscular",
    "under_the_skin": "subcutaneous",
    "mouth": "oral_liquid",
    "by_mouth": "oral_liquid",
    "lung": "inhalation",
    "inhaled": "inhalation",
    "nebuliser": "inhalation",
    "pulmonary": "inhalation",
    "oral": "oral_liquid",
    "dermal": "topical",
    "solution": "liquid",
    "lyophilised": "dried",
    "lyophilized": "dried",
    "lyo": "dried",
    "freeze_dried": "dried",
    "powder": "dried",
    "mab": "antibody",
    "monoclonal_antibody": "antibody",
    "enzyme": "protein",
    "fusion": "fusion_protein",
    "sirna": "oligonucleotide",
    "aav": "vector",
    "viral_vector": "vector",
    "lnp": "lipid_nanoparticle",
    "mrna": "lipid_nanoparticle",
    "drug": "small_molecule",
    "placebo": "none",
    "vial": "glass_vial",
    "glass": "glass_vial",
    "ampoule": "glass_ampoule",
    "ampule": "glass_ampoule",
    "syringe": "glass_syringe",
    "prefilled_syringe": "glass_syringe",
    "cartridge": "glass_cartridge",
    "dropper": "plastic_dropper",
    "bottle": "plastic_bottle",
    "plastic": "plastic_bottle",
    "bag": "plastic_bag",
    "air": "open",
    "refrigerated": "storage",
    "in_use": "use",
    "transport": "process",
    "newborn": "neonate",
    "paediatric": "child",
    "pediatric": "child",
    "geriatric": "elderly",
    "usp": "usp_nf",
    "ep": "ph_eur",
    "generic": "anda",
}


def is_biologic(kind: DrugKind) -> bool:
    """Whether a kind of drug is a biologic (kept cold, protected when frozen)."""
    return kind in BIOLOGIC_KINDS


def populations_at(age_years: float) -> tuple[Population, ...]:
    """Return the populations whose age band holds ``age_years``, youngest first."""
    return tuple(
        name for name, (low, high) in AGE_BANDS.items() if low <= age_years < high
    )
