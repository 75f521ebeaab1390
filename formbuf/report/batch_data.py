"""The batch sheet of the lead, for the annex that goes to the laboratory."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from typing import Any

from formbuf.advice.results import Candidate, Shortlist
from formbuf.bench.batch_sheet import batch_sheet
from formbuf.bench.setup import bench_from_brief, bench_from_formula
from formbuf.errors import ConvergenceError, InputError
from formbuf.output.batch_sheet_page import sheet_dict
from formbuf.output.bench_words import bench_dict
from formbuf.product.brief import Completed

#: Size of the batch in the annex [L]; amounts scale with it.
BATCH_L = 1.0


def batch_data(result: Shortlist, shown: Sequence[Candidate]) -> dict[str, Any] | None:
    """Return the batch sheet of the first candidate shown, for one litre.

    Parameters
    ----------
    result : Shortlist
    shown : sequence of Candidate
        The finalists, best first.

    Returns
    -------
    dict or None
        None where there is no finalist, or nothing to make it of is known.
    """
    if not shown:
        return None
    lead = shown[0]
    given = _given(result, lead)
    if given is None and not _has_materials(lead):
        return None
    completed = Completed(result.brief, result.assumptions, (), result.library)
    made = lead.system, lead.concentration_mmol_l
    try:
        bench = (
            bench_from_brief(completed, *made)
            if given is None
            else bench_from_formula(completed, *made, given)
        )
        sheet = batch_sheet(bench, volume_l=BATCH_L)
    except (InputError, ConvergenceError):
        return None
    return {"candidate": lead.key, "inputs": bench_dict(bench), **sheet_dict(sheet)}


def _given(result: Shortlist, candidate: Candidate) -> Mapping[str, float] | None:
    """Return the materials of an own formula that is a list of them."""
    if not candidate.is_own_formula:
        return None
    for own in result.brief.candidate:
        if own.name == candidate.name and own.materials:
            return own.materials
    return None


def _has_materials(candidate: Candidate) -> bool:
    system = candidate.system
    named = system.acid_material is not None or system.base_material is not None
    return named or system.role == "none"
