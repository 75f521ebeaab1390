"""Osmolalities behind the osmotic table: the rows, and what the model needs of each.

Freezing points give the osmolality through the water activity of ice; osmotic
coefficients give it directly. Of every series (one substance in one source) the odd
rows fit and the even ones test.
"""

from __future__ import annotations

from collections import Counter
from collections.abc import Iterable, Mapping
from dataclasses import dataclass
from functools import cache

import numpy as np
from reference_tables import Check, checks, composition, library

from formbuf.chemistry.osmolality import (
    OsmoticLaw,
    osmolality,
    osmolality_at_freezing_mosm_kg,
)
from formbuf.chemistry.speciation import Particle, water_ions
from formbuf.constants import LN10, WATER_MOLAR_MASS_KG_MOL
from formbuf.product.composition import mixture

TABLE = "tonicity.csv"
NOTHING = OsmoticLaw({}, {})
WATER_G_MOL = 1000.0 * WATER_MOLAR_MASS_KG_MOL
#: Uncharged solutes that have freezing points but no material.
BARE_SOLUTES = {"Maltose": "maltose", "1,2-Ethanediol": "ethanediol"}
#: Ions of one formula unit of the salts with osmotic coefficients.
IONS_PER_FORMULA = {
    "NaCl": 2,
    "KCl": 2,
    "NH4Cl": 2,
    "NaH2PO4": 2,
    "KH2PO4": 2,
    "Na2HPO4": 3,
    "K2HPO4": 3,
    "NaHCO3": 2,
    "KHCO3": 2,
    "Na2CO3": 3,
    "K2CO3": 3,
    "Na2SO4": 3,
    "CaCl2": 3,
    "MgCl2": 3,
    "HCl": 2,
    "NaOH": 2,
    "sodium acetate": 2,
    "sucrose": 1,
}


@dataclass(frozen=True)
class Point:
    """One published osmolality and the contents of its solution."""

    row: Check
    place: int
    observed_osmol_kg: float
    temperature_c: float
    particles: tuple[Particle, ...]
    neutrals: Mapping[str, float]

    @property
    def series(self) -> str:
        return f"{self.row['substance']} ({self.row['sources']})"

    @property
    def is_fitted(self) -> bool:
        return self.place % 2 == 1

    def osmolality(self, law: OsmoticLaw) -> float:
        """What the model gives under a law [osmol/kg]."""
        found = osmolality(self.particles, self.neutrals, self.temperature_c, law)
        return float(found.osmolality_mosm_kg) / 1000.0

    def weights(self) -> dict[tuple[str, ...], float]:
        """Osmoles per unit of each coefficient; the model is linear in them."""
        found: dict[tuple[str, ...], float] = {}
        cations = [p for p in self.particles if p.charge > 0]
        anions = [p for p in self.particles if p.charge < 0]
        for c in cations:
            for a in anions:
                both = float(c.molality_mol_kg) * float(a.molality_mol_kg)
                found[c.key, a.key] = LN10 * both
        for p in self.particles:
            if not p.charge:
                found[(p.key,)] = float(p.molality_mol_kg) ** 2
        for name, m in self.neutrals.items():
            found[(name,)] = m**2
        return found


def points(
    *, sources: str = "", substances: Iterable[str] = (), quantity: str = ""
) -> list[Point]:
    """Rows with a composition per kilogram of water, in the order of the table."""
    wanted = set(substances)
    return [
        point
        for point in _all_points()
        if (not sources or point.row["sources"] == sources)
        and (not wanted or point.row["substance"] in wanted)
        and (not quantity or point.row["quantity"] == quantity)
    ]


@cache
def _all_points() -> tuple[Point, ...]:
    places: Counter[tuple[str, str, str]] = Counter()
    found = []
    for row in checks(TABLE):
        if (
            row["kind"] in ("freezing", "osmotic_coefficient")
            and row["use"] == "test"
            and _contents(row) is not None
        ):
            series = row["substance"], row["sources"], row["quantity"]
            places[series] += 1
            found.append(_point(row, places[series]))
    return tuple(found)


def isotonic_points(substances: Iterable[str]) -> list[Point]:
    """Concentrations that freeze at -0.52 C, interpolated in the same tables."""
    found = []
    for row in checks(TABLE):
        if (
            row["kind"] == "derived"
            and row["quantity"] == "isotonic_concentration"
            and row["substance"] in set(substances)
        ):
            material = library().find_material(row["material"])
            dry_g_mol = material.molar_mass_g_mol.value - WATER_G_MOL * material.waters
            mmol_l = 1e4 * float(row["value"]) / dry_g_mol
            amounts = {row["material"]: mmol_l}
            found.append(_solved(row, 1, amounts, "solution", 0.52))
    return found


def _is_bare(row: Check) -> bool:
    return row["substance"] in BARE_SOLUTES and bool(row["molality_mol_kg"])


def _contents(row: Check) -> dict[str, float] | None:
    """Amounts per kilogram of water, or None where the row does not tell them.

    Rows of salts that the library holds as hydrates give the mass of dry salt.
    """
    if _is_bare(row):
        return {BARE_SOLUTES[row["substance"]]: 1000.0 * float(row["molality_mol_kg"])}
    if row["composition_unit"] == "mmol_kg_water":
        return composition(row)
    if row["composition"] or not row["material"] or not row["molality_mol_kg"]:
        return None
    if not row["mass_percent"]:
        return {row["material"]: 1000.0 * float(row["molality_mol_kg"])}
    material = library().find_material(row["material"])
    dry_g_mol = material.molar_mass_g_mol.value - WATER_G_MOL * material.waters
    percent = float(row["mass_percent"])
    return {row["material"]: 1e6 * percent / (100.0 - percent) / dry_g_mol}


def _point(row: Check, place: int) -> Point:
    value, amounts = float(row["value"]), _contents(row)
    assert amounts is not None
    if _is_bare(row):
        observed = _osmolality_of_depression(value)
        neutrals = {name: mmol / 1000.0 for name, mmol in amounts.items()}
        return Point(row, place, observed, 0.0, (), neutrals)
    if row["quantity"] == "osmotic_coefficient":
        return _solved(row, place, amounts, "water", None, coefficient=value)
    return _solved(row, place, amounts, "water", value)


def _solved(
    row: Check,
    place: int,
    amounts: Mapping[str, float],
    basis: str,
    depression_k: float | None,
    coefficient: float = 0.0,
) -> Point:
    """Solve the solution at the temperature of its measurement."""
    assert basis in ("water", "solution")
    mixed = mixture(
        library(), amounts, basis="water" if basis == "water" else "solution"
    )
    t = 0.0 if depression_k is not None else 25.0
    solution = mixed.solve(t)
    if depression_k is not None:
        observed = _osmolality_of_depression(depression_k)
    else:
        per_formula = IONS_PER_FORMULA[row["substance"]]
        observed = coefficient * per_formula * float(row["molality_mol_kg"])
    return Point(
        row,
        place,
        observed,
        t,
        tuple(mixed.dissolved(t, solution) + water_ions(solution)),
        {name: float(np.asarray(m)) for name, m in mixed.neutrals_mol_kg.items()},
    )


def _osmolality_of_depression(depression_k: float) -> float:
    return float(osmolality_at_freezing_mosm_kg(-depression_k)) / 1000.0
