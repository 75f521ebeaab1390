"""Complete a brief: fill what is not stated, and say what was filled and why.

The defaults are in ``defaults.toml``; dose volume, osmolality limits and the carbon
dioxide of air come from their own tables. Nothing the user stated is changed.
"""

from __future__ import annotations

from dataclasses import dataclass
from types import MappingProxyType
from typing import Any

from formbuf.constants import STANDARD_PRESSURE_PA
from formbuf.library import Library
from formbuf.product.brief_amounts import (
    complete_candidates,
    complete_drug,
    complete_excipients,
    complete_ranking,
)
from formbuf.product.brief_check import check_against_library
from formbuf.product.brief_filler import Filler
from formbuf.product.brief_model import Brief
from formbuf.product.brief_notices import notices
from formbuf.product.brief_overlay import lay_over
from formbuf.product.brief_storage import complete_storage
from formbuf.product.brief_tonicity import complete_tonicity
from formbuf.product.product_brief import ProductBrief, plain
from formbuf.product.product_parts import (
    Assumption,
    CarbonDioxideInfo,
    ContainerInfo,
    DoseInfo,
    LoadsInfo,
    OverrideInfo,
    PhInfo,
    ProductInfo,
)
from formbuf.product.vocabulary import ContainerType, Exposure

#: What the usual volume of a route is; the largest makes amounts per dose an upper end.
_VOLUME_REASONS = {
    "typical": "typical volume of the route",
    "largest": (
        "largest usual volume of the route, conservative: amounts per dose are an "
        "upper end until the dose is stated"
    ),
}


@dataclass(frozen=True, slots=True)
class Completed:
    """A completed brief, and what had to be assumed for it.

    Attributes
    ----------
    brief : ProductBrief
        Every value resolved.
    assumptions : tuple of Assumption
        Every value that was not stated, to be printed with each result.
    warnings : tuple of str
        What looks unusual or is left out of account, one sentence each.
    library : Library
        The library with the brief's own species, materials and systems on top.
    """

    brief: ProductBrief
    assumptions: tuple[Assumption, ...]
    warnings: tuple[str, ...]
    library: Library

    def to_dict(self) -> dict[str, Any]:
        """Return brief, assumptions and warnings as plain types for JSON."""
        return {
            "brief": self.brief.to_dict(),
            "assumptions": plain(self.assumptions),
            "warnings": list(self.warnings),
        }


def complete(brief: Brief, library: Library) -> Completed:
    """Check a brief against the library and fill what it does not state.

    Raises
    ------
    InputError
        A name is unknown or a material cannot be used (`check_against_library`).
    KnowledgeError
        ``defaults.toml`` is broken.
    """
    check_against_library(brief, library)
    filler = Filler(brief, library)
    spread = 0.0
    if any(row.pka_uncertainty is None for row in brief.species):
        spread = float(filler.take("species.pka_uncertainty"))
    filler.library = lay_over(brief, library, spread)
    dose = _dose(filler)
    container = _container(filler)
    carbon_dioxide = _carbon_dioxide(filler)
    storage = complete_storage(filler)
    excipients = complete_excipients(filler)
    tonicity = complete_tonicity(filler, storage, excipients)
    product = ProductBrief(
        title=brief.title or "",
        product=_product(filler),
        ph=_ph(filler),
        storage=storage,
        dose=dose,
        loads=_loads(filler),
        container=container,
        carbon_dioxide=carbon_dioxide,
        tonicity=tonicity,
        drug=complete_drug(filler),
        excipient=excipients,
        exclude=brief.exclude,
        require=brief.require,
        consider_roles=brief.consider_roles,
        candidate=complete_candidates(filler),
        ranking=complete_ranking(brief),
        override=tuple(
            OverrideInfo(row.rule, row.system, row.reason, row.name, row.date)
            for row in brief.override
        ),
        facts=MappingProxyType(dict(brief.facts)),
        uncertainty=brief.uncertainty.info(),
    )
    return Completed(
        brief=product,
        assumptions=_ordered(filler.assumptions),
        warnings=notices(product, filler.library),
        library=filler.library,
    )


def _ordered(assumptions: list[Assumption]) -> tuple[Assumption, ...]:
    """Return assumptions in the order of the tables of a brief."""
    tables = list(Brief.model_fields)
    return tuple(
        sorted(assumptions, key=lambda row: tables.index(row.key.partition(".")[0]))
    )


def _product(filler: Filler) -> ProductInfo:
    product = filler.brief.product
    route: str = product.route
    precedent_route = route
    if not any(key[1] == route for key in filler.library.precedents):
        precedent_route = filler.take("product.precedent_route")
    return ProductInfo(
        name=product.name or "",
        version=product.version or "",
        route=product.route,
        form=filler.form,
        population=filler.population,
        filing=product.filing,
        pharmacopoeias=product.pharmacopoeias,
        precedent_route=precedent_route,
    )


