"""Row counts and column sums of every table: an accidental edit fails here.

A change that is meant changes the figure here with it, together with
``knowledge/VERSION``.
"""

from __future__ import annotations

import pytest

from formbuf.library import Library, Schema, load_library, schemas
from formbuf.library.check_schemas import CHECKS

TABLES = {
    schema.name: schema for schema in (*schemas.EAGER, *schemas.LAZY, *CHECKS.values())
}
# rows, and sums of the columns with numbers
EXPECTED: dict[str, tuple[int, dict[str, float]]] = {
    "sources.csv": (289, {}),
    "species.csv": (51, {}),
    "ions.csv": (6, {"charge": 7.0, "molar_mass_g_mol": 227.301}),
    "neutrals.csv": (7, {"molar_mass_g_mol": 1397.283}),
    "materials.csv": (153, {"waters": 116.5, "molar_mass_g_mol": 26757.694}),
    "ionization.csv": (
        94,
        {
            "step": 161.0,
            "acid_charge": 0.0,
            "pka": 534.707,
            "pka_uncertainty": 4.581,
            "dh_kj_mol": 1078.33,
            "dh_uncertainty_kj_mol": 65.4,
            "dcp_j_mol_k": -8072.0,
            "dcp_uncertainty_j_mol_k": 2175.0,
        },
    ),
    "associations.csv": (
        2,
        {"units": 7.0, "charge": -3.0, "protons_released": 3.0, "log10_k": -23.662},
    ),
    "solubilities.csv": (
        72,
        {
            "temperature_c": 1727.0,
            "g_per_100g_water": 3355.767,
            "uncertainty_g_per_100g_water": 59.56,
        },
    ),
    "systems.csv": (36, {}),
    "routes.csv": (
        15,
        {
            "ph_low": 72.0,
            "ph_high": 121.8,
            "osmolality_low_mosm_kg": 2865.0,
            "osmolality_high_mosm_kg": 6140.0,
            "usual_volume_ml": 535.15,
        },
    ),
    "precedent.csv": (
        340,
        {
            "usual_low_mmol_l": 844.0,
            "usual_high_mmol_l": 5294.0,
            "ceiling_mmol_l": 15340.0,
        },
    ),
    "kind_precedent.csv": (101, {}),
    "glass_alkali.csv": (
        10,
        {
            "fill_volume_above_ml": 888.0,
            "fill_volume_to_ml": 888.0,
            "limit_ml_0p01m_hcl_per_100ml": 8.9,
            "alkali_mmol_l": 0.89,
        },
    ),
    "partial_volumes.csv": (12, {"volume_ml_g": 7.684}),
    "carbon_dioxide.csv": (3, {"value": 2400.000755, "temperature_c": 50.0}),
    "diluents.csv": (4, {"ph_low": 18.0, "ph_high": 27.5}),
    "side_chains.csv": (
        9,
        {"acid_charge": 4.0, "pk_model_peptide": 68.72, "pk_folded_average": 66.7},
    ),
    "water_properties.csv": (184, {"temperature_c": 3898.0, "value": 10332134.895989}),
    "conflicts.csv": (66, {}),
    "ingredient_names.csv": (51, {}),
    "checks/ph_standards.csv": (
        443,
        {"temperature_c": 15475.0, "value": 2437.256, "decimals": 1139.0},
    ),
    "checks/handbook_buffers.csv": (
        211,
        {
            "target_ph": 1221.0,
            "temperature_c": 3842.0,
            "stock_a_ml": 11033.0,
            "stock_b_ml": 7193.119,
            "final_volume_ml": 38580.0,
        },
    ),
    "checks/pharmacopoeia_buffers.csv": (
        89,
        {
            "target_ph": 420.2,
            "temperature_c": 2225.0,
            "component_ml": 1539.97,
            "salt_g": 42.07,
            "final_volume_ml": 38100.0,
        },
    ),
    "checks/pka_by_temperature.csv": (
        445,
        {
            "step": 678.0,
            "temperature_c": 11587.55,
            "value": 2081.64101,
            "ionic_strength_mol_l": 3.09,
        },
    ),
    "checks/capacity.csv": (23, {"value": 106.3715, "temperature_c": 274.0}),
    "checks/protein.csv": (
        32,
        {
            "value": 235.013,
            "low": 60.064,
            "high": 80.085,
            "uncertainty": 3.5,
            "temperature_c": 333.0,
            "ph_low": 64.4,
            "ph_high": 74.3,
        },
    ),
    "checks/temperature.csv": (
        98,
        {
            "step": 114.0,
            "temperature_c": 2520.0,
            "concentration_mol_l": 4.4,
            "ionic_strength_mol_kg": 0.0,
            "value": -1769.1454,
        },
    ),
    "checks/tonicity.csv": (
        855,
        {
            "number": 365940.0,
            "value": 3219.0825,
            "low": 285.0,
            "high": 310.0,
            "uncertainty": 5.0,
            "temperature_c": 4625.0,
            "mass_percent": 4109.5,
            "molality_mol_kg": 423.072,
            "concentration_mol_l": 321.688,
            "density_20c_g_ml": 497.0035,
            "g_per_100ml": 89.9,
            "beta0": 1.09104,
            "beta1": 11.54076,
            "c_phi": 0.055856,
            "max_molality_mol_kg": 87.295,
        },
    ),
    "checks/licensed_choices.csv": (
        113,
        {
            "storage_c": 1210.0,
            "ph": 659.79,
            "ph_low": 213.5,
            "ph_high": 260.2,
            "drug_mg_ml": 4015.2604,
            "buffer_mmol_l": 1374.0,
        },
    ),
}


@pytest.fixture(scope="module")
def library() -> Library:
    return load_library()


def sums(library: Library, schema: Schema) -> dict[str, float]:
    rows = library.read_table(schema)
    return {
        column.name: sum(row.number(column.name) or 0.0 for row in rows)
        for column in schema.columns
        if column.kind in ("number", "integer")
    }


def test_every_table_is_guarded() -> None:
    assert set(EXPECTED) == set(TABLES)


@pytest.mark.parametrize("name", EXPECTED)
def test_rows_and_sums_are_unchanged(library: Library, name: str) -> None:
    count, expected = EXPECTED[name]

    assert len(library.read_table(TABLES[name])) == count
    assert sums(library, TABLES[name]) == pytest.approx(expected, rel=1e-12, abs=1e-6)


@pytest.mark.parametrize(
    ("name", "total"),
    [
        ("ph_standards", 17631.7),
        ("handbook_buffers", 22404.865),
        ("pharmacopoeia_buffers", 6991.71458),
        ("capacity", 5521.725),
        ("temperature", 1097.375),
        ("tonicity", 288518.5451),
    ],
)
def test_compositions_are_unchanged(library: Library, name: str, total: float) -> None:
    rows = library.check_table(name)

    found = sum(sum(row.counts("composition").values()) for row in rows)
    assert found == pytest.approx(total, rel=1e-9)


def test_every_row_to_test_against_has_what_it_needs(library: Library) -> None:
    for name in ("ph_standards", "handbook_buffers", "pharmacopoeia_buffers"):
        for row in library.check_table(name):
            if row.text("use") == "test":
                assert row.counts("composition"), row.where("composition")
                assert row.text("composition_unit"), row.where("composition_unit")
