"""Chances of each rank, of leading, and what choosing each would cost.

Rank acceptability: Lahdelma & Salminen 2001, Oper. Res. 49, 444, here over the errors
of the inputs at the given weights, over weights around the given ones, and over all
weights alike (uniform on the simplex).
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence

import numpy as np
from numpy.typing import NDArray

from formbuf.advice.chance_records import Chance, Flip, RankChances
from formbuf.advice.draw_criteria import overall
from formbuf.advice.sampling import Sampler

Array = NDArray[np.float64]


def chance(hits: NDArray[np.bool_]) -> Chance:
    """Return the share of draws in which something holds.

    Parameters
    ----------
    hits : ndarray of bool, shape (draws,)
    """
    count = int(hits.size)
    share = float(np.count_nonzero(hits)) / count
    smooth = (share * count + 1.0) / (count + 2.0)
    return Chance(share, float(np.sqrt(smooth * (1.0 - smooth) / (count + 2.0))))


def rank_chances(scores: Array) -> tuple[RankChances, ...]:
    """Rank candidates in every draw.

    Parameters
    ----------
    scores : ndarray, shape (candidates, draws)
        ln desirability; equal ones rank in the order of the rows.

    Returns
    -------
    tuple of RankChances
        One per candidate.
    """
    order = np.argsort(-scores, axis=0, kind="stable")
    places = np.empty_like(order)
    rows = np.arange(scores.shape[0])[:, np.newaxis]
    np.put_along_axis(places, order, np.broadcast_to(rows, order.shape), axis=0)
    desirability = np.exp(scores)
    loss = desirability.max(axis=0) - desirability
    return tuple(
        RankChances(
            tuple(chance(own == k) for k in range(scores.shape[0])),
            chance(own == 0),
            float(np.mean(loss[i])),
        )
        for i, own in enumerate(places)
    )


def flips(keys: Sequence[str], scores: Array) -> tuple[Flip, ...]:
    """Chance of the other order for every pair; the first stands ahead nominally."""
    return tuple(
        Flip(keys[i], keys[j], chance(scores[j] > scores[i]))
        for i in range(len(keys))
        for j in range(i + 1, len(keys))
    )


def tied(found: Sequence[Flip], share: float) -> dict[str, tuple[str, ...]]:
    """Partners of each candidate whose order flips in more than a share of the draws."""
    partners: dict[str, list[str]] = {}
    for flip in found:
        partners.setdefault(flip.first, [])
        partners.setdefault(flip.second, [])
        if flip.chance.value > share:
            partners[flip.first].append(flip.second)
            partners[flip.second].append(flip.first)
    return {key: tuple(names) for key, names in partners.items()}


def weights_around(
    sampler: Sampler, weights: Mapping[str, float], concentration: float
) -> dict[str, Array]:
    """Weights drawn from a Dirichlet distribution around the given ones.

    Parameters
    ----------
    sampler : Sampler
    weights : mapping of criterion to float
        Those of the criteria that apply; a zero weight stays zero.
    concentration : float
        The larger, the closer to the given ones; a weight of share p varies by
        sqrt((1 - p) / (p (concentration + 1))) of itself.

    Returns
    -------
    dict of criterion to ndarray, shape (draws,)
        Not normalised.
    """
    total = sum(weights.values())
    return {
        name: sampler.gamma(f"weight:{name}", concentration * weight / total)
        if weight > 0.0
        else np.zeros(sampler.count)
        for name, weight in weights.items()
    }


def any_weights(sampler: Sampler, names: Sequence[str]) -> dict[str, Array]:
    """Weights uniform on the simplex, not normalised, shape (draws,) each."""
    return {name: sampler.exponential(f"any weight:{name}") for name in names}


def score_table(
    logs: Sequence[Mapping[str, Array]],
    weights: Mapping[str, float] | Mapping[str, Array],
    count: int,
) -> Array:
    """Return ln desirability of each candidate, shape (candidates, draws)."""
    return np.stack([overall(one, weights, count) for one in logs])
