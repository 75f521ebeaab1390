"""Screens that drop a candidate on a computed value; each says what, value and limit.

Rules about what a product brings are in `formbuf.advice.screening`.
"""

from __future__ import annotations

from collections.abc import Iterable, Mapping

from formbuf.advice.evaluate import Product
from formbuf.advice.precedent import SpeciesStanding, has_monograph
from formbuf.advice.results import LiquidState, Screen
from formbuf.advice.sizing import Sizing
from formbuf.advice.wording import plain
from formbuf.chemistry import gas
from formbuf.library import Library
from formbuf.library.records import Material, Solubility, System
from formbuf.product.product_brief import ProductBrief

#: Names of the screens, under which a brief may set one aside with a reason.
SCREENS = (
    "precedent_avoid",
    "no_precedent",
    "ceiling",
    "excluded",
    "osmolality",
    "carbon_dioxide",
    "storage_window",
    "solubility",
    "buffers_through_counter_ion",
    "ph_window",
)

#: Share of a solubility known only at another temperature that is worth a word.
WORTH_SAYING = 0.2


def precedent_screens(
    found: tuple[SpeciesStanding, ...], brief: ProductBrief
) -> list[Screen]:
    """Avoided on this route, or neither precedent nor monograph."""
    screens = []
    for s in found:
        level = s.row.level if s.row is not None else "none"
        basis = s.row.level_basis if s.row is not None else "judgement"
        source = s.row.source if s.row is not None else ""
        route = brief.product.route.replace("_", " ")
        if level == "avoid":
            reason = f": {s.row.reason}" if s.row is not None and s.row.reason else ""
            screens.append(
                Screen(
                    "precedent_avoid",
                    f"{s.species} is avoided on the {route} route{reason}",
                    basis,
                    source,
                )
            )
        elif level == "none" and not has_monograph(s.row):
            screens.append(
                Screen(
                    "no_precedent",
                    f"{s.species}: no precedent known on the {route} route and no "
                    f"monograph{f'; {s.kept_by}' if s.kept_by else ''}",
                    basis,
                    source,
                )
            )
    return screens


def novelty_notes(found: tuple[SpeciesStanding, ...]) -> list[str]:
    """Say where a species with a monograph is new on this route."""
    return [
        f"{s.species} is novel on this route: a monograph exists, no precedent is known"
        for s in found
        if s.row is not None and s.row.level == "none" and has_monograph(s.row)
    ]


def ceiling_screen(
    sizing: Sizing,
    ceiling_mmol_l: float,
    largest_mmol_l: float,
    default_share: float,
    *,
    loads_are_default: bool,
) -> tuple[Screen | None, str]:
    """Screen a required concentration above the ceiling of the route.

    Returns
    -------
    (screen, note)
        Where all loads are defaults the screen acts only if the ceiling cannot carry
        ``default_share`` of them; otherwise the note says what it carries.
    """
    required = sizing.required_mmol_l
    if required is not None and required <= ceiling_mmol_l * (1.0 + 1e-9):
        return None, ""
    carried = sizing.carried_at(ceiling_mmol_l)
    shown = f"over {largest_mmol_l:g}" if required is None else plain(required)
    text = (
        f"the loads ask for {shown} mmol/L; the ceiling of {plain(ceiling_mmol_l)} "
        f"mmol/L carries {100.0 * carried:.0f} % of them"
    )
    if loads_are_default and carried >= default_share:
        return None, f"{text} (default loads: kept at the ceiling)"
    return Screen("ceiling", text, "judgement"), ""


def exclusion_screens(
    library: Library,
    system: System,
    exclude: Iterable[str],
    materials: Iterable[str] | None = None,
) -> list[Screen]:
    """Excluded by the brief: system, species, material, or an ion it brings.

    ``materials`` are those it is made of, titrants included; those of the tables
    where it is not made yet.
    """
    if materials is None:
        materials = [m for m in (system.acid_material, system.base_material) if m]
    brought = {
        component
        for material in materials
        for component in library.find_material(material).contents
    }
    names = {system.id, *system.species, *materials, *brought}
    return [
        Screen("excluded", f"{name} is excluded by the brief", "judgement")
        for name in exclude
        if name in names
    ]


def osmolality_screen(
    buffer_mosm_kg: float, high_mosm_kg: float | None
) -> Screen | None:
    """Osmolality of the buffer alone above the limit of the product."""
    if high_mosm_kg is None or buffer_mosm_kg <= high_mosm_kg:
        return None
    return Screen(
        "osmolality",
        f"the buffer alone brings {buffer_mosm_kg:.0f} mosmol/kg, allowed "
        f"{high_mosm_kg:.0f}",
        "derived",
    )


