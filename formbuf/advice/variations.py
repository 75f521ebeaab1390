"""The same product with one requirement moved: target pH, loads, ceilings.

A variation is judged in full, screens and rules included, by the functions that judge
the product itself.
"""

from __future__ import annotations

from dataclasses import dataclass, replace
from types import MappingProxyType
from typing import TypeAlias

from formbuf.advice.case import Case, case_for
from formbuf.advice.compatibility import with_compatibility
from formbuf.advice.ranking import rank
from formbuf.advice.results import Candidate
from formbuf.advice.shortlist import judge_all
from formbuf.errors import InputError
from formbuf.library import Library
from formbuf.product.brief import Completed

LOWEST_TARGET_PH, HIGHEST_TARGET_PH = 1.0, 13.0


@dataclass(frozen=True, slots=True)
class Variation:
    """What is moved; the defaults move nothing.

    Attributes
    ----------
    target_shift_ph : float
        Added to the target; the window moves along.
    acid_factor, base_factor : float
        Times every load of acid or base.
    ceiling_factor : float
        Times the ceiling of every species on the route.
    """

    target_shift_ph: float = 0.0
    acid_factor: float = 1.0
    base_factor: float = 1.0
    ceiling_factor: float = 1.0


def ranked_with(completed: Completed, variation: Variation) -> tuple[Candidate, ...]:
    """Rank the candidates of a brief with something moved.

    Parameters
    ----------
    completed : Completed
    variation : Variation

    Returns
    -------
    tuple of Candidate
        As in a shortlist; ranked first.

    Raises
    ------
    InputError
        When the moved target lies outside pH 1 to 13.
    """
    case = _case(completed, variation)
    judged, _ = with_compatibility(case, judge_all(case))
    return rank(judged, case.settings)


#: Heads of variations that were judged already, for calls on the same product.
Known: TypeAlias = dict[Variation, tuple[Candidate, ...]]


def heads_with(
    completed: Completed, variation: Variation, known: Known
) -> tuple[Candidate, ...]:
    """Return one candidate per place of a variation, judged once.

    ``known`` is kept by the caller for one product; raises as `ranked_with`.
    """
    found = known.get(variation)
    if found is None:
        found = known[variation] = heads_of(ranked_with(completed, variation))
    return found


def heads_of(ranked: tuple[Candidate, ...]) -> tuple[Candidate, ...]:
    """Return one candidate per place, best first."""
    return tuple(c for c in ranked if c.rank is not None and c.variant_of is None)


def _case(completed: Completed, variation: Variation) -> Case:
    brief = completed.brief
    if variation.target_shift_ph:
        ph, shift = brief.ph, variation.target_shift_ph
        target = round(ph.target + shift, 9)
        if not LOWEST_TARGET_PH <= target <= HIGHEST_TARGET_PH:
            msg = (
                f"target pH {target:g}, allowed {LOWEST_TARGET_PH:g} to "
                f"{HIGHEST_TARGET_PH:g}"
            )
            raise InputError(msg)
        moved = replace(
            ph,
            target=target,
            low=round(ph.low + shift, 9),
            high=round(ph.high + shift, 9),
        )
        completed = replace(completed, brief=replace(brief, ph=moved))
    if variation.ceiling_factor != 1.0:
        library = with_ceilings(completed.library, variation.ceiling_factor)
        completed = replace(completed, library=library)
    case = case_for(completed)
    if variation.ceiling_factor != 1.0:
        case = _with_fallback(case, variation.ceiling_factor)
    if variation.acid_factor != 1.0 or variation.base_factor != 1.0:
        case = replace(
            case, loads=case.loads.scaled(variation.acid_factor, variation.base_factor)
        )
    return case


def with_ceilings(library: Library, factor: float) -> Library:
    """Return the library with the ceiling of every species times a factor."""
    rows = {
        key: row
        if row.ceiling_mmol_l is None
        else replace(row, ceiling_mmol_l=factor * row.ceiling_mmol_l)
        for key, row in library.precedents.items()
    }
    return replace(library, precedents=MappingProxyType(rows))


def _with_fallback(case: Case, factor: float) -> Case:
    """Move the ceiling of species that have none of their own, too."""
    table = case.settings.table
    capacity = table["anchors"]["capacity"]
    moved = {**capacity, "fallback_ceiling": factor * capacity["fallback_ceiling"]}
    anchors = {**table["anchors"], "capacity": moved}
    settings = replace(case.settings, table={**table, "anchors": anchors})
    return replace(case, settings=settings)
