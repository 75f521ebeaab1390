"""What the calculation says about one candidate, for rules and the exposure table.

`CandidateQuantities` is filled by whoever computed the candidate; the functions here
turn it into the facts of ``facts.csv`` marked ``computed`` and into amounts per dose
and per day. Concentrations are mmol per litre of solution.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field

from formbuf.chemistry.activity import log10_gamma
from formbuf.library import Library
from formbuf.library.records import Solubility
from formbuf.library.vocabulary import MISSING, FactValue, Missing
from formbuf.product.product_brief import ProductBrief

#: pK of the solubility product of CaHPO4.2H2O at 25 C (Gregory, Moreno & Brown 1970,
#: J. Res. Natl. Bur. Stand. 74A, 461; memory).
BRUSHITE_PK = 6.59
#: Osmolality of 0.9 % sodium chloride [mosmol/kg] (CRC Handbook, freezing points).
SALINE_MOSM_KG = 286.0
SALINE_PERCENT = 0.9
BORON_G_MOL = 10.81
#: Species whose uncharged form leaves with the water vapour.
VOLATILE = ("acetate", "carbonate", "ammonia", "formate", "propionate")
#: Share of its solubility from which a neutral form counts as near saturation.
NEAR_SATURATION = 0.5

_LEVELS = ("established", "limited", "none", "avoid", "not_listed")


@dataclass(frozen=True, slots=True, kw_only=True)
class CandidateQuantities:
    """Computed quantities of one candidate.

    Parameters
    ----------
    system : str
        Id of the buffer system, ``none`` for the product without buffer.
    species : frozenset of str
        Species that the buffer itself brings; what excipients bring is not among them.
    ph : mapping of float to float
        pH by temperature [C]; holds the temperature of measurement.
    measure_temperature_c : float
    species_mmol_l, ions_mmol_l, neutrals_mmol_l : mapping of str to float
        Totals of the whole solution, excipients and counter-ions included.
    forms_mmol_l : mapping of str to mapping of int to float
        Each species by charge at the temperature of measurement.
    ionic_strength_mol_kg, capacity_mmol_l_ph : float
    titratable_acidity_mmol_l : float
        Strong base to pH 7.4 at the temperature of measurement; negative for acid.
    osmolality_mosm_kg : float or None
    frozen_drift_class : str or None
        Class of the freezing model; None where it has not run or has no answer.
    amorphous_sugar_percent : float or None
        Sucrose and trehalose [% w/v] where known otherwise; None takes them from the
        neutral solutes and the brief.
    """

    system: str
    species: frozenset[str]
    ph: Mapping[float, float]
    measure_temperature_c: float
    species_mmol_l: Mapping[str, float]
    ions_mmol_l: Mapping[str, float]
    neutrals_mmol_l: Mapping[str, float]
    forms_mmol_l: Mapping[str, Mapping[int, float]]
    ionic_strength_mol_kg: float
    capacity_mmol_l_ph: float
    titratable_acidity_mmol_l: float
    osmolality_mosm_kg: float | None
    frozen_drift_class: str | None = None
    amorphous_sugar_percent: float | None = None

    def component_mmol_l(self, name: str) -> float:
        """Return the concentration of a species, ion or neutral solute, mmol/L."""
        tables = (self.species_mmol_l, self.ions_mmol_l, self.neutrals_mmol_l)
        return sum(table.get(name, 0.0) for table in tables)

    @property
    def components(self) -> frozenset[str]:
        """Everything dissolved."""
        return frozenset(
            (*self.species_mmol_l, *self.ions_mmol_l, *self.neutrals_mmol_l)
        )


@dataclass(frozen=True, slots=True)
class Exposure:
    """How much of one substance a dose and a day bring.

    ``mg`` figures are None where no molar mass is known. Species are weighed as their
    uncharged acid or base, borate also as ``boron``.
    """

    substance: str
    mmol_l: float
    mmol_dose: float
    mmol_day: float
    mg_dose: float | None
    mg_day: float | None
    mass_as: str = field(default="")


def exposures(
    quantities: CandidateQuantities, brief: ProductBrief, library: Library
) -> tuple[Exposure, ...]:
    """Return the exposure to each ion and species, and to boron, sorted by name.

    Water and uncharged solutes are left out. The concentration is that of the product
    as filled.
    """
    rows = []
    for name in sorted((*quantities.species_mmol_l, *quantities.ions_mmol_l)):
        mass, mass_as = reference_mass_g_mol(library, name)
        rows.append(_exposure(name, quantities, brief, mass, mass_as))
        if name == "borate":
            boron = _exposure(name, quantities, brief, BORON_G_MOL, "boron")
            rows.append(_renamed(boron, "boron"))
    return tuple(sorted(rows, key=lambda row: row.substance))


def _exposure(
    name: str,
    quantities: CandidateQuantities,
    brief: ProductBrief,
    mass_g_mol: float | None,
    mass_as: str,
) -> Exposure:
    mmol_l = quantities.component_mmol_l(name)
    dose = mmol_l * brief.dose.volume_ml / 1000.0
    day = mmol_l * brief.dose.volume_ml_day / 1000.0
    return Exposure(
        substance=name,
        mmol_l=mmol_l,
        mmol_dose=dose,
        mmol_day=day,
        mg_dose=None if mass_g_mol is None else dose * mass_g_mol,
        mg_day=None if mass_g_mol is None else day * mass_g_mol,
        mass_as=mass_as,
    )


def _renamed(row: Exposure, name: str) -> Exposure:
    return Exposure(
        name,
        row.mmol_l,
        row.mmol_dose,
        row.mmol_day,
        row.mg_dose,
        row.mg_day,
        row.mass_as,
    )


def reference_mass_g_mol(library: Library, name: str) -> tuple[float | None, str]:
    """Return the molar mass by which a component is weighed, and as what.

    An ion by itself; a species as the anhydrous material that consists of it alone.
    """
    if name in library.ions:
        return library.ions[name].molar_mass_g_mol, name
    for material in library.materials.values():
        if dict(material.contents) == {name: 1.0} and material.waters == 0.0:
            return material.molar_mass_g_mol.value, material.id
    return None, ""


# -- facts of a candidate ----------------------------------------------------------


def brushite_saturation_ratio(
    quantities: CandidateQuantities, calcium_mmol_l: FactValue | Missing
) -> FactValue | Missing:
    """Return activity product over solubility product of CaHPO4.2H2O at 25 C.

    Ion pairs are left out, so it is an upper bound; molalities are taken equal to
    concentrations.
    """
    if not isinstance(calcium_mmol_l, float | int):
        return MISSING
    hydrogen_phosphate = quantities.forms_mmol_l.get("phosphate", {}).get(-2, 0.0)
    if calcium_mmol_l <= 0.0 or hydrogen_phosphate <= 0.0:
        return 0.0
    gamma = float(log10_gamma(2, quantities.ionic_strength_mol_kg, 25.0))
    product = calcium_mmol_l * hydrogen_phosphate * 1e-6
    return float(product * 10.0 ** (2.0 * gamma + BRUSHITE_PK))


def volatile_fraction(quantities: CandidateQuantities) -> float:
    """Return the largest share of a volatile species of the buffer that is neutral."""
    shares = [0.0]
    for name in quantities.species.intersection(VOLATILE):
        total = quantities.species_mmol_l.get(name, 0.0)
        if total > 0.0:
            neutral = quantities.forms_mmol_l.get(name, {}).get(0, 0.0)
            shares.append(min(neutral / total, 1.0))
    return max(shares)


def neutral_form_saturation_ratio(
    quantities: CandidateQuantities, library: Library, coldest_c: float | None
) -> FactValue | Missing:
    """Return the largest share of its solubility that an uncharged form reaches.

    Where the solubility is known only warmer than the coldest liquid, the ratio is a
    lower bound: it stands if it is already high, else it is missing.
    """
    worst, unsure = 0.0, False
    for name in quantities.species:
        amount = quantities.forms_mmol_l.get(name, {}).get(0, 0.0)
        points = _solubilities_mmol_kg(library, name)
        if amount <= 0.0 or not points:
            unsure = unsure or amount > 0.0
            continue
        limit, is_lower_bound = _solubility_at(points, coldest_c)
        ratio = amount / limit
        worst = max(worst, ratio)
        unsure = unsure or (is_lower_bound and ratio <= NEAR_SATURATION)
    return MISSING if unsure and worst <= NEAR_SATURATION else worst


def _solubilities_mmol_kg(library: Library, species: str) -> list[tuple[float, float]]:
    """Return (temperature C, mmol per kg of water) of the uncharged form, ascending."""
    found: list[tuple[float, float]] = []
    for material in library.materials.values():
        if dict(material.contents) == {species: 1.0}:
            scale = 1e4 / material.molar_mass_g_mol.value
            found += [
                (entry.temperature_c, entry.g_per_100g_water.value * scale)
                for entry in material.solubilities
                if _is_number(entry)
                and entry.temperature_c is not None
                and entry.g_per_100g_water is not None
            ]
    return sorted(found)


def _is_number(entry: Solubility) -> bool:
    return entry.g_per_100g_water is not None and entry.g_per_100g_water.value > 0.0


def _solubility_at(
    points: list[tuple[float, float]], coldest_c: float | None
) -> tuple[float, bool]:
    """Return the solubility at a temperature and whether it is known only warmer."""
    if coldest_c is None:
        return min(value for _, value in points), True
    below = [point for point in points if point[0] <= coldest_c + 1e-9]
    above = [point for point in points if point[0] > coldest_c]
    if not below:
        return min(value for _, value in above), True
    low = below[-1]
    if not above:
        return low[1], False
    high = above[0]
    share = (coldest_c - low[0]) / (high[0] - low[0])
    return low[1] + share * (high[1] - low[1]), False


def amorphous_sugar_percent(quantities: CandidateQuantities, library: Library) -> float:
    """Return sucrose and trehalose together, % w/v of the anhydrous sugars."""
    total_g_l = 0.0
    for name in ("sucrose", "trehalose"):
        amount = quantities.neutrals_mmol_l.get(name, 0.0)
        if amount > 0.0:
            total_g_l += amount * library.neutrals[name].molar_mass_g_mol / 1000.0
    return total_g_l / 10.0


def precedent_level(
    quantities: CandidateQuantities, brief: ProductBrief, library: Library
) -> str:
    """Return the worst level of precedent among the species of the buffer."""
    route = brief.product.precedent_route
    levels = ["established"]
    for name in quantities.species:
        record = library.precedents.get((name, route))
        levels.append(record.level if record else "not_listed")
    return max(levels, key=_LEVELS.index)


def in_pharmacopoeia(
    quantities: CandidateQuantities, brief: ProductBrief, library: Library
) -> FactValue | Missing:
    """Return whether each species of the buffer has a monograph somewhere."""
    route = brief.product.precedent_route
    unknown = False
    for name in quantities.species:
        record = library.precedents.get((name, route))
        words = set(record.monographs.values()) if record else {"no"}
        if words & {"yes", "partial"}:
            continue
        if "unknown" not in words:
            return False
        unknown = True
    return MISSING if unknown else True


def precedent_ceiling_ratio(
    quantities: CandidateQuantities, brief: ProductBrief, library: Library
) -> FactValue | Missing:
    """Return the largest ratio of a concentration to its highest known level."""
    route = brief.product.precedent_route
    worst, unsure = 0.0, False
    for name in quantities.species:
        record = library.precedents.get((name, route))
        ceiling = record.ceiling_mmol_l if record else None
        if not ceiling:
            unsure = True
            continue
        worst = max(worst, quantities.species_mmol_l.get(name, 0.0) / ceiling)
    return MISSING if unsure and worst <= 1.0 else worst


def citrate_mmol_kg_h(quantities: CandidateQuantities, brief: ProductBrief) -> float:
    """Return the rate of citrate; without an infusion rate, one dose in an hour."""
    dose = brief.dose
    volume = dose.infusion_rate_ml_h or dose.volume_ml
    citrate = quantities.component_mmol_l("citrate")
    return citrate * volume / 1000.0 / dose.body_mass_kg
