"""Osmolality against published freezing points; the held rows, which fitted nothing."""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Sequence

from formbuf.chemistry.osmolality import OsmoticLaw, osmolality_at_freezing_mosm_kg
from formbuf.library import Library
from formbuf.product.osmotics import osmotic_law
from formbuf.qualify.osmotic_points import TABLE, Point, isotonic_points, points
from formbuf.qualify.published import case, mixture_of, rows
from formbuf.qualify.records import Case, Group

KIND = "osmolality"
UNIT = "osmol/kg"
K_KG_OSMOL = 1.858
DEPRESSION = "freezing_point_depression"
COEFFICIENT = "osmotic_coefficient"
#: Relative limit, limit in kelvin, and highest osmolality [osmol/kg].
CLOSE = (0.02, 0.01, 0.6)
WIDE = (0.04, 0.03, 0.25)
LIMITS = {
    "Sodium chloride": CLOSE,
    "NaCl": CLOSE,
    "Potassium chloride": CLOSE,
    "KCl": CLOSE,
    "NH4Cl": CLOSE,
    "Calcium chloride": CLOSE,
    "CaCl2": CLOSE,
    "Magnesium chloride": CLOSE,
    "Sucrose": CLOSE,
    "D-Glucose": CLOSE,
    "D-Mannitol": CLOSE,
    "Sodium hydrogen phosphate": WIDE,
    "Potassium hydrogen phosphate": WIDE,
    "Sodium phosphate": WIDE,
    "Sodium citrate dihydrate": WIDE,
}
#: Salts known by osmotic coefficients at 25 C only.
BY_COEFFICIENT = ("NaH2PO4", "KH2PO4", "sodium acetate")
COEFFICIENT_LIMIT = (0.04, 0.016)
ISOTONIC = ("Sodium dihydrogen phosphate", "Potassium dihydrogen phosphate")
ISOTONIC_LIMIT = 0.04
HIGHEST_SHOWN_OSMOL_KG = 0.6
KNOWN_MISSES = {
    "CaCl2": (
        "two tables disagree: at 0.1 mol/kg the older prints 0.49 K, the newer, from "
        "which most rows are fitted, interpolates to 0.484; miss 2.6 % and 0.012 K"
    )
}


def groups(library: Library) -> Iterator[Group]:
    """Yield the held rows by substance, then what is shown only."""
    law = osmotic_law(library)
    for substance in LIMITS:
        yield freezing_rows(library, law, substance)
    for substance in BY_COEFFICIENT:
        yield coefficient_rows(library, law, substance)
    yield _group("isotonic dihydrogen phosphates", isotonic_cases(library, law))
    yield _group("other solutes", other_cases(library, law))
    yield _group("osmotic coefficients at 25 C", at_25_c(library, law))
    yield _group("solutions of 1 g/100 mL", one_percent(library, law))


def _group(title: str, cases: Iterable[Case], *, known_miss: str = "") -> Group:
    key = f"{KIND} {title}"
    return Group(key, KIND, title, UNIT, tuple(cases), known_miss=known_miss, digits=4)


def held(
    library: Library, substance: str, highest_osmol_kg: float, quantity: str
) -> list[Point]:
    """Return the rows of a substance that fitted nothing, up to an osmolality."""
    return [
        p
        for p in points(library, substances=[substance], quantity=quantity)
        if not p.is_fitted and p.observed_osmol_kg <= highest_osmol_kg
    ]


def freezing_rows(library: Library, law: OsmoticLaw, substance: str) -> Group:
    """Return the held freezing points of one substance."""
    relative, kelvin, highest = LIMITS[substance]
    cases = [
        point_case(
            library, law, p, max(relative * p.observed_osmol_kg, kelvin / K_KG_OSMOL)
        )
        for p in held(library, substance, highest, DEPRESSION)
    ]
    known = KNOWN_MISSES.get(substance, "")
    return _group(f"{substance}, held rows", cases, known_miss=known)


def coefficient_rows(library: Library, law: OsmoticLaw, substance: str) -> Group:
    """Return the held osmotic coefficients of a salt without freezing points."""
    relative, osmol_kg = COEFFICIENT_LIMIT
    cases = [
        point_case(library, law, p, max(relative * p.observed_osmol_kg, osmol_kg))
        for p in held(library, substance, HIGHEST_SHOWN_OSMOL_KG, COEFFICIENT)
    ]
    return _group(f"{substance} at 25 C, held rows", cases)


def isotonic_cases(library: Library, law: OsmoticLaw) -> list[Case]:
    """Return the handbook's isotonic concentrations of the dihydrogen phosphates."""
    return [
        point_case(library, law, p, ISOTONIC_LIMIT * p.observed_osmol_kg)
        for p in isotonic_points(library, ISOTONIC)
    ]


def other_cases(library: Library, law: OsmoticLaw) -> list[Case]:
    """Return the held freezing points of solutes without a tolerance: shown."""
    return [
        point_case(library, law, p)
        for p in points(library, quantity=DEPRESSION)
        if not p.is_fitted
        and p.observed_osmol_kg <= HIGHEST_SHOWN_OSMOL_KG
        and p.substance not in LIMITS
    ]


def at_25_c(library: Library, law: OsmoticLaw) -> list[Case]:
    """Return osmotic coefficients beside the law of freezing points: shown."""
    return [
        point_case(library, law, p)
        for p in points(library, quantity=COEFFICIENT)
        if not p.is_fitted and 0.05 <= p.observed_osmol_kg <= HIGHEST_SHOWN_OSMOL_KG
    ]


def one_percent(library: Library, law: OsmoticLaw) -> Sequence[Case]:
    """Return freezing points of 1 g/100 mL, interpolated in the handbook: shown."""
    cases = []
    for row in rows(library, TABLE, kind="derived", use="test", quantity=DEPRESSION):
        if not row.counts("composition"):
            continue
        mixed = mixture_of(library, row)
        found = mixed.osmolality(0.0, mixed.solve(0.0), law).osmolality_mosm_kg
        published = osmolality_at_freezing_mosm_kg(-row.figure("value"))
        label = row.text("substance")
        cases.append(
            case(library, row, label, float(published) / 1000.0, float(found) / 1000.0)
        )
    return cases


def point_case(
    library: Library, law: OsmoticLaw, point: Point, allowed: float | None = None
) -> Case:
    """Return the case of one published osmolality."""
    label = f"{point.series} {point.observed_osmol_kg:.3f}"
    found = point.osmolality(law)
    return case(library, point.row, label, point.observed_osmol_kg, found, allowed)
