"""Published osmolalities, and what the model needs to compute each of them.

Freezing points give the osmolality through the water activity of ice; osmotic
coefficients give it directly. Of every series (one substance in one source) the odd
rows served to fit ``osmotic.csv`` and the even ones are held back.
"""

from __future__ import annotations

import functools
from collections import Counter
from collections.abc import Iterable, Mapping
from dataclasses import dataclass

import numpy as np

from formbuf.chemistry.osmolality import (
    OsmoticLaw,
    osmolality,
    osmolality_at_freezing_mosm_kg,
)
from formbuf.chemistry.speciation import Particle, water_ions
from formbuf.constants import LN10, WATER_MOLAR_MASS_KG_MOL
from formbuf.library import Library
from formbuf.library.tables import Row
from formbuf.product.composition import AmountBasis, mixture
from formbuf.qualify.published import key_text, rows

TABLE = "tonicity"
#: A law without coefficients.
NOTHING = OsmoticLaw({}, {})
WATER_G_MOL = 1000.0 * WATER_MOLAR_MASS_KG_MOL
#: Depression at which a solution is isotonic [K].
ISOTONIC_DEPRESSION_K = 0.52
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
    """One published osmolality and the contents of its solution.

    Parameters
    ----------
    row : Row
    place : int
        Place in its series, from 1.
    observed_osmol_kg : float
    temperature_c : float
    particles : tuple of Particle
    neutrals : mapping of str to float
        Uncharged solutes [mol/kg of water].
    """

    row: Row
    place: int
    observed_osmol_kg: float
    temperature_c: float
    particles: tuple[Particle, ...]
    neutrals: Mapping[str, float]

    @property
    def substance(self) -> str:
        """What is dissolved."""
        return self.row.text("substance")

    @property
    def series(self) -> str:
        """Substance and source."""
        return f"{self.substance} ({key_text(self.row, 'sources')})"

    @property
    def is_fitted(self) -> bool:
        """Whether the coefficients were fitted to it."""
        return self.place % 2 == 1

    def osmolality(self, law: OsmoticLaw) -> float:
        """Return what the model gives under a law [osmol/kg]."""
        found = osmolality(self.particles, self.neutrals, self.temperature_c, law)
        return float(found.osmolality_mosm_kg) / 1000.0

    def weights(self) -> dict[tuple[str, ...], float]:
        """Return osmoles per unit of each coefficient; the model is linear in them."""
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
    library: Library,
    *,
    sources: str = "",
    substances: Iterable[str] = (),
    quantity: str = "",
) -> list[Point]:
    """Return rows with a composition per kilogram of water, in the table's order.

    Parameters
    ----------
    library : Library
    sources : str
        Ids of the sources, separated by blanks; empty takes all.
    substances : iterable of str
        Empty takes all.
    quantity : str
        ``freezing_point_depression`` or ``osmotic_coefficient``; empty takes both.
    """
    wanted = set(substances)
    return [
        point
        for point in _all_points(library)
        if (not sources or key_text(point.row, "sources") == sources)
        and (not wanted or point.substance in wanted)
        and (not quantity or point.row.text("quantity") == quantity)
    ]


@functools.cache
def _all_points(library: Library) -> tuple[Point, ...]:
    places: Counter[tuple[str, ...]] = Counter()
    found = []
    for row in rows(library, TABLE, use="test"):
        if row.text("kind") not in ("freezing", "osmotic_coefficient"):
            continue
        amounts = _contents(library, row)
        if amounts is not None:
            columns = ("substance", "sources", "quantity")
            series = tuple(key_text(row, c) for c in columns)
            places[series] += 1
            found.append(_point(library, row, places[series], amounts))
    return tuple(found)


def isotonic_points(library: Library, substances: Iterable[str]) -> list[Point]:
    """Return the concentrations that freeze at -0.52 C, interpolated in the tables."""
    wanted = set(substances)
    found = []
    for row in rows(library, TABLE, kind="derived", quantity="isotonic_concentration"):
        if row.text("substance") in wanted:
            material = row.text("material")
            mmol_l = 1e4 * row.figure("value") / _dry_g_mol(library, material)
            solution: AmountBasis = "solution"
            amounts = {material: mmol_l}
            found.append(
                _solved(library, row, 1, amounts, solution, ISOTONIC_DEPRESSION_K)
            )
    return found


def _dry_g_mol(library: Library, name: str) -> float:
    material = library.find_material(name)
    return material.molar_mass_g_mol.value - WATER_G_MOL * material.waters


def _contents(library: Library, row: Row) -> Mapping[str, float] | None:
    """Return amounts per kilogram of water [mmol], or None where the row has none.

    Rows of salts that the library holds as hydrates give the mass of dry salt.
    """
    molality = row.number("molality_mol_kg")
    bare = BARE_SOLUTES.get(row.text("substance"))
    if bare and molality:
        return {bare: 1000.0 * molality}
    if row.text("composition_unit") == "mmol_kg_water":
        return row.counts("composition")
    material = row.text("material")
    if row.counts("composition") or not material or not molality:
        return None
    percent = row.number("mass_percent")
    if not percent:
        return {material: 1000.0 * molality}
    return {material: 1e6 * percent / (100.0 - percent) / _dry_g_mol(library, material)}


def _point(
    library: Library, row: Row, place: int, amounts: Mapping[str, float]
) -> Point:
    value = row.figure("value")
    if row.text("substance") in BARE_SOLUTES:
        neutrals = {name: mmol / 1000.0 for name, mmol in amounts.items()}
        return Point(row, place, _of_depression(value), 0.0, (), neutrals)
    if row.text("quantity") == "osmotic_coefficient":
        return _solved(library, row, place, amounts, "water", None, coefficient=value)
    return _solved(library, row, place, amounts, "water", value)


def _solved(
    library: Library,
    row: Row,
    place: int,
    amounts: Mapping[str, float],
    basis: AmountBasis,
    depression_k: float | None,
    *,
    coefficient: float = 0.0,
) -> Point:
    """Solve the solution at the temperature of its measurement."""
    mixed = mixture(library, amounts, basis=basis)
    t = 0.0 if depression_k is not None else 25.0
    solution = mixed.solve(t)
    if depression_k is not None:
        observed = _of_depression(depression_k)
    else:
        per_formula = IONS_PER_FORMULA[row.text("substance")]
        observed = coefficient * per_formula * row.figure("molality_mol_kg")
    return Point(
        row,
        place,
        observed,
        t,
        tuple(mixed.dissolved(t, solution) + water_ions(solution)),
        {name: float(np.asarray(m)) for name, m in mixed.neutrals_mol_kg.items()},
    )


def _of_depression(depression_k: float) -> float:
    return float(osmolality_at_freezing_mosm_kg(-depression_k)) / 1000.0
