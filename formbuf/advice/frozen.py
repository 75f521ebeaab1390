"""What freezing or drying does to a candidate, and what it weighs."""

from __future__ import annotations

from dataclasses import dataclass, replace
from functools import lru_cache

from formbuf.advice.case import Case
from formbuf.advice.evaluate import Product
from formbuf.advice.results import CriterionResult
from formbuf.advice.wording import upper_first
from formbuf.chemistry.freezing_records import FreezingContents, IonAmount
from formbuf.errors import ConvergenceError, InputError
from formbuf.library import Library
from formbuf.library.records import System
from formbuf.product.freezing_assess import (
    FreezingAssessment,
    assess_freezing,
    evidence_of,
    freezing_contents,
)
from formbuf.product.freezing_data import observations
from formbuf.product.quantities import VOLATILE
from formbuf.product.vocabulary import AMORPHOUS_SUGARS

#: Shelf temperature at which a product is taken to freeze before drying [C].
FREEZE_DRYING_C = -40.0
#: From the mildest to the worst; an amorphous sugar eases by one step.
STEPS = ("negligible", "moderate", "severe")
SUGAR_PERCENT = 5.0
#: Uncharged share from which a volatile species is flagged on drying.
VOLATILE_SHARE = 0.01


@dataclass(frozen=True, slots=True)
class Frozen:
    """Freezing of one candidate.

    Attributes
    ----------
    assessment : FreezingAssessment
        The composition as made.
    counted_class : str
        Class that the ranking and the rules use.
    remark : str
        Why it differs from the class of the assessment; empty where it does not.
    sugar_percent : float
        Amorphous sugar that was counted [% w/v].
    """

    assessment: FreezingAssessment
    counted_class: str
    remark: str
    sugar_percent: float


def lowest_frozen_c(case: Case) -> float | None:
    """Coldest temperature that matters, or None where nothing freezes."""
    brief = case.brief
    if brief.is_dried:
        return FREEZE_DRYING_C
    if brief.is_frozen:
        frozen = brief.temperatures_c("frozen")
        return min(frozen, default=FREEZE_DRYING_C)
    return None


def freeze(
    case: Case, system: System, product: Product, concentration_mmol_l: float
) -> Frozen | None:
    """Assess a candidate on freezing; None where the product is never frozen.

    Parameters
    ----------
    case : Case
    system : System
    product : Product
    concentration_mmol_l : float
        Of the buffer.

    Returns
    -------
    Frozen or None
    """
    lowest = lowest_frozen_c(case)
    if lowest is None or not product.mixture.ladders:
        return None
    return freeze_to(case, system, product, concentration_mmol_l, lowest)


def freeze_to(
    case: Case,
    system: System,
    product: Product,
    concentration_mmol_l: float,
    lowest_c: float,
    temperatures_c: tuple[float, ...] | None = None,
) -> Frozen:
    """Assess a candidate down to a temperature."""
    brief = case.brief
    measured = next(s for s in product.states if "measure" in s.kinds)
    contents = freezing_contents(
        case.library,
        product.mixture,
        measured.ph,
        system=system,
        prepare_temperature_c=brief.ph.measure_temperature_c,
        osmotic_slopes=case.law.neutrals,
    )
    sugar = _sugar_percent(case, product)
    mass = sum(row.g_l for row in product.composition)

    def assess(what: FreezingContents) -> FreezingAssessment:
        return _assessed(
            case.library,
            system,
            what,
            lowest_c,
            temperatures_c,
            concentration_mmol_l,
            sugar,
            mass,
        )

    try:
        found = assess(contents)
    except (InputError, ConvergenceError) as error:
        found = _unassessed(case, system, str(error))
        return Frozen(found, found.freezing_class, "", sugar)
    counted, remarks = found.freezing_class, []
    swapped = _with_sodium(case, system, contents)
    if swapped is not None:
        bound = assess(swapped).freezing_class
        if _worse(bound, counted):
            counted = bound
            remarks.append(
                "sodium from other ingredients or glass can take the place of "
                "potassium: the bound of the sodium salt counts"
            )
    limit = case.settings.number("frozen_drift", "eased_at_or_below_mmol_l")
    if sugar >= SUGAR_PERCENT - 1e-9 and concentration_mmol_l <= limit + 1e-9:
        eased = _eased(counted)
        if eased != counted:
            remarks.append(
                f"{sugar:.3g} % of an amorphous sugar with {concentration_mmol_l:g} "
                f"mmol/L of buffer eases it from {counted} to {eased}"
            )
            counted = eased
    return Frozen(found, counted, "; ".join(remarks), sugar)


