"""What would change the order: weights, loads, and what is taken for granted."""

from __future__ import annotations

import math
from collections.abc import Mapping
from typing import Any

from formbuf.advice.desirability import geometric_mean
from formbuf.advice.ranking import group_of
from formbuf.advice.results import Candidate, Shortlist


def sensitivity(result: Shortlist) -> dict[str, Any]:
    """Return how the lead depends on each weight and on the loads, as plain data.

    The rival is the back-up.

    Returns
    -------
    dict
        ``weights``: for each criterion the weight in use, who leads without it and
        with twice its weight, and the weight at which the runner-up draws level
        (null where none does). ``load_factor``: how many times the budgeted loads the
        lead carries as proposed. ``ceiling_factor``: about how many times they may
        grow before its ceiling is reached.
    """
    heads = list(result.heads)
    if not heads:
        return {"weights": [], "load_factor": None, "ceiling_factor": None}
    lead = heads[0]
    rival = result.backup
    weights = dict(result.settings.weights)
    ranked = list(result.ranked)
    rows = []
    for name in lead.criteria:
        total = sum(w for other, w in weights.items() if other in lead.criteria)
        alone = weights[name] >= total
        rows.append(
            {
                "criterion": name,
                "weight": weights[name],
                "without": None if alone else _leader(ranked, {**weights, name: 0.0}),
                "doubled": _leader(ranked, {**weights, name: 2.0 * weights[name]}),
                "level_at": None
                if rival is None
                else _level_at(name, lead, rival, weights),
            }
        )
    ceiling = None
    if lead.required_mmol_l and lead.ceiling_mmol_l:
        ceiling = lead.ceiling_mmol_l / lead.required_mmol_l
    return {
        "weights": rows,
        "load_factor": lead.carried_share,
        "ceiling_factor": ceiling,
    }


def _leader(ranked: list[Candidate], weights: Mapping[str, float]) -> str:
    """Return the key of the candidate that would come first."""
    best = min(ranked, key=lambda c: (-round(_overall(c, weights), 12), c.key))
    return best.key


def _overall(candidate: Candidate, weights: Mapping[str, float]) -> float:
    values = {name: c.desirability for name, c in candidate.criteria.items()}
    if not any(weights.get(name, 0.0) for name in values):
        return 0.0
    return geometric_mean(values, weights)


def _level_at(
    name: str, lead: Candidate, rival: Candidate, weights: Mapping[str, float]
) -> float | None:
    """Weight of a criterion at which lead and rival come out level, others kept.

    Only where both are judged by the same criteria; None where no weight of zero or
    more does it.
    """
    if set(lead.criteria) != set(rival.criteria):
        return None
    gap = {
        n: math.log(lead.criteria[n].desirability)
        - math.log(rival.criteria[n].desirability)
        for n in lead.criteria
    }
    rest = sum(weights[n] * gap[n] for n in gap if n != name)
    if abs(gap[name]) < 1e-9:
        return None
    level = -rest / gap[name]
    return level if level >= 0.0 and math.isfinite(level) else None


def finalists(result: Shortlist, most: int = 5) -> list[Candidate]:
    """Return the candidates shown side by side, best first.

    The lead, the back-up, who is tied with either, then the next places, and the
    formulas of the brief; one of each buffering species.
    """
    heads = list(result.heads)
    if not heads:
        return []
    first = heads[:2]
    near = {key for c in first for key in c.tied_with}
    chosen = [*first, *(c for c in heads[2:] if c.key in near or c.is_own_formula)]
    chosen += [c for c in heads[2:] if c not in chosen]
    kept = chosen[:most]
    return [c for c in heads if c in kept]


def nearest_misses(result: Shortlist, most: int = 5) -> list[Candidate]:
    """Return who came nearest where all are dropped: the fewest screens first."""
    dropped = sorted(
        result.dropped,
        key=lambda c: (len(c.dropped_by), -(c.desirability or 0.0), c.key),
    )
    found: list[Candidate] = []
    groups: set[str] = set()
    for candidate in dropped:
        if group_of(candidate) not in groups:
            groups.add(group_of(candidate))
            found.append(candidate)
    return found[:most]
