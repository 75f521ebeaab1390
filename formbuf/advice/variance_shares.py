"""Which input the spread of a result comes from: first-order variance shares.

The share of an input is the variance of the mean of the result at given values of
the input, over the variance of the result (Sobol 1993, Math. Model. Comput. Exp. 1,
407: first-order index; memory). It is read off the draws by slices of equal
probability, with the bias of a finite count taken off, so that no further model runs
are needed.
"""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from formbuf.advice.draw_inputs import Input
from formbuf.advice.sampling import Sampler

Array = NDArray[np.float64]

#: Draws per slice, and most slices.
PER_SLICE, MOST_SLICES = 50, 40
#: Shares below this are not told apart from zero.
LEAST_SHARE = 0.02
SHOWN = 6


@dataclass(frozen=True, slots=True)
class InputShare:
    """Part of a variance that one input brings.

    Attributes
    ----------
    name, label, advice : str
    share : float
        0 to 1.
    deviation : float
        One standard deviation of the input, in ``unit``.
    unit : str
    """

    name: str
    label: str
    advice: str
    share: float
    deviation: float
    unit: str


@dataclass(frozen=True, slots=True)
class QuantityShares:
    """What the spread of one quantity comes from.

    Attributes
    ----------
    quantity : str
        As people say it.
    deviation : float
        Its standard deviation.
    inputs : tuple of InputShare
        Largest first, those of 2 % or more.
    rest : float
        What the other inputs and their interplay bring, 0 to 1.
    """

    quantity: str
    deviation: float
    inputs: tuple[InputShare, ...]
    rest: float


def first_order_share(values: Array, order: NDArray[np.intp]) -> float:
    """Share of the variance of draws that one input explains.

    Parameters
    ----------
    values : ndarray, shape (draws,)
    order : ndarray of int, shape (draws,)
        Rank of the input in each draw, 0 to draws - 1.

    Returns
    -------
    float
        0 to 1.
    """
    count = values.size
    slices = max(min(count // PER_SLICE, MOST_SLICES), 2)
    place = order * slices // count
    sizes = np.bincount(place, minlength=slices)
    means = np.bincount(place, weights=values, minlength=slices) / sizes
    total = float(np.sum((values - values.mean()) ** 2))
    if total <= 0.0:
        return 0.0
    within = float(np.sum((values - means[place]) ** 2))
    share = 1.0 - (count - 1) / (count - slices) * within / total
    return min(max(share, 0.0), 1.0)


def quantity_shares(
    quantity: str, values: Array, inputs: Mapping[str, Input], sampler: Sampler
) -> QuantityShares:
    """Return what the spread of a quantity comes from.

    Parameters
    ----------
    quantity : str
    values : ndarray, shape (draws,)
    inputs : mapping of str to Input
        Everything that was drawn for it.
    sampler : Sampler
    """
    centred = values - float(np.mean(values))
    shares = [
        InputShare(
            entry.name,
            entry.label,
            entry.advice,
            first_order_share(centred, sampler.order(entry.name)),
            entry.deviation,
            entry.unit,
        )
        for entry in inputs.values()
    ]
    return QuantityShares(quantity, float(np.std(values)), *_largest(shares))


def _largest(shares: Iterable[InputShare]) -> tuple[tuple[InputShare, ...], float]:
    ordered = sorted(shares, key=lambda one: (-one.share, one.name))
    kept = tuple(one for one in ordered if one.share >= LEAST_SHARE)[:SHOWN]
    return kept, max(1.0 - sum(one.share for one in kept), 0.0)
