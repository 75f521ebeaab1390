"""What the tables of ``knowledge/freezing/`` must look like."""

from __future__ import annotations

from formbuf.library.schemas import basis, key, source
from formbuf.library.tables import Column, Schema

PARAMETERS = (
    "beta0",
    "beta1",
    "c_phi",
    "c0",
    "c1",
    "omega",
    "theta",
    "psi",
    "lambda",
    "mu",
)
#: Activity models for which constants are kept.
MODELS = ("sodium", "potassium", "debye_huckel")
USES = ("fit", "held", "conflict", "reference")
CLASSES = ("negligible", "moderate", "severe", "sources disagree", "unknown")
KINDS = (
    "eutectic",
    "ternary eutectic",
    "glass transition",
    "glass transition trend",
    "crystallization exotherm on warming",
    "liquid-like motion seen down to",
)


def _number(name: str, low: float | None = None, high: float | None = None) -> Column:
    return Column(name, "number", low=low, high=high)


def _figure(name: str, low: float | None = None, high: float | None = None) -> Column:
    return Column(name, "number", required=True, low=low, high=high)


STATES = Schema(
    "freezing/states.csv",
    (
        key(),
        Column("formula", required=True),
        Column("component", "id", refers_to="species.csv"),
        Column("charge", "integer", required=True, low=-4, high=4),
    ),
    ("id",),
)
PITZER = Schema(
    "freezing/pitzer.csv",
    (
        Column("parameter", required=True, choices=PARAMETERS),
        Column("members", "ids", required=True),
        _number("a0", -50, 50),
        _number("a1_k"),
        _number("a2"),
        _number("a3_per_k"),
        _number("a4_per_k2"),
        _number("a5_k2"),
        _number("slope_per_k", -1, 1),
        _number("alpha", 0, 20),
        _number("temperature_low_c", -60, 200),
        _number("temperature_high_c", -60, 300),
        _number("highest_molality_mol_kg", 0, 30),
        Column("used_in", "ids"),
        source(required=True),
        Column("locator"),
        basis(),
        Column("note"),
    ),
    ("parameter", "members", "source"),
)
SOLIDS = Schema(
    "freezing/solids.csv",
    (
        key(),
        Column("formula", required=True),
        Column("solute", "id", required=True),
        Column("states", required=True),
        Column("components", "counts", required=True, refers_to="components"),
        _figure("waters", 0, 20),
        _figure("molar_mass_anhydrous_g_mol", 10, 1000),
        Column("models", "ids", required=True),
        _number("stable_to_c", -50, 200),
        _number("anchor_temperature_c", -50, 0),
        _number("dissolution_enthalpy_kj_mol", -200, 200),
        Column("note"),
    ),
    ("id",),
)
SOLUBILITY = Schema(
    "freezing/solubility.csv",
    (
        Column("solid", "id", required=True),
        Column("solute", "id", required=True),
        _figure("temperature_c", -50, 100),
        _figure("g_anhydrous_per_100g_water", 0, 1000),
        _number("uncertainty_g_per_100g_water", 0, 100),
        Column("use", required=True, choices=USES),
        source(),
        Column("locator"),
        basis(),
        Column("note"),
    ),
    ("solid", "temperature_c", "source", "g_anhydrous_per_100g_water"),
)
CONSTANTS = Schema(
    "freezing/solubility_constants.csv",
    (
        Column("solid", "id", required=True),
        Column("model", required=True, choices=MODELS),
        _figure("ln_k_a"),
        _figure("ln_k_b_k"),
        Column("rows", "integer", required=True, low=1),
        _figure("largest_residual", 0, 5),
        _figure("temperature_low_c", -50, 100),
        _figure("temperature_high_c", -50, 100),
        source(required=True),
        Column("locator"),
        basis(),
    ),
    ("solid", "model"),
)
PHASE_POINTS = Schema(
    "freezing/phase_points.csv",
    (
        key(),
        Column("system", required=True),
        Column("solids", "ids"),
        Column("kind", required=True, choices=KINDS),
        _number("temperature_c", -150, 0),
        _number("temperature_low_c", -150, 0),
        _number("temperature_high_c", -150, 0),
        _number("temperature_uncertainty_k", 0, 20),
        _number("composition_mol_kg", 0, 30),
        _number("mass_percent", 0, 100),
        _number("acid_base_ratio", 0, 10000),
        _number("ph", -2, 16),
        source(required=True),
        Column("locator"),
        basis(),
        Column("note"),
    ),
    ("id",),
)
OBSERVATIONS = Schema(
    "freezing/observations.csv",
    (
        key(),
        Column("systems", "ids", refers_to="systems.csv"),
        Column("buffer", required=True),
        Column("counter_ion"),
        _number("concentration_mmol_l", 0, 5000),
        _number("concentration_low_mmol_l", 0, 5000),
        _number("concentration_high_mmol_l", 0, 5000),
        Column("concentration_text"),
        _number("ph_initial", 0, 14),
        _number("ph_initial_low", 0, 14),
        _number("ph_initial_high", 0, 14),
        _figure("temperature_initial_c", 0, 60),
        _number("temperature_frozen_c", -273, 0),
        _number("temperature_frozen_low_c", -273, 0),
        _number("temperature_frozen_high_c", -273, 0),
        Column("temperature_text"),
        _number("ph_frozen", 0, 14),
        _number("ph_frozen_error", 0, 3),
        _number("ph_change", -10, 10),
        _number("ph_change_low", -10, 10),
        _number("ph_change_high", -10, 10),
        Column("direction"),
        Column("cooling"),
        Column("cosolutes"),
        Column("method"),
        source(required=True),
        basis(),
        Column("note"),
    ),
    ("id",),
)
CLASS_TABLE = Schema(
    "freezing/classes.csv",
    (
        Column("system", "id", required=True, refers_to="systems.csv"),
        Column("freezing_class", required=True, choices=CLASSES),
        Column("direction"),
        Column("crystallises", "id"),
        Column("reason", required=True),
        Column("sources", "ids", refers_to="sources.csv"),
        basis(),
    ),
    ("system",),
)
