"""From a made system to what freezing and thawing do to it."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass
from functools import partial

from formbuf.advice.case import Case
from formbuf.advice.compatibility import quantities_of
from formbuf.advice.evaluate import Product
from formbuf.advice.freeze_thaw_evidence import (
    Question,
    nearest_observations,
    published_change,
    thawing,
    verdict,
    where_samples_fall,
)
from formbuf.advice.freeze_thaw_results import FreezeThawSystem, LiquidPoint
from formbuf.advice.frozen import Frozen, freeze_to
from formbuf.advice.results import Candidate
from formbuf.library.records import System
from formbuf.product.quantities import volatile_fraction

#: Chloride below this share of the buffer is a trace of titrant (judgement).
TRACE = 0.1
#: Neutral share from which a volatile species is lost on drying (judgement).
VOLATILE_SHARE = 0.01


@dataclass(frozen=True)
class Made:
    """One made system on its way to a `FreezeThawSystem`."""

    key: str
    name: str
    system: System
    product: Product
    concentration_mmol_l: float
    standing: str = ""
    rank: int | None = None
    variant_of: str | None = None


def made_of(c: Candidate) -> Made:
    """Return a shortlisted candidate as the product that it is."""
    assert c.mixture is not None
    amounts = {w.material: w.mmol_l for w in c.composition}
    product = Product(
        c.mixture,
        amounts,
        amounts,
        c.composition,
        c.tonicity_fill,
        c.states,
        c.species_states,
        c.osmolality_mosm_kg or 0.0,
        c.buffer_osmolality_mosm_kg or 0.0,
        (),
        c.titratable_acidity_mmol_l or 0.0,
        0.0,
        0.0,
    )
    return Made(
        c.key,
        c.name,
        c.system,
        product,
        c.concentration_mmol_l,
        c.standing,
        c.rank,
        c.variant_of,
    )


def trace_of(
    case: Case, made: Made, lowest_c: float
) -> Callable[[tuple[float, ...]], Frozen]:
    """Return what follows a made system over temperatures."""
    return partial(
        freeze_to,
        case,
        made.system,
        made.product,
        made.concentration_mmol_l,
        lowest_c,
    )


def system_of(
    case: Case,
    made: Made,
    frozen: Frozen,
    lowest_c: float,
    warm_c: Sequence[float],
    *,
    is_frozen: bool,
) -> FreezeThawSystem:
    """Gather all that is said of one system, its paths given.

    Parameters
    ----------
    case : Case
    made : Made
    frozen : Frozen
        With at least one path.
    lowest_c : float
        Coldest temperature of the product [C].
    warm_c : sequence of float
        Liquid temperatures beside the product's own [C].
    is_frozen : bool
        Whether the product is frozen or dried at all.
    """
    product = made.product
    measured = next(s for s in product.states if "measure" in s.kinds)
    question = Question(
        made.concentration_mmol_l,
        measured.ph,
        lowest_c,
        frozen.sugar_percent,
        _holds_chloride(made),
    )
    seen = nearest_observations(case.library, made.system, question)
    contents = {x.name for x in product.mixture.ladders} | {
        *product.mixture.ions_mol_kg
    }
    where, sources = where_samples_fall(case.library, made.system, frozen, contents)
    found = quantities_of(case, made.system, product, frozen.counted_class)
    share = volatile_fraction(found)
    lost = share if case.brief.is_dried and share >= VOLATILE_SHARE else None
    return FreezeThawSystem(
        made.key,
        made.name,
        made.system,
        made.concentration_mmol_l,
        measured.ph,
        product.composition,
        product.tonicity_fill,
        made.standing,
        made.rank,
        made.variant_of,
        _liquid(product, warm_c),
        frozen,
        seen,
        published_change(seen),
        where,
        sources,
        thawing(case.library, made.system, frozen, contents),
        verdict(made.system, frozen, seen, is_frozen=is_frozen, volatile_share=lost),
        share,
        (*product.mixture.notes, *_left_out(product)),
        trace_of(case, made, lowest_c),
    )


def _holds_chloride(made: Made) -> bool:
    """Whether chloride is more than a trace beside the buffer."""
    mixed = made.product.mixture
    chloride = 1000.0 * float(mixed.ions_mol_kg.get("chloride", 0.0))
    return chloride * float(mixed.water_kg_l) > TRACE * made.concentration_mmol_l


def _left_out(product: Product) -> tuple[str, ...]:
    """Say what the frozen liquid is computed without."""
    if any(ladder.is_macro_ion for ladder in product.mixture.ladders):
        return ("the protein binds no protons in the frozen liquid as computed",)
    return ()


def _liquid(product: Product, warm_c: Sequence[float]) -> tuple[LiquidPoint, ...]:
    """Return pH at the liquid temperatures of the product and at those asked for."""
    points = {
        s.temperature_c: LiquidPoint(s.temperature_c, s.kinds, s.ph)
        for s in product.states
    }
    for t in warm_c:
        if t not in points:
            points[t] = LiquidPoint(t, ("asked",), float(product.mixture.solve(t).ph))
    return tuple(points[t] for t in sorted(points, reverse=True))
