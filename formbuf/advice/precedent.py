"""Where and for what a species is known, and up to which concentration."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

from formbuf.advice.criteria_table import Settings
from formbuf.advice.wording import plain
from formbuf.library import Library
from formbuf.library.inactive_ingredients import SOURCE_ID
from formbuf.library.records import KindPrecedent, Precedent, System
from formbuf.product.product_brief import ProductBrief

#: Name under which the product without buffer stands in the precedents.
NO_BUFFER = "none"
#: Route groups on which potassium as the ion of the buffer counts as limited.
POTASSIUM_LIMITED = ("parenteral", "ophthalmic_topical")


@dataclass(frozen=True, slots=True)
class SpeciesStanding:
    """Precedent of one species of a candidate.

    Attributes
    ----------
    species : str
    share : float
        Its amount over the nominal concentration of the system.
    row : Precedent or None
    kind_row : KindPrecedent or None
    route_largest_mmol_l : float
        Highest ceiling of any established species on the route: what a species
        without a ceiling of its own is never taken beyond.
    kept_by : str
        What keeps an in-house species or system that no precedent is known of; empty
        for those of the tables.
    """

    species: str
    share: float
    row: Precedent | None
    kind_row: KindPrecedent | None
    route_largest_mmol_l: float = float("inf")
    kept_by: str = ""


def standings(
    library: Library,
    brief: ProductBrief,
    system: System,
    shares: Mapping[str, float],
) -> tuple[SpeciesStanding, ...]:
    """Look up every species of a system on the route and for the kind of product."""
    route = brief.product.precedent_route
    known = [
        row.ceiling_mmol_l
        for (_, at), row in library.precedents.items()
        if at == route and row.level == "established" and row.ceiling_mmol_l
    ]
    largest = max(known, default=float("inf"))
    return tuple(
        SpeciesStanding(
            species,
            shares.get(species, 1.0),
            library.precedents.get((species, route)),
            kind_row(library, brief, species),
            largest,
            _kept_by(library, system, species, route),
        )
        for species in system.species
    )


def _kept_by(library: Library, system: System, species: str, route: str) -> str:
    """Say what to write where an in-house species is to stay without a precedent."""
    known = library.species.get(species)
    if not (system.overlay or (known is not None and known.overlay)):
        return ""
    only = f'system = "{system.id}", ' if system.id in library.systems else ""
    return (
        f'in-house: [[override]] with rule = "no_precedent", {only}reason, name and '
        f"date keeps it; so does a row {species}, {route} in precedent.csv of a "
        "directory of your own (--knowledge), which then holds the species too"
    )


def kind_row(
    library: Library, brief: ProductBrief, species: str
) -> KindPrecedent | None:
    """Row of the kind table for a species; rows for any kind serve all kinds."""
    group, kind = brief.route_group, brief.drug.kind_group
    for row in library.kind_precedents:
        if (
            row.species == species
            and row.route_group == group
            and row.kind in (kind, "any")
        ):
            return row
    return None


def kind_applies(library: Library, brief: ProductBrief) -> bool:
    """Whether the kind table says anything about this kind of product and route."""
    group, kind = brief.route_group, brief.drug.kind_group
    return any(
        row.route_group == group and row.kind in (kind, "any")
        for row in library.kind_precedents
    )


def ceiling_mmol_l(
    found: tuple[SpeciesStanding, ...], brief: ProductBrief, settings: Settings
) -> float:
    """Largest nominal concentration that every species of the system bears.

    Each species is held against its own ceiling. Above the reference volume the
    ceiling holds as an amount per dose; a largest daily amount, where a file of the
    user lists one, is never passed.
    """
    fallback = float(settings.table["anchors"]["capacity"]["fallback_ceiling"])
    ceilings = [
        (
            min(fallback, s.route_largest_mmol_l)
            if s.row is None or s.row.ceiling_mmol_l is None
            else s.row.ceiling_mmol_l
        )
        / s.share
        for s in found
        if s.share > 1e-9
    ]
    ceiling = min(ceilings, default=fallback)
    reference = settings.number("sizing", "dose_reference_ml")
    if brief.is_parenteral and brief.dose.volume_ml > reference:
        ceiling *= reference / brief.dose.volume_ml
    litres_day = brief.dose.volume_ml * brief.dose.per_day / 1000.0
    daily = [
        s.row.daily_mmol / litres_day / s.share
        for s in found
        if s.row is not None and s.row.daily_mmol is not None and s.share > 1e-9
    ]
    return min([ceiling, *daily])


def listed_notes(found: tuple[SpeciesStanding, ...]) -> list[str]:
    """Say what a list of inactive ingredients of the user changed for the species."""
    return [f"by the file of the user, {text}" for s in found if (text := _listed(s))]


def listed_sources(found: tuple[SpeciesStanding, ...]) -> tuple[str, ...]:
    """Return the source of a ceiling that comes from such a list; else empty."""
    return (SOURCE_ID,) if any(_listed(s) for s in found) else ()


def _listed(standing: SpeciesStanding) -> str:
    return "" if standing.row is None else standing.row.listed


@dataclass(frozen=True, slots=True)
class PrecedentScore:
    """Desirability of precedent and how it came about."""

    desirability: float
    text: str
    sources: tuple[str, ...]
    rests_on_recall: bool


def score(
    library: Library,
    brief: ProductBrief,
    system: System,
    found: tuple[SpeciesStanding, ...],
    concentration_mmol_l: float,
    settings: Settings,
) -> PrecedentScore:
    """Judge precedent: the lower of route and kind, times closeness to usual use.

    Using less than usual is never a fault. With two species the worse one counts.
    """
    table = settings.table["precedent"]
    judged = [
        _species_score(library, brief, system, s, concentration_mmol_l, table)
        for s in found
    ]
    return min(judged, key=lambda entry: entry.desirability)


def _species_score(
    library: Library,
    brief: ProductBrief,
    system: System,
    s: SpeciesStanding,
    concentration_mmol_l: float,
    table: Mapping[str, float],
) -> PrecedentScore:
    level = s.row.level if s.row is not None else "none"
    level_value = float(table.get(level, table["none"]))
    is_bare = s.species == NO_BUFFER
    words = [f"{'no buffer' if is_bare else s.species}: {level} on this route"]
    if has_potassium(library, system) and brief.route_group in POTASSIUM_LIMITED:
        limited = float(table["limited"])
        if limited < level_value:
            level_value = limited
            words.append("potassium as the ion of the buffer counts as limited")
    if is_bare:  # the kind table lists buffers, so its silence says nothing here
        kind_value = 1.0
    elif kind_applies(library, brief):
        kind = s.kind_row.level if s.kind_row is not None else "none"
        kind_value = float(table[f"kind_{kind}"])
        words.append(f"{kind} for this kind of product")
    else:
        kind_value = 1.0
    closeness = 1.0
    usual = s.row.usual_high_mmol_l if s.row is not None else None
    own = concentration_mmol_l * s.share
    if usual is not None and own > usual:
        closeness = (usual / own) ** float(table["above_usual_exponent"])
        words.append(f"{plain(own)} mmol/L is above the usual {usual:g}")
    elif usual is not None:
        words.append(f"{plain(own)} mmol/L is within usual use (up to {usual:g})")
    sources = tuple(x for x in (s.row.source if s.row else "", _kind_source(s)) if x)
    recall = s.row is None or s.row.level_basis != "published" or bool(s.kind_row)
    return PrecedentScore(
        max(min(level_value, kind_value) * closeness, 0.05),
        "; ".join(words),
        sources,
        recall,
    )


def _kind_source(s: SpeciesStanding) -> str:
    return s.kind_row.source if s.kind_row is not None else ""


def has_potassium(library: Library, system: System) -> bool:
    """Whether potassium is the counter-ion of a system's materials."""
    materials = [m for m in (system.acid_material, system.base_material) if m]
    return any("potassium" in library.find_material(m).contents for m in materials)


def has_monograph(row: Precedent | None, wanted: tuple[str, ...] = ()) -> bool:
    """Whether a pharmacopoeia (one of the wanted, or any) holds the species."""
    if row is None:
        return False
    books = wanted or tuple(row.monographs)
    return any(row.monographs.get(book) in ("yes", "partial") for book in books)
