"""Order, ties and standing of the candidates that no screen dropped."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import replace

from formbuf.advice.criteria_table import Settings
from formbuf.advice.desirability import geometric_mean
from formbuf.advice.results import Candidate, Standing
from formbuf.errors import InputError

NONE_ID = "none"
#: Half a step of the last digit in which desirability is printed.
SAME_DESIRABILITY = 0.0005


def scored(candidate: Candidate, settings: Settings) -> Candidate:
    """Return the candidate with its overall desirability and what limits it."""
    values = {name: c.desirability for name, c in candidate.criteria.items()}
    if not values:
        return candidate
    weights = settings.weights
    total = sum(weights[name] for name in values)
    if total <= 0.0:
        msg = (
            "ranking.weights: every criterion that applies to this product "
            f"({', '.join(values)}) has weight 0, allowed at least one above zero"
        )
        raise InputError(msg)
    worst = min(
        values, key=lambda n: (weights[n] * math.log(values[n]), list(values).index(n))
    )
    variance = sum(
        (weights[n] / total * candidate.criteria[n].deviation_ln) ** 2 for n in values
    )
    marked = {
        name: replace(c, limiting=name == worst and values[worst] < 1.0)
        for name, c in candidate.criteria.items()
    }
    return replace(
        candidate,
        criteria=marked,
        desirability=geometric_mean(values, weights),
        deviation_ln=math.sqrt(variance),
    )


def group_of(candidate: Candidate) -> str:
    """Name what shares one place: a buffering species, or an own formula."""
    if candidate.is_own_formula or not candidate.system.species:
        return candidate.key
    if candidate.is_mixture:
        return candidate.key
    return candidate.system.species[0]


def rank(candidates: Sequence[Candidate], settings: Settings) -> tuple[Candidate, ...]:
    """Rank candidates; one place per buffering species, the best of it stands.

    Parameters
    ----------
    candidates : sequence of Candidate
        Judged; those with a screen in force get no rank.
    settings : Settings

    Returns
    -------
    tuple of Candidate
        Ranked first with variants after their head, then unranked, then dropped.
    """
    alive = [scored(c, settings) for c in candidates if _is_ranked(c)]
    unranked = [scored(c, settings) for c in candidates if _is_beside(c)]
    dropped = [
        replace(scored(c, settings), standing="screened out")
        for c in candidates
        if c.dropped_by
    ]
    groups: dict[str, list[Candidate]] = {}
    for candidate in sorted(alive, key=_order):
        groups.setdefault(group_of(candidate), []).append(candidate)
    groups = {name: _plainest_first(members) for name, members in groups.items()}
    heads = [members[0] for members in groups.values()]
    ties = _ties(heads, settings)
    result: list[Candidate] = []
    for position, head in enumerate(heads, start=1):
        standing = _standing(head, result)
        result.append(
            replace(head, rank=position, standing=standing, tied_with=ties[head.key])
        )
        result += [
            replace(member, rank=position, standing="viable", variant_of=head.key)
            for member in groups[group_of(head)][1:]
        ]
    return (*result, *unranked, *sorted(dropped, key=lambda c: c.name))


def _is_ranked(candidate: Candidate) -> bool:
    if candidate.dropped_by or not candidate.criteria:
        return False
    return candidate.system.id != NONE_ID or candidate.standing == "lead"


def _is_beside(candidate: Candidate) -> bool:
    return not candidate.dropped_by and not _is_ranked(candidate)


def _order(candidate: Candidate) -> tuple[float, str]:
    return (-round(candidate.desirability or 0.0, 12), candidate.key)


def _plainest_first(members: Sequence[Candidate]) -> list[Candidate]:
    """Let the plainest salt stand for its species where desirability is the same.

    Within what is printed, a buffer without a second buffering species, then one with
    sodium, is what a formulator would make.
    """
    best = members[0].desirability or 0.0
    close = [c for c in members if best - (c.desirability or 0.0) < SAME_DESIRABILITY]

    def plainness(candidate: Candidate) -> tuple[int, bool]:
        system = candidate.system
        return len(system.species), system.base_titrant != "sodium_hydroxide"

    head = min(close, key=plainness)
    return [head, *(c for c in members if c is not head)]


def _standing(head: Candidate, placed: Sequence[Candidate]) -> Standing:
    """Stand first as lead; the next that buffers by another species as back-up."""
    if not placed:
        return "lead"
    taken = any(c.standing == "back-up" for c in placed)
    if not taken and head.system.species[:1] != placed[0].system.species[:1]:
        return "back-up"
    return "viable"


def _ties(heads: Sequence[Candidate], settings: Settings) -> dict[str, tuple[str, ...]]:
    """Pairs whose order could flip in more than a quarter of cases, first order."""
    width = settings.number("uncertainty", "tie_deviations")
    tied: dict[str, list[str]] = {head.key: [] for head in heads}
    for i, first in enumerate(heads):
        for second in heads[i + 1 :]:
            gap = abs(_log(first) - _log(second))
            spread = math.hypot(first.deviation_ln, second.deviation_ln)
            if gap <= width * spread or gap < 1e-12:
                tied[first.key].append(second.key)
                tied[second.key].append(first.key)
    return {key: tuple(names) for key, names in tied.items()}


def _log(candidate: Candidate) -> float:
    return math.log(max(candidate.desirability or 0.0, 1e-12))
