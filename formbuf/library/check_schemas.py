"""What the tables of published checks look like, ``knowledge/checks/``.

They serve the tests and the qualification of an installation; no result of a
calculation rests on them. ``use`` says what a row is good for: ``test`` it may be
tested against, ``report`` it is shown but not tested, ``exclude`` it is kept for the
record only. ``composition`` is ``material=amount`` in ``composition_unit``.
"""

from __future__ import annotations

from formbuf.library.records import BASES
from formbuf.library.tables import Column, Schema

USES = ("test", "report", "exclude")
STATUS = (*BASES, "not_found")
_AMOUNT_UNITS = ("mmol_kg_water", "mmol_l")


def _text(*names: str) -> tuple[Column, ...]:
    return tuple(Column(name) for name in names)


def _numbers(*names: str) -> tuple[Column, ...]:
    return tuple(Column(name, "number") for name in names)


def _required(name: str, *choices: str) -> Column:
    return Column(name, required=True, choices=choices)


_ID = Column("id", "id", required=True)
_TEMPERATURE = Column("temperature_c", "number", low=-60, high=150)
_TARGET_PH = Column("target_ph", "number", required=True, low=0, high=14)
_COMPOSITION = (
    Column("composition", "amounts", refers_to="materials.csv"),
    Column("composition_unit", choices=_AMOUNT_UNITS),
)
_CITED = (
    Column("sources", "ids", refers_to="sources.csv"),
    Column("locator"),
    _required("status", *STATUS),
)
_USE = _required("use", *USES)
_NOTE = Column("note")
_OPTIONAL_SPECIES = Column("species", "id", refers_to="species.csv")