def carbon_dioxide_screen(
    brief: ProductBrief, product: Product, system: System, allowed_pa: float
) -> Screen | None:
    """Carbon dioxide that a carbonate buffer would need above it.

    ``allowed_pa`` is the pressure stated for the headspace, or what a headspace that
    nobody flushed can be taken to hold. A product kept dried is a powder until use.
    """
    if "carbonate" not in system.species:
        return None
    if brief.is_dried and not brief.liquid_storage_temperatures_c:
        return None
    total = sum(
        row.mmol_l for row in product.species_states if row.component == "carbonate"
    )
    pressure, at = _worst_pressure(brief, product)
    exposure = brief.carbon_dioxide.exposure
    if exposure == "open":
        return Screen(
            "carbon_dioxide",
            f"open to the air it loses its carbon dioxide ({plain(pressure / 1000.0)} kPa "
            f"at {at:g} C above {plain(total)} mmol/L): the pH is not held",
            "derived",
            "sander_2023",
        )
    if pressure > allowed_pa:
        return Screen(
            "carbon_dioxide",
            f"it would need {plain(pressure / 1000.0)} kPa of carbon dioxide above it at "
            f"{at:g} C, allowed {plain(allowed_pa / 1000.0)} kPa in the headspace",
            "derived",
            "sander_2023",
        )
    return None


def _worst_pressure(brief: ProductBrief, product: Product) -> tuple[float, float]:
    """Highest pressure of its carbon dioxide [Pa], and at which temperature.

    Of measurement and liquid storage; mostly the warmest, where the gas dissolves least.
    """
    found = []
    stored = (brief.ph.measure_temperature_c, *brief.liquid_storage_temperatures_c)
    for t in dict.fromkeys(stored):
        whole = product.mixture
        pressure = gas.implied_pressure_pa(
            whole.ladders, whole.totals_mol_kg, t, whole.solve(t)
        )
        found.append((float(pressure), t))
    return max(found, key=lambda pair: pair[0])


def storage_window_screen(
    brief: ProductBrief, states: tuple[LiquidState, ...]
) -> Screen | None:
    """PH at a storage temperature outside the storage window, where one is given."""
    low, high = brief.ph.storage_low, brief.ph.storage_high
    if low is None or high is None:
        return None
    for s in states:
        if "storage" in s.kinds and not low <= s.ph <= high:
            near = min(abs(s.ph - low), abs(s.ph - high)) < 0.005
            return Screen(
                "storage_window",
                f"pH {s.ph:.{4 if near else 2}f} at {s.temperature_c:g} C, allowed "
                f"{low:g} to {high:g}",
                "derived",
            )
    return None


def solubility_screens(
    library: Library,
    brief: ProductBrief,
    system: System,
    composition_mmol_l: Mapping[str, float],
    water_kg_l: float,
) -> tuple[list[Screen], list[str]]:
    """Solubility of the forms that could crystallise at the coldest liquid temperature.

    The amount of a form is that of the material that brings it. A solubility known
    at one other temperature only cannot be judged, and says so where it is near.
    """
    cold = min(brief.liquid_storage_temperatures_c, default=None)
    if cold is None:
        return [], []
    screens: list[Screen] = []
    notes: list[str] = []
    for key, mmol_l in composition_mmol_l.items():
        material = library.find_material(key)
        known = _solubilities(library, material)
        if not known or not set(material.contents) & set(system.species):
            continue
        here = _dry_g_per_100g(material, mmol_l, water_kg_l)
        at, q = min(
            ((s.temperature_c, s.g_per_100g_water) for s in known),
            key=lambda pair: abs((pair[0] or 25.0) - cold),
        )
        if q is None or at is None:
            continue
        limit = q.value
        if here > limit and cold <= at + 1.0:
            screens.append(
                Screen(
                    "solubility",
                    f"{material.name}: {here:.3g} g per 100 g of water, soluble "
                    f"{limit:.3g} at {at:g} C, coldest liquid {cold:g} C",
                    q.basis,
                    q.source,
                )
            )
        elif abs(at - cold) > 1.0 and here > WORTH_SAYING * limit:
            notes.append(
                f"solubility of {material.name} is known at {at:g} C only "
                f"({limit:.3g} g per 100 g of water; here {here:.3g}): not judged "
                f"at {cold:g} C"
            )
    return screens, notes


def _solubilities(library: Library, material: Material) -> list[Solubility]:
    """Solubility rows of a material, or of one that differs only in crystal water."""
    rows = [s for s in material.solubilities if s.g_per_100g_water is not None]
    if rows:
        return rows
    for other in library.materials.values():
        if dict(other.contents) == dict(material.contents):
            rows = [s for s in other.solubilities if s.g_per_100g_water is not None]
            if rows:
                return rows
    return []


def _dry_g_per_100g(material: Material, mmol_l: float, water_kg_l: float) -> float:
    dry = material.molar_mass_g_mol.value - 18.015 * material.waters
    return mmol_l / 1000.0 * dry / water_kg_l / 10.0
