"""Facts that are computed from the brief or from the quantities of a candidate.

One small function per fact, in the two registries at the end; which facts they are is
said by ``computed`` in ``facts.csv``, and a test holds the two equal.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass

from formbuf.library import Library
from formbuf.library.rule_tables import Rulebook
from formbuf.library.vocabulary import MISSING, FactValue, Missing
from formbuf.product import quantities as q
from formbuf.product.product_brief import ProductBrief
from formbuf.product.quantities import CandidateQuantities
from formbuf.product.vocabulary import AGE_BANDS

WEEKS_PER_YEAR = 365.25 / 7.0


@dataclass(frozen=True, slots=True)
class Situation:
    """A completed brief with what is needed to turn it into facts.

    Parameters
    ----------
    brief : ProductBrief
    library : Library
        With the brief's own species and materials laid over it.
    rulebook : Rulebook
    answers : mapping of str to value or MISSING
        Checked answers of ``[facts]``; MISSING where the user says "unknown".
    assumed : frozenset of str
        Keys of the brief that were filled in.
    drug_capacity_mmol_l_ph : float or None
        What the drug itself buffers at the target pH.
    """

    brief: ProductBrief
    library: Library
    rulebook: Rulebook
    answers: Mapping[str, FactValue | Missing]
    assumed: frozenset[str] = frozenset()
    drug_capacity_mmol_l_ph: float | None = None


_Values = Mapping[str, FactValue | Missing]
_ProductFact = Callable[[Situation, _Values], FactValue | Missing]
_CandidateFact = Callable[
    [Situation, CandidateQuantities, _Values], FactValue | Missing
]


def _excipients_listed(situation: Situation, _values: _Values) -> FactValue | Missing:
    return bool(situation.brief.excipient)


def _freezes(situation: Situation, _values: _Values) -> FactValue | Missing:
    return situation.brief.is_frozen or situation.brief.is_dried


def _age_years(situation: Situation, _values: _Values) -> FactValue | Missing:
    return AGE_BANDS[situation.brief.product.population][0]


def _age_weeks(_situation: Situation, values: _Values) -> FactValue | Missing:
    years = values.get("age_years", MISSING)
    return years * WEEKS_PER_YEAR if isinstance(years, float) else MISSING


def _diluent_contains_calcium(
    situation: Situation, values: _Values
) -> FactValue | Missing:
    named = values.get("diluents", MISSING)
    if not isinstance(named, frozenset):
        return MISSING
    table = situation.library.diluents
    if any("calcium" in table[n].contents_mmol_l for n in named if n in table):
        return True
    return MISSING if any(name not in table for name in named) else False


def _storage_temperature_gap(
    situation: Situation, _values: _Values
) -> FactValue | Missing:
    measured = situation.brief.ph.measure_temperature_c
    stored = situation.brief.liquid_storage_temperatures_c
    return max((abs(at - measured) for at in stored), default=0.0)


def _coldest_storage(situation: Situation, _values: _Values) -> FactValue | Missing:
    stored = situation.brief.temperatures_c(kind="storage")
    return stored[0] if stored else MISSING


def _warmest(situation: Situation, _values: _Values) -> FactValue | Missing:
    met = [
        entry.temperature_c
        for entry in situation.brief.storage
        if entry.kind in ("storage", "use", "process")
    ]
    return max(met, default=MISSING) if met else MISSING


def _frozen_window_given(situation: Situation, values: _Values) -> FactValue | Missing:
    window = situation.brief.ph.storage_low is not None
    return window and values.get("freezes") is True


def _drug_capacity(situation: Situation, _values: _Values) -> FactValue | Missing:
    found = situation.drug_capacity_mmol_l_ph
    return MISSING if found is None else found


PRODUCT_COMPUTED: Mapping[str, _ProductFact] = {
    "excipients_listed": _excipients_listed,
    "freezes": _freezes,
    "age_years": _age_years,
    "age_weeks": _age_weeks,
    "diluent_contains_calcium": _diluent_contains_calcium,
    "storage_temperature_gap_c": _storage_temperature_gap,
    "coldest_storage_temperature_c": _coldest_storage,
    "warmest_temperature_c": _warmest,
    "frozen_window_given": _frozen_window_given,
    "drug_capacity_mmol_l_ph": _drug_capacity,
}


def _per(component: str, *, day: bool = False, scale: float = 1.0) -> _CandidateFact:
    def amount(
        situation: Situation, quantities: CandidateQuantities, _values: _Values
    ) -> FactValue | Missing:
        dose = situation.brief.dose
        volume = dose.volume_ml_day if day else dose.volume_ml
        return quantities.component_mmol_l(component) * volume / 1000.0 * scale

    return amount


def _maleate_mg_day(
    situation: Situation, quantities: CandidateQuantities, values: _Values
) -> FactValue | Missing:
    mass, _ = q.reference_mass_g_mol(situation.library, "maleate")
    if mass is None:
        return MISSING
    return _per("maleate", day=True, scale=mass)(situation, quantities, values)


def _coldest_liquid(situation: Situation) -> float | None:
    stored = situation.brief.liquid_storage_temperatures_c
    return stored[0] if stored else None


def _frozen_class(
    _situation: Situation, quantities: CandidateQuantities, _values: _Values
) -> FactValue | Missing:
    found = quantities.frozen_drift_class
    if found is None or found == "unknown":
        return "not_computed"
    return found.replace(" ", "_")


def _amorphous_sugar(
    situation: Situation, quantities: CandidateQuantities, _values: _Values
) -> FactValue | Missing:
    if quantities.amorphous_sugar_percent is not None:
        return quantities.amorphous_sugar_percent
    stated = situation.brief.tonicity.amorphous_sugar_percent_w_v
    found = max(stated, q.amorphous_sugar_percent(quantities, situation.library))
    return found if found > 0.0 else MISSING


CANDIDATE_COMPUTED: Mapping[str, _CandidateFact] = {
    "ph": lambda _s, c, _v: c.ph[c.measure_temperature_c],
    "ionic_strength_mol_kg": lambda _s, c, _v: c.ionic_strength_mol_kg,
    "capacity_mmol_l_ph": lambda _s, c, _v: c.capacity_mmol_l_ph,
    "titratable_acidity_mmol_l": lambda _s, c, _v: c.titratable_acidity_mmol_l,
    "titratable_acidity_mmol_dose": lambda s, c, _v: (
        c.titratable_acidity_mmol_l * s.brief.dose.volume_ml / 1000.0
    ),
    "osmolality_mosm_kg": lambda _s, c, _v: (
        MISSING if c.osmolality_mosm_kg is None else c.osmolality_mosm_kg
    ),
    "sodium_chloride_equivalent_percent": lambda _s, c, _v: (
        MISSING
        if c.osmolality_mosm_kg is None
        else c.osmolality_mosm_kg / q.SALINE_MOSM_KG * q.SALINE_PERCENT
    ),
    "sodium_chloride_mmol_l": lambda _s, c, _v: min(
        c.component_mmol_l("sodium"), c.component_mmol_l("chloride")
    ),
    "amorphous_sugar_percent": _amorphous_sugar,
    "brushite_saturation_ratio": lambda _s, c, v: q.brushite_saturation_ratio(
        c, v.get("calcium_mmol_l", MISSING)
    ),
    "neutral_form_saturation_ratio": lambda s, c, _v: q.neutral_form_saturation_ratio(
        c, s.library, _coldest_liquid(s)
    ),
    "volatile_fraction": lambda _s, c, _v: q.volatile_fraction(c),
    "frozen_drift_class": _frozen_class,
    "sodium_mmol_dose": _per("sodium"),
    "sodium_mmol_day": _per("sodium", day=True),
    "potassium_mmol_dose": _per("potassium"),
    "potassium_mmol_day": _per("potassium", day=True),
    "phosphate_mmol_dose": _per("phosphate"),
    "phosphate_mmol_day": _per("phosphate", day=True),
    "citrate_mmol_dose": _per("citrate"),
    "citrate_mmol_day": _per("citrate", day=True),
    "boron_mg_dose": _per("borate", scale=q.BORON_G_MOL),
    "boron_mg_day": _per("borate", day=True, scale=q.BORON_G_MOL),
    "maleate_mg_day": _maleate_mg_day,
    "citrate_mmol_kg_h": lambda s, c, _v: q.citrate_mmol_kg_h(c, s.brief),
    "tris_mmol_kg_dose": lambda s, c, _v: (
        c.component_mmol_l("tris")
        * s.brief.dose.volume_ml
        / 1000.0
        / s.brief.dose.body_mass_kg
    ),
    "precedent_level": lambda s, c, _v: q.precedent_level(c, s.brief, s.library),
    "in_pharmacopoeia": lambda s, c, _v: q.in_pharmacopoeia(c, s.brief, s.library),
    "precedent_ceiling_ratio": lambda s, c, _v: q.precedent_ceiling_ratio(
        c, s.brief, s.library
    ),
}
