"""What each table of ``knowledge/`` must look like.

The tables that every calculation needs come first; those read on demand follow.
Checks, rules and freezing tables that other layers own bring their own schema to
`formbuf.library.Library.read_table`.
"""

from __future__ import annotations

from formbuf.library.records import BASES
from formbuf.library.tables import Column, Schema

ROUTE_LEVELS = ("established", "limited", "none", "avoid")
KIND_LEVELS = ("usual", "established", "occasional", "none")
MONOGRAPHS = ("yes", "no", "unknown")
ROLES = (
    "none",
    "buffer",
    "adjuster",
    "antioxidant",
    "counter_ion",
    "preservative",
    "research",
    "stabiliser",
)
#: Stands for the ids of species.csv and ``none``, the product without a buffer.
SPECIES_OR_NONE = "species.csv or none"
FAMILIES = (
    "amine or amino acid",
    "carboxylic acid",
    "inorganic",
    "reference",
    "sulfonic amine",
)


def basis(name: str = "basis", *, required: bool = True) -> Column:
    """Return a column that holds a basis."""
    return Column(name, required=required, choices=BASES)


def source(name: str = "source", *, required: bool = False) -> Column:
    """Return a column that holds the id of a source."""
    return Column(name, "id", required=required, refers_to="sources.csv")


def key(name: str = "id") -> Column:
    """Return a required id."""
    return Column(name, "id", required=True)


def _number(name: str, low: float | None = None, high: float | None = None) -> Column:
    return Column(name, "number", low=low, high=high)


def _figure(name: str, low: float | None = None, high: float | None = None) -> Column:
    return Column(name, "number", required=True, low=low, high=high)


def _species(name: str = "species") -> Column:
    return Column(name, "id", required=True, refers_to="species.csv")


