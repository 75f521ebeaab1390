"""Sodium chloride equivalents and isotonic strengths against the published tables.

E is the mass of sodium chloride with the osmolality that 1 g of the substance has in
100 mL. Sodium and potassium chloride, sugars, polyols and tris are tested within 5 %
or half the last digit printed; the rest is printed with its miss, since the handbooks
disagree among themselves.
"""

from __future__ import annotations

from functools import cache

import numpy as np
import pytest
from bench_support import library
from reference_tables import Check, Residual, select, show, sources

from formbuf.product.composition import mixture
from formbuf.product.osmotics import osmotic_law

#: Temperature of the Debye-Hueckel slope behind a freezing point, C.
FREEZING_C = 0.0
TESTED = {
    "sodium_chloride",
    "potassium_chloride",
    "glucose_monohydrate",
    "glucose_anhydrous",
    "mannitol",
    "glycerol",
    "sucrose",
    "propylene_glycol",
    "tromethamine",
}
RELATIVE = 0.05
ISOTONIC_G_PER_100_ML = 0.9
MISSES = {
    ("sucrose", "sodium_chloride_equivalent"): (
        "recalled as 0.08 from tables whose own isotonic strength of 9.25 % means 0.097; "
        "the freezing point of 1 % sucrose gives 0.091, as found; miss 0.011"
    )
}


@cache
def _osmolality(material: str, g_per_100ml: float) -> float:
    mass = library().find_material(material).molar_mass_g_mol.value
    mixed = mixture(library(), {material: 1e4 * g_per_100ml / mass})
    solution = mixed.solve(25.0)
    found = mixed.osmolality(FREEZING_C, solution, osmotic_law(library()))
    return float(found.osmolality_mosm_kg)


def _strength(material: str, wanted_mosm_kg: float) -> float:
    """Strength of a material with an osmolality, by bisection [g per 100 mL]."""
    low, high = 0.0, 15.0
    for _ in range(50):
        middle = 0.5 * (low + high)
        if _osmolality(material, middle) < wanted_mosm_kg:
            low = middle
        else:
            high = middle
    return 0.5 * (low + high)


def _found(row: Check) -> float:
    if row["quantity"] == "sodium_chloride_equivalent":
        own = _osmolality(row["material"], float(row["g_per_100ml"]))
        return _strength("sodium_chloride", own) / float(row["g_per_100ml"])
    iso = _osmolality("sodium_chloride", ISOTONIC_G_PER_100_ML)
    return _strength(row["material"], iso)


def _residuals(rows: list[Check]) -> list[Residual]:
    return [
        Residual(
            f"{row['material']} {row['quantity']}",
            float(row["value"]),
            _found(row),
            sources(row),
            row["status"],
        )
        for row in rows
    ]


def _rows(tested: bool) -> list[Check]:
    rows = select("tonicity.csv", kind="equivalent", use="test")
    return [r for r in rows if r["material"] and (r["material"] in TESTED) == tested]


@pytest.mark.parametrize(
    "row",
    [
        pytest.param(
            r,
            id=f"{r['material']}-{r['quantity']}",
            marks=[pytest.mark.xfail(strict=True, reason=MISSES[key])]
            if (key := (r["material"], r["quantity"])) in MISSES
            else [],
        )
        for r in _rows(tested=True)
    ],
)
def test_chlorides_sugars_polyols_and_tris(row: Check) -> None:
    (residual,) = _residuals([row])
    show("isotonicity", [residual])
    digits = len(row["value"].partition(".")[2])
    rounding = 0.5 * 10.0**-digits

    assert abs(residual.miss) <= max(RELATIVE * residual.published, rounding)


def test_the_rest_is_printed_with_its_miss() -> None:
    residuals = _residuals(_rows(tested=False))
    show("isotonicity of buffer salts (report)", residuals)
    shares = [abs(r.miss) / r.published for r in residuals]
    print(
        f"  mean miss {100 * np.mean(shares):.1f} %, largest {100 * max(shares):.1f} %"
    )

    assert len(residuals) > 30
    assert np.all(np.isfinite(shares))
