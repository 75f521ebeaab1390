"""Smallest change of a weight that changes the lead, exactly.

The logarithm of the overall desirability is linear in each weight, so that the weight
at which lead and rival draw level follows without trial.
"""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence

from formbuf.advice.chance_records import WeightChange
from formbuf.advice.results import Candidate

#: Differences of ln desirability below this do not count.
LEVEL = 1e-9


def weight_changes(
    heads: Sequence[Candidate], weights: Mapping[str, float]
) -> tuple[WeightChange, ...]:
    """Return the smallest change of each weight that changes the lead.

    Parameters
    ----------
    heads : sequence of Candidate
        Ranked, the lead first.
    weights : mapping of criterion to float

    Returns
    -------
    tuple of WeightChange
        One per criterion of the lead, the smallest relative change first.
    """
    if not heads:
        return ()
    lead, rivals = heads[0], heads[1:]
    found = []
    for name in lead.criteria:
        best: tuple[float, str] | None = None
        for rival in rivals:
            needed = _level_at(name, lead, rival, weights)
            if needed is None:
                continue
            change = abs(needed - weights[name])
            if best is None or change < abs(best[0] - weights[name]):
                best = (needed, rival.key)
        found.append(
            WeightChange(
                name,
                weights[name],
                best[0] if best else None,
                best[1] if best else None,
            )
        )
    return tuple(sorted(found, key=_ease))


def _ease(change: WeightChange) -> tuple[float, str]:
    if change.needed is None:
        return math.inf, change.criterion
    return abs(change.needed - change.weight), change.criterion


def _level_at(
    name: str, lead: Candidate, rival: Candidate, weights: Mapping[str, float]
) -> float | None:
    """Weight at which two come out level, others kept; None where none does."""
    if set(lead.criteria) != set(rival.criteria):
        return None
    gap = {
        n: math.log(lead.criteria[n].desirability)
        - math.log(rival.criteria[n].desirability)
        for n in lead.criteria
    }
    if abs(gap[name]) < LEVEL:
        return None
    rest = sum(weights[n] * gap[n] for n in gap if n != name)
    needed = -rest / gap[name]
    return needed if needed >= 0.0 else None