SOURCES = Schema(
    "sources.csv",
    (
        key(),
        Column("authors"),
        Column("year"),
        Column("title"),
        Column("container"),
        Column("locator_note"),
        Column("doi"),
        Column("note"),
    ),
    ("id",),
)
SPECIES = Schema(
    "species.csv",
    (
        key(),
        Column("name", required=True),
        Column("cas"),
        Column("family", required=True, choices=FAMILIES),
        Column("candidate", "flag", required=True),
    ),
    ("id",),
)
IONIZATION = Schema(
    "ionization.csv",
    (
        _species(),
        Column("step", "integer", required=True, low=1, high=12),
        Column("acid_charge", "integer", required=True, low=-8, high=8),
        _figure("pka", -5, 20),
        _figure("pka_uncertainty", 0, 2),
        source("pka_source"),
        Column("pka_locator"),
        basis("pka_basis"),
        _number("dh_kj_mol", -100, 150),
        _number("dh_uncertainty_kj_mol", 0, 50),
        source("dh_source"),
        Column("dh_locator"),
        basis("dh_basis", required=False),
        _number("dcp_j_mol_k", -1000, 1000),
        _number("dcp_uncertainty_j_mol_k", 0, 500),
        source("dcp_source"),
        Column("dcp_locator"),
        basis("dcp_basis", required=False),
        basis("uncertainty_basis"),
        Column("confirmed_by"),
        Column("conflict"),
        Column("note"),
    ),
    ("species", "step"),
)
ASSOCIATIONS = Schema(
    "associations.csv",
    (
        key("product"),
        _species(),
        Column("units", "integer", required=True, low=2, high=20),
        Column("charge", "integer", required=True, low=-20, high=20),
        Column("protons_released", "integer", required=True, low=0, high=20),
        _figure("log10_k", -100, 100),
        source(),
        Column("locator"),
        basis(),
        Column("note"),
    ),
    ("product",),
)
IONS = Schema(
    "ions.csv",
    (
        key(),
        Column("name", required=True),
        Column("formula", required=True),
        Column("charge", "integer", required=True, low=-4, high=4),
        _figure("molar_mass_g_mol", 1, 1000),
        source(),
        basis(),
    ),
    ("id",),
)
NEUTRALS = Schema(
    "neutrals.csv",
    (
        key(),
        Column("name", required=True),
        Column("kind", required=True, choices=("sugar", "polyol", "solvent")),
        Column("formula", required=True),
        _figure("molar_mass_g_mol", 1, 10000),
        source(),
        basis(),
    ),
    ("id",),
)
MATERIALS = Schema(
    "materials.csv",
    (
        key(),
        Column("name", required=True),
        Column("formula"),
        Column("contents", "counts", required=True),
        _figure("waters", 0, 30),
        _figure("molar_mass_g_mol", 1, 1e6),
        source("molar_mass_source"),
        basis("molar_mass_basis"),
        Column("cas"),
        basis("cas_basis", required=False),
        Column("modelled", "flag"),
        Column("note"),
    ),
    ("id",),
)
SOLUBILITIES = Schema(
    "solubilities.csv",
    (
        Column("material", "id", required=True, refers_to="materials.csv"),
        _number("temperature_c", -60, 150),
        _number("g_per_100g_water", 0, 10000),
        _number("uncertainty_g_per_100g_water", 0, 1000),
        Column("words"),
        source(),
        Column("locator"),
        basis(),
        Column("note"),
    ),
    ("material", "temperature_c"),
)
SYSTEMS = Schema(
    "systems.csv",
    (
        key(),
        Column("name", required=True),
        Column("role", required=True, choices=ROLES),
        Column("species", "ids", refers_to="species.csv"),
        Column("acid_material", "id", refers_to="materials.csv"),
        Column("base_material", "id", refers_to="materials.csv"),
        Column("acid_titrant", "id", required=True, refers_to="materials.csv"),
        Column("base_titrant", "id", required=True, refers_to="materials.csv"),
        Column("note"),
    ),
    ("id",),
)
PRECEDENT = Schema(
    "precedent.csv",
    (
        Column("species", "id", required=True, refers_to=SPECIES_OR_NONE),
        Column("route", "id", required=True, refers_to="routes.csv"),
        Column("level", required=True, choices=ROUTE_LEVELS),
        _number("usual_low_mmol_l", 0, 2000),
        _number("usual_high_mmol_l", 0, 2000),
        _number("ceiling_mmol_l", 0, 2000),
        Column("usp_nf", required=True, choices=MONOGRAPHS),
        Column("ph_eur", required=True, choices=MONOGRAPHS),
        Column("jp", required=True, choices=MONOGRAPHS),
        Column("monograph_note"),
        Column("usual_forms"),
        Column("reason", required=True),
        source(),
        Column("locator"),
        basis("level_basis"),
        basis("concentration_basis", required=False),
        basis("monograph_basis"),
    ),
    ("species", "route"),
)
KIND_PRECEDENT = Schema(
    "kind_precedent.csv",
    (
        key("kind"),
        key("route_group"),
        Column("species", "id", required=True, refers_to=SPECIES_OR_NONE),
        Column("level", required=True, choices=KIND_LEVELS),
        basis(),
        source(),
        Column("note"),
    ),
    ("kind", "route_group", "species"),
)
ROUTES = Schema(
    "routes.csv",
    (
        key("route"),
        _figure("ph_low", 0, 14),
        _figure("ph_high", 0, 14),
        _number("osmolality_low_mosm_kg", 0, 5000),
        _number("osmolality_high_mosm_kg", 0, 5000),
        _number("usual_volume_ml", 0, 10000),
        Column("usual_volume_is", choices=("typical", "largest")),
        source(),
        Column("locator"),
        basis(),
        Column("note"),
    ),
    ("route",),
)
GLASS_ALKALI = Schema(
    "glass_alkali.csv",
    (
        _figure("fill_volume_above_ml", 0, 10000),
        _number("fill_volume_to_ml", 0, 10000),
        _figure("limit_ml_0p01m_hcl_per_100ml", 0, 100),
        _figure("alkali_mmol_l", 0, 100),
        source(),
        basis(),
        Column("note"),
    ),
    ("fill_volume_above_ml",),
)
PARTIAL_VOLUMES = Schema(
    "partial_volumes.csv",
    (
        key("solute"),
        _figure("volume_ml_g", 0, 2),
        source(),
        Column("locator"),
        basis(),
        Column("note"),
    ),
    ("solute",),
)
CARBON_DIOXIDE = Schema(
    "carbon_dioxide.csv",
    (
        key("quantity"),
        _figure("value"),
        Column("unit", required=True),
        _number("temperature_c", -60, 150),
        source(),
        Column("locator"),
        basis(),
    ),
    ("quantity",),
)
DILUENTS = Schema(
    "diluents.csv",
    (
        key(),
        Column("name", required=True),
        Column("contents_mmol_l", "counts"),
        _figure("ph_low", 0, 14),
        _figure("ph_high", 0, 14),
        source(),
        basis(),
        Column("note"),
    ),
    ("id",),
)
SIDE_CHAINS = Schema(
    "side_chains.csv",
    (
        key("group"),
        Column("residue"),
        Column("acid_charge", "integer", required=True, low=-1, high=1),
        _figure("pk_model_peptide", 0, 20),
        source("pk_model_peptide_source"),
        _figure("pk_folded_average", 0, 20),
        source("pk_folded_average_source"),
        basis(),
        Column("note"),
    ),
    ("group",),
)
WATER_PROPERTIES = Schema(
    "water_properties.csv",
    (
        key("quantity"),
        _number("temperature_c", -60, 150),
        _figure("value"),
        Column("unit", required=True),
        Column("source", "id", required=True, refers_to="sources.csv"),
        Column("locator"),
        basis(),
        Column("recommended", "flag"),
        Column("note"),
    ),
    ("quantity", "temperature_c", "source"),
)
CONFLICTS = Schema(
    "conflicts.csv",
    (
        key(),
        Column("table", required=True),
        Column("row_key", required=True),
        Column("column", required=True),
        Column("old_value"),
        Column("found_value"),
        Column("unit"),
        source(),
        Column("locator"),
        Column("verdict", required=True, choices=("conflict", "corrected")),
        Column("note"),
    ),
    ("id",),
)

INGREDIENT_NAMES = Schema(
    "ingredient_names.csv",
    (
        Column("name", required=True),
        Column("material", "id", required=True, refers_to="materials.csv"),
        basis(),
    ),
    ("name",),
)

#: Tables that every calculation needs, in the order in which they are read.
EAGER = (
    SOURCES,
    SPECIES,
    IONS,
    NEUTRALS,
    MATERIALS,
    IONIZATION,
    ASSOCIATIONS,
    SOLUBILITIES,
    SYSTEMS,
    ROUTES,
    PRECEDENT,
    KIND_PRECEDENT,
    GLASS_ALKALI,
    PARTIAL_VOLUMES,
    CARBON_DIOXIDE,
    DILUENTS,
    SIDE_CHAINS,
)
#: Tables read on demand.
LAZY = (WATER_PROPERTIES, CONFLICTS, INGREDIENT_NAMES)