@lru_cache(maxsize=512)
def _assessed(
    library: Library,
    system: System,
    contents: FreezingContents,
    lowest_c: float,
    temperatures_c: tuple[float, ...] | None,
    concentration_mmol_l: float,
    sugar_percent: float,
    buffer_g_l: float,
) -> FreezingAssessment:
    """Assess a composition once; grids of briefs ask for the same one many times."""
    return assess_freezing(
        library,
        system,
        contents,
        lowest_c=lowest_c,
        temperatures_c=temperatures_c,
        concentration_mmol_l=concentration_mmol_l,
        sugar_percent=sugar_percent,
        buffer_g_l=buffer_g_l,
    )


def drying_notes(case: Case, product: Product) -> list[str]:
    """Name volatile species whose uncharged share goes with the water on drying.

    Above about 1 % uncharged at the product's pH a species is flagged (`judgement`);
    how much leaves is not predicted, for want of data.
    """
    if not case.brief.is_dried:
        return []
    notes = []
    for name in VOLATILE:
        rows = [r for r in product.species_states if r.component == name]
        total = sum(r.mmol_l for r in rows)
        share = sum(r.mmol_l for r in rows if r.charge == 0) / total if total else 0.0
        if share > VOLATILE_SHARE:
            notes.append(
                f"{100.0 * share:.0f} % of the {name} is uncharged at this pH and "
                "volatile: some leaves on drying, and the pH after reconstitution moves"
            )
    return notes


def _unassessed(case: Case, system: System, why: str) -> FreezingAssessment:
    """Return an answer without paths: what the model refused, and the evidence."""
    known = evidence_of(case.library, system)
    return FreezingAssessment(
        system.id,
        known.freezing_class,
        known.basis,
        f"not computed ({why}); {known.reason}",
        known.sources,
        quantified=False,
        paths=(),
        freezing_shift=None,
        cooling_shift=None,
        where_samples_fall="",
        observations=observations(case.library, system.id),
        notes=(),
    )


def warm_note(case: Case, system: System) -> str:
    """Say of a product that is never frozen what freezing would do to a system."""
    if lowest_frozen_c(case) is not None:
        return ""
    known = evidence_of(case.library, system)
    if known.freezing_class != "severe":
        return ""
    reason = upper_first(known.reason)
    return f"would fail if frozen; this product is not frozen. {reason}"


def _sugar_percent(case: Case, product: Product) -> float:
    """Amorphous sugar in the product, or what the brief is taken to hold."""
    mixed = product.mixture
    dissolved = sum(
        float(amount)
        * float(mixed.water_kg_l)
        * case.library.neutrals[name].molar_mass_g_mol
        / 10.0
        for name, amount in mixed.neutrals_mol_kg.items()
        if name in AMORPHOUS_SUGARS
    )
    return max(dissolved, case.brief.tonicity.amorphous_sugar_percent_w_v)


def _with_sodium(
    case: Case, system: System, contents: FreezingContents
) -> FreezingContents | None:
    """Contents with potassium exchanged for sodium, for a potassium phosphate."""
    if "phosphate" not in system.species or "sodium" in case.brief.exclude:
        return None
    amounts = {ion.name: ion for ion in contents.ions}
    if "potassium" not in amounts:
        return None
    sodium = amounts["potassium"].mol_kg + (
        amounts["sodium"].mol_kg if "sodium" in amounts else 0.0
    )
    others = [i for i in contents.ions if i.name not in ("sodium", "potassium")]
    return replace(
        contents,
        ions=(*others, IonAmount("sodium", 1, sodium)),
        base_ion=("sodium", 1),
    )


def _worse(one: str, other: str) -> bool:
    if one not in STEPS:
        return False
    return other not in STEPS or STEPS.index(one) > STEPS.index(other)


def _eased(name: str) -> str:
    return STEPS[max(STEPS.index(name) - 1, 0)] if name in STEPS else name


def criterion(case: Case, frozen: Frozen) -> CriterionResult:
    """Desirability of the class that counts."""
    section = case.settings.table["frozen_drift"]
    name = frozen.counted_class
    key = {"sources disagree": "disputed"}.get(name, name)
    if key not in section:
        msg = f"freezing class {name!r} has no desirability in criteria.toml"
        raise InputError(msg)
    found = frozen.assessment
    text = f"{name}: {found.reason}"
    if frozen.remark:
        text += f"; {frozen.remark}"
    settled = found.quantified or found.basis == "published"
    step = case.settings.number("uncertainty", "frozen_step_ln")
    return CriterionResult(
        abs(found.freezing_shift) if found.freezing_shift is not None else None,
        "pH",
        float(section[key]),
        text,
        sources=found.sources,
        deviation_ln=0.5 * step if settled else step,
    )