def _ph(filler: Filler) -> PhInfo:
    ph = filler.brief.ph
    low, high = ph.low, ph.high
    if low is None or high is None:
        low, high = _window(filler, ph.target)
    tolerance = ph.release_tolerance
    if tolerance is None:
        usual = float(filler.case("ph.release_tolerance").value)
        half_room = round(min(ph.target - low, high - ph.target) / 2, 6)
        if usual <= half_room:
            tolerance = float(filler.take("ph.release_tolerance"))
        else:
            tolerance = half_room
            reason = "half the distance to the nearer limit, since the window is narrow"
            filler.assume("ph.release_tolerance", half_room, "pH", "judgement", reason)
    return PhInfo(
        target=ph.target,
        low=low,
        high=high,
        release_tolerance=tolerance,
        measure_temperature_c=filler.or_default(
            ph.measure_temperature_c, "ph.measure_temperature_c"
        ),
        prepare_temperature_c=filler.or_default(
            ph.prepare_temperature_c, "ph.prepare_temperature_c"
        ),
        storage_low=ph.storage_low,
        storage_high=ph.storage_high,
    )


def _window(filler: Filler, target: float) -> tuple[float, float]:
    """Return the default window around the target, and note both of its ends."""
    case = filler.case("ph.half_width")
    half_width = float(case.value)
    low = round(max(target - half_width, 0.0), 6)
    high = round(min(target + half_width, 14.0), 6)
    reason = f"{half_width:g} either side of the target: {case.reason}"
    for key, end in (("ph.low", low), ("ph.high", high)):
        filler.assume(key, end, case.unit, case.basis, reason, case.source)
    return low, high


def _dose(filler: Filler) -> DoseInfo:
    dose = filler.brief.dose
    volume = dose.volume_ml
    limits = filler.library.route_limits.get(filler.brief.product.route)
    if volume is None and limits is not None and limits.usual_volume_ml is not None:
        volume = limits.usual_volume_ml
        reason = _VOLUME_REASONS.get(
            limits.usual_volume_is, "usual volume of the route"
        )
        filler.assume(
            "dose.volume_ml", volume, "mL", limits.basis, reason, limits.source
        )
    if volume is None:
        volume = float(filler.take("dose.volume_ml"))
    filler.volume_ml = volume
    return DoseInfo(
        volume_ml=volume,
        per_day=filler.or_default(dose.per_day, "dose.per_day"),
        infusion_rate_ml_h=dose.infusion_rate_ml_h,
        body_mass_kg=filler.or_default(dose.body_mass_kg, "dose.body_mass_kg"),
        age_years=dose.age_years,
    )


def _loads(filler: Filler) -> LoadsInfo:
    loads = filler.brief.loads
    return LoadsInfo(
        acid_mmol_l=filler.or_default(loads.acid_mmol_l, "loads.acid_mmol_l"),
        base_mmol_l=filler.or_default(loads.base_mmol_l, "loads.base_mmol_l"),
        note=loads.note or "",
        acid_is_default=loads.acid_mmol_l is None,
        base_is_default=loads.base_mmol_l is None,
    )


def _container(filler: Filler) -> ContainerInfo:
    container = filler.brief.container
    stated = container.type
    kind: ContainerType
    if stated is not None:
        kind = stated
    elif container.count_alkali:
        kind = "glass_vial"
        reason = "the brief counts alkali, which only glass gives"
        filler.assume("container.type", kind, "", "judgement", reason)
    else:
        kind = filler.take("container.type")
    is_glass = kind.startswith("glass")
    fill = container.fill_volume_ml
    if fill is None and filler.find("container.fill_volume_ml") is not None:
        fill = float(filler.take("container.fill_volume_ml"))
    if fill is None:
        fill = filler.volume_ml
        reason = "one dose in each container"
        if filler.brief.dose.volume_ml is None and is_glass:
            reason += "; in a smaller fill each litre meets more glass and its alkali"
        filler.assume("container.fill_volume_ml", fill, "mL", "judgement", reason)
    counts = container.count_alkali
    if counts is None:
        counts = is_glass
        reason = "glass gives alkali, other containers do not"
        filler.assume("container.count_alkali", counts, "", "practice", reason)
    permeable = container.gas_permeable
    if permeable is None and (is_glass or stated is not None):
        permeable = not is_glass and kind != "tube"
        reason = (
            "plastic lets carbon dioxide through over months"
            if permeable
            else "glass and tubes keep carbon dioxide in and out"
        )
        filler.assume("container.gas_permeable", permeable, "", "practice", reason)
    return ContainerInfo(kind, fill, counts, permeable)


def _carbon_dioxide(filler: Filler) -> CarbonDioxideInfo:
    stated = filler.brief.carbon_dioxide
    exposure: Exposure = filler.or_default(stated.exposure, "carbon_dioxide.exposure")
    pressure = stated.pressure_pa
    if pressure is None:
        air = filler.library.carbon_dioxide["air_fraction_dry"].value
        pressure = round(air.value * STANDARD_PRESSURE_PA, 3)
        filler.assume(
            "carbon_dioxide.pressure_pa",
            pressure,
            "Pa",
            air.basis,
            "carbon dioxide of dry air at standard pressure",
            air.source,
        )
    return CarbonDioxideInfo(exposure, pressure, stated.headspace_ratio)
