"""The batch sheet of the lead, for the annex that goes to the laboratory."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

from formbuf.advice.results import Candidate, Shortlist
from formbuf.bench.batch_sheet import batch_sheet
from formbuf.bench.setup import bench_from_brief
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
        None where there is no finalist, or its formula is a list of materials.
    """
    if not shown or not _has_materials(shown[0]):
        return None
    lead = shown[0]
    completed = Completed(result.brief, result.assumptions, (), result.library)
    try:
        bench = bench_from_brief(completed, lead.system, lead.concentration_mmol_l)
        sheet = batch_sheet(bench, volume_l=BATCH_L)
    except (InputError, ConvergenceError):
        return None
    return {"candidate": lead.key, "inputs": bench_dict(bench), **sheet_dict(sheet)}


def _has_materials(candidate: Candidate) -> bool:
    system = candidate.system
    named = system.acid_material is not None or system.base_material is not None
    return named or system.role == "none"