PH_STANDARDS = Schema(
    "checks/ph_standards.csv",
    (
        _ID,
        _required("solution"),
        Column("group", "id", required=True),
        _TEMPERATURE,
        _required("quantity", "ph", "dph_dt", "buffer_value", "dilution_value", "note"),
        Column("value", "number"),
        Column("unit"),
        Column("decimals", "integer", low=0, high=5),
        *_COMPOSITION,
        *_CITED,
        _USE,
        _NOTE,
    ),
    ("id",),
)
HANDBOOK_BUFFERS = Schema(
    "checks/handbook_buffers.csv",
    (
        _ID,
        _required("system"),
        _required("table"),
        _TARGET_PH,
        _TEMPERATURE,
        _required("recipe"),
        *_numbers("stock_a_ml", "stock_b_ml", "final_volume_ml"),
        *_COMPOSITION,
        *_CITED,
        _USE,
        _required("scale", "modern", "soerensen"),
        _NOTE,
    ),
    ("id",),
)
PHARMACOPOEIA_BUFFERS = Schema(
    "checks/pharmacopoeia_buffers.csv",
    (
        _ID,
        _required("body"),
        _required("buffer"),
        _TARGET_PH,
        _TEMPERATURE,
        _required("recipe"),
        Column("component"),
        *_numbers("component_ml", "salt_g", "final_volume_ml"),
        Column("adjusted_to_ph", "flag", required=True),
        *_COMPOSITION,
        *_CITED,
        _USE,
        _required("scale", "modern", "soerensen"),
        _NOTE,
    ),
    ("id",),
)
PKA_BY_TEMPERATURE = Schema(
    "checks/pka_by_temperature.csv",
    (
        _ID,
        Column("species", "id", required=True, refers_to="species.csv"),
        Column("step", "integer", required=True, low=1, high=12),
        _required("quantity", "pka", "dpka_dt"),
        _TEMPERATURE,
        Column("value", "number", required=True),
        _required("unit"),
        Column("ionic_strength_mol_l", "number", low=0),
        Column("medium"),
        _required("kind", "measured", "equation", "handbook", "computed"),
        Column("independent", "flag", required=True),
        *_CITED,
        _USE,
        _NOTE,
    ),
    ("id",),
)
CAPACITY = Schema(
    "checks/capacity.csv",
    (
        _ID,
        _required("case"),
        _required("system"),
        Column("condition"),
        _required(
            "quantity",
            "beta",
            "beta_max_over_c",
            "concentration",
            "delta_ph",
            "mass",
            "ph",
            "salt_acid_ratio",
            "statement",
        ),
        Column("value", "number"),
        *_text("unit", "statement"),
        _TEMPERATURE,
        *_COMPOSITION,
        _required("scale", "activity", "concentration"),
        *_CITED,
        _USE,
        _NOTE,
    ),
    ("id",),
)
PROTEIN = Schema(
    "checks/protein.csv",
    (
        _ID,
        _required("topic"),
        _required("item"),
        *_numbers("value", "low", "high", "uncertainty"),
        *_text("unit", "statement"),
        _TEMPERATURE,
        *_numbers("ph_low", "ph_high"),
        Column("conditions"),
        *_CITED,
        _USE,
        _NOTE,
    ),
    ("id",),
)
TEMPERATURE = Schema(
    "checks/temperature.csv",
    (
        _ID,
        _required("system"),
        _OPTIONAL_SPECIES,
        Column("step", "integer", low=1, high=12),
        _TEMPERATURE,
        *_numbers("concentration_mol_l", "ionic_strength_mol_kg"),
        _required(
            "quantity",
            "pka_apparent",
            "ph",
            "dph_dt",
            "dpka_dt",
            "dh_kj_mol",
            "dcp_j_mol_k",
        ),
        Column("value", "number", required=True),
        _required("unit"),
        *_COMPOSITION,
        *_CITED,
        _USE,
        _NOTE,
    ),
    ("id",),
)
TONICITY = Schema(
    "checks/tonicity.csv",
    (
        _ID,
        Column("number", "integer", required=True, low=1),
        _required(
            "kind",
            "freezing",
            "derived",
            "osmolality",
            "equivalent",
            "pitzer",
            "osmotic_coefficient",
        ),
        _required("substance"),
        Column("form"),
        Column("material", "id", refers_to="materials.csv"),
        _required("quantity"),
        *_numbers("value", "low", "high", "uncertainty"),
        *_text("unit", "statement"),
        _TEMPERATURE,
        *_numbers(
            "mass_percent",
            "molality_mol_kg",
            "concentration_mol_l",
            "density_20c_g_ml",
            "g_per_100ml",
            "beta0",
            "beta1",
            "c_phi",
            "max_molality_mol_kg",
        ),
        *_COMPOSITION,
        Column("confidence", choices=("high", "medium", "low")),
        *_CITED,
        _USE,
        _NOTE,
    ),
    ("id",),
)
LICENSED_CHOICES = Schema(
    "checks/licensed_choices.csv",
    (
        _ID,
        _required("product_class"),
        Column("modality", "id", required=True),
        Column("route", "id", required=True, refers_to="routes.csv"),
        _required("form", "liquid", "lyophilised", "frozen"),
        Column("storage_c", "number", low=-200, high=60),
        *(Column(n, "number", low=0, high=14) for n in ("ph", "ph_low", "ph_high")),
        Column("drug_mg_ml", "number", low=0),
        Column("buffer_species", "id", required=True, refers_to="species.csv or none"),
        Column("second_species", "id", refers_to="species.csv"),
        Column("counter_ions", "ids"),
        Column("buffer_mmol_l", "number", low=0),
        *_text("tonicity_agent", "surfactant", "other_excipients"),
        *_CITED,
        _required("ph_status", *BASES),
        _NOTE,
    ),
    ("id",),
)

#: Every table of published checks by its short name.
CHECKS: dict[str, Schema] = {
    "ph_standards": PH_STANDARDS,
    "handbook_buffers": HANDBOOK_BUFFERS,
    "pharmacopoeia_buffers": PHARMACOPOEIA_BUFFERS,
    "pka_by_temperature": PKA_BY_TEMPERATURE,
    "capacity": CAPACITY,
    "protein": PROTEIN,
    "temperature": TEMPERATURE,
    "tonicity": TONICITY,
    "licensed_choices": LICENSED_CHOICES,
}
