"""Water and ice: printed values of the sources, and the numbers of the table."""

from __future__ import annotations

import numpy as np
import pytest
from reference_tables import library

from formbuf.chemistry import water
from formbuf.library.records import WaterProperty


def _table(quantity: str, *, recommended: bool = False) -> list[WaterProperty]:
    rows = [
        p
        for p in library().water_properties
        if p.quantity == quantity and (p.recommended or not recommended)
    ]
    assert rows, quantity
    return rows


def test_osmotic_slope_coefficients_are_those_of_the_table() -> None:
    """Clegg, Rard & Pitzer 1994, Appendix II."""
    found = [
        _table(f"osmotic_slope_chebyshev_{k:02d}")[0].value.value
        for k in range(len(water.OSMOTIC_SLOPE_CHEBYSHEV))
    ]

    assert found == pytest.approx(water.OSMOTIC_SLOPE_CHEBYSHEV, rel=1e-12)


def test_ionization_coefficients_are_those_of_the_table() -> None:
    """IAPWS R11-07."""
    typed = {
        "alpha": water.PKW_ALPHA,
        "beta": water.PKW_BETA,
        "gamma": water.PKW_GAMMA,
    }
    for name, values in typed.items():
        for k, value in enumerate(values):
            (row,) = _table(f"iapws_r11_07_{name}{k}")
            assert row.value.value == value
    assert _table("iapws_r11_07_n")[0].value.value == water.PKW_N
    assert (
        _table("iapws_r11_07_molar_mass_g_mol")[0].value.value
        == water.PKW_MOLAR_MASS_G_MOL
    )


@pytest.mark.parametrize(
    ("quantity", "function", "digits"),
    [
        ("debye_huckel_slope_log10_molal", water.debye_huckel_slope, 5e-6),
        ("osmotic_slope_molal", water.osmotic_slope, 5e-6),
        ("pkw_molal", water.pkw, 5e-5),
    ],
)
def test_functions_give_the_recommended_rows(
    quantity: str, function: object, digits: float
) -> None:
    rows = _table(quantity, recommended=quantity != "osmotic_slope_molal")
    for row in rows:
        found = float(function(row.temperature_c))  # type: ignore[operator]
        print(f"{quantity} {row.temperature_c} C: {row.value.value} {found:.6f}")
        assert found == pytest.approx(row.value.value, abs=digits * 1.01)


def test_pkw_against_older_measurements() -> None:
    """Sweeton, Mesmer & Baes and others in the table, within 0.01 up to 60 C."""
    others = [
        p
        for p in _table("pkw_molal")
        if not p.recommended and p.temperature_c is not None and p.temperature_c <= 60
    ]
    for row in others:
        found = float(water.pkw(row.temperature_c or 0.0))
        print(f"{row.value.source} {row.temperature_c}: {row.value.value} {found:.4f}")
        assert found == pytest.approx(row.value.value, abs=0.012)


def test_density_of_kell() -> None:
    """0.99984 at 0, 0.99997 at 4 (the maximum), 0.99705 at 25, 0.98804 at 50 C."""
    found = water.water_density_kg_l([0.0, 4.0, 25.0, 50.0])

    assert found == pytest.approx([0.99984, 0.99997, 0.99705, 0.98804], abs=1e-5)
    fine = water.water_density_kg_l(np.linspace(0.0, 10.0, 1001))
    assert np.argmax(fine) == pytest.approx(398, abs=5)


def test_ice_is_in_equilibrium_with_water_at_0_c() -> None:
    assert float(water.ln_ice_activity(0.0)) == 0.0
    assert np.all(np.diff(water.ln_ice_activity(np.linspace(-60.0, 0.0, 61))) > 0.0)


def test_ice_gives_the_cryoscopic_constant() -> None:
    """1.860 K kg/mol (``practice``: 1.86), from the slope at 0 C."""
    slope = float(-water.ln_ice_activity(-0.01) / 0.01)

    assert 0.018015 / slope == pytest.approx(1.860, abs=0.004)


def test_vapour_pressure_of_water() -> None:
    """611.2 Pa at 0 C and 3169 Pa at 25 C (``practice``; steam tables)."""
    assert water.vapour_pressure_pa([0.0, 25.0]) == pytest.approx(
        [611.2, 3169.0], rel=1e-3
    )


@pytest.mark.parametrize(
    "function",
    [
        water.debye_huckel_slope,
        water.osmotic_slope,
        water.pkw,
        water.water_density_kg_l,
        water.ln_ice_activity,
        water.vapour_pressure_pa,
    ],
)
def test_scalars_and_arrays_of_any_shape(function: object) -> None:
    grid = np.array([[-10.0, -5.0, 0.0], [-1.0, -2.0, -3.0]])
    found = function(grid)  # type: ignore[operator]

    assert found.shape == grid.shape
    assert found[1, 2] == pytest.approx(float(function(-3.0)))  # type: ignore[operator]
